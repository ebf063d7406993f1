"""The worked example of our methods course: income and food expenditure of 235 Belgian households.

Data: Engel (1857), loaded from the statsmodels package. Run from the root of the repository.
"""

import statsmodels.api as sm
import statsmodels.formula.api as smf
from scipy import stats

from gatecheck import declare

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
    sample={"unit": "household", "groups": shares},
)
