"""The worked example of our methods course: income and food expenditure of 235 Belgian households.

Data: Engel (1857), loaded from the statsmodels package. Run from the root of the repository.
"""

import numpy as np
import statsmodels.api as sm
import statsmodels.formula.api as smf
from scipy import stats

from gatecheck import declare


def shift_between(first, second):
    """Median of all pairwise differences, and its 95 % interval by the normal limits of the rank test."""
    differences = np.sort(np.subtract.outer(np.asarray(first), np.asarray(second)), axis=None)
    spread = np.sqrt(differences.size * (len(first) + len(second) + 1) / 12)
    last = round(differences.size / 2 - stats.norm.ppf(0.975) * spread)
    low, high = differences[last - 1], differences[-last]
    return {
        "measure": "shift in share",
        "unit": "1",
        "value": float(np.median(differences)),
        "interval": {"level": 0.95, "low": float(low), "high": float(high)},
    }


households = sm.datasets.engel.load_pandas().data
households["share"] = households["foodexp"] / households["income"]

# The scatter widens with income, hence the robust standard error.
line = smf.ols("foodexp ~ income", households).fit(cov_type="HC3")
declare(
    line,
    coefficient="income",
    id="food/expenditure-on-income",
    claim="Households with a higher income spend more on food.",
    status="confirmatory",
    role="primary",
    estimate={"unit": "francs per franc"},
    sample={"unit": "household"},
)

richer = households["income"] > households["income"].median()
shares = {"richer half": households.loc[richer, "share"], "poorer half": households.loc[~richer, "share"]}
declare(
    stats.mannwhitneyu(*shares.values()),
    id="food/share-by-income",
    claim="The richer half of the households spends a smaller share of its income on food.",
    status="confirmatory",
    role="secondary",
    test={"sides": 2},
    estimate=shift_between(*shares.values()),
    sample={"unit": "household", "groups": shares},
)
