"""Effect sizes against the statistic beside them: d, eta squared and its kin, phi and V, and r."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from compare.deriving import alarms, said_of
from scipy import special, stats
from support import Document

T34: Document = {"name": "two-sample t", "statistic": "t", "value": "2.21", "df": 34}
F57: Document = {"name": "one-way ANOVA", "statistic": "F", "value": "5.20", "df": [2, 57]}
CHI2: Document = {"name": "chi-squared test", "statistic": "chi2", "value": "5.20", "df": 1}
PAIRED: Document = {"name": "paired t", "statistic": "t", "value": "2.21", "df": 17}

LOST = [{"n": 14, "reason": "flooded"}]


def pair(n1: int = 18, n2: int = 18, **more: Any) -> Document:
    """A sample of two groups of which only the sizes are told."""
    return {"unit": "plot", "groups": [{"name": "a", "n": n1}, {"name": "b", "n": n2}], **more}


def size(measure: str, value: str, **more: Any) -> Document:
    return {"measure": measure, "value": value, "unit": "1", **more}


@pytest.mark.parametrize(
    ("test", "estimate", "sample", "told"),
    [
        # d is 2.21 times the root of 1/18 + 1/18, 0.737.
        (
            T34,
            size("Cohen's d", "1.74"),
            pair(),
            "t(34) = 2.21 with groups of 18 and 18 gives 0.697 to 0.782 as Cohen's d by every usual form, and 1.74",
        ),
        (T34, size("Hedges' g", "0.32"), pair(), "as Hedges' g by every usual form, and 0.32 is reported"),
        (T34, size("d", "0.34"), {"unit": "plot", "n": 36}, "gives 0.493 or more as d by every usual form"),
        (
            {**T34, "name": "Welch t", "df": "33.8"},
            size("Cohen's d", "1.74"),
            pair(),
            "gives 0.697 to 0.782 as Cohen's d",
        ),
        (
            {"name": "one-way ANOVA", "statistic": "F", "value": "4.88", "df": [1, 34]},
            size("Cohen's d", "1.74"),
            pair(),
            "F(1, 34) = 4.88 with groups of 18 and 18 gives 0.698 to 0.78",
        ),
        ({**T34, "df": None}, size("Cohen's d", "1.74"), pair(), "gives 0.734 to 0.76 as Cohen's d"),
        (PAIRED, size("Cohen's dz", "0.74"), {"n": 18}, "gives 0.469 to 0.552 as Cohen's dz"),
        (PAIRED, size("Cohen's d", "1.74"), {"n": 18}, "gives 0.0663 to 1.1 as Cohen's d"),
        ({**PAIRED, "name": "one-sample t"}, size("Cohen's d", "0.74"), {"n": 18}, "gives 0.469 to 0.552"),
        # Eta squared is 2 · 5.20 / (2 · 5.20 + 57), 0.154.
        (F57, size("eta squared", "0.45"), None, "F(2, 57) = 5.20 gives 0.154 as eta squared by every usual form"),
        (F57, size("eta squared", "0.10"), None, "gives 0.154 as eta squared"),
        (F57, size("eta squared", "45", unit="%"), None, "gives 15.4 as eta squared"),
        (F57, size("eta", "0.55"), None, "gives 0.154 to 0.393 as eta"),
        ({**F57, "name": "ANOVA"}, size("eta squared", "0.45"), None, "gives at most 0.154 as eta squared"),
        ({**F57, "name": "two-way ANOVA"}, size("partial eta squared", "0.10"), None, "gives 0.154 as partial"),
        (F57, size("omega squared", "0.21"), None, "gives 0.123 to 0.125 as omega squared"),
        ({**F57, "value": "0.50"}, size("omega squared", "0.12"), None, "gives -0.0171 to 0 as omega squared"),
        ({**F57, "name": "ANOVA"}, size("epsilon squared", "0.31"), None, "gives at most 0.125 as epsilon squared"),
        (F57, size("Cohen's f", "0.61"), None, "gives 0.416 to 0.427 as Cohen's f"),
        (F57, size("Cohen's f2", "0.31"), None, "gives 0.173 to 0.183 as Cohen's f2"),
        ({**F57, "name": "ANOVA"}, size("Cohen's f", "0.61"), None, "gives at most 0.427 as Cohen's f"),
        (T34, size("eta squared", "0.25"), pair(), "t(34) = 2.21 with groups of 18 and 18 gives 0.125 to 0.126"),
        # Phi is the root of 5.20 / 100, 0.228, and up to 5 / 100 more where the statistic alone is corrected.
        (CHI2, size("phi coefficient", "0.45"), {"n": 100}, "chi2(1) = 5.20 with n 100 gives 0.228 to 0.278 as"),
        (
            {**CHI2, "name": "chi-squared test without continuity correction"},
            size("phi", "0.26"),
            {"n": 100},
            "gives 0.228 as phi",
        ),
        ({**CHI2, "df": 4}, size("Cramér's V", "0.35"), {"n": 100}, "gives 0.0537 to 0.228 as Cramér's V"),
        # The correlation with the group is the root of t² / (t² + 34), 0.354.
        (T34, size("r", "0.54"), pair(), "gives 0.345 to 0.355 as r by every usual form"),
        ({**T34, "name": "Pearson correlation"}, size("correlation", "0.54"), {"n": 36}, "gives 0.345 to 0.355"),
    ],
)  # fmt: skip
def test_an_effect_size_that_its_statistic_does_not_give(
    tmp_path: Path, test: Document, estimate: Document, sample: Document | None, told: str
) -> None:
    test = {name: value for name, value in test.items() if value is not None}
    outcome, message, remedy = said_of(
        tmp_path, test=test, estimate=estimate, **({"sample": sample} if sample else {})
    )

    assert outcome == "short"
    assert told in message
    assert f"{estimate['value']} is reported" in message
    assert remedy.startswith(
        "Take the effect size from the test, and say in estimate.measure by which form it is made"
    )


@pytest.mark.parametrize(
    ("test", "estimate", "more"),
    [
        (T34, size("Cohen's d", "0.74"), {"sample": pair()}),
        (T34, size("Cohen's d", "-0.74"), {"sample": pair()}),
        ({**T34, "value": "0.00"}, size("Cohen's d", "0.00"), {"sample": pair()}),
        (T34, size("Hedges' g", "0.72"), {"sample": pair()}),
        (T34, size("Cohen's d", "2.74"), {"sample": {"n": 36}}),
        (T34, size("Glass's delta", "0.34"), {"sample": {"n": 36}}),
        # What the df or the name leave open is not compared: another design, a model, clusters, three groups.
        (T34, size("Cohen's d", "1.74"), {}),
        ({**T34, "df": 20}, size("Cohen's d", "1.74"), {"sample": {"n": 36, "excluded": LOST}}),
        ({**T34, "name": "t of a mixed model"}, size("Cohen's d", "1.74"), {"sample": pair()}),
        ({**T34, "name": "contrast"}, size("Cohen's d", "1.74"), {"sample": pair()}),
        (T34, size("Cohen's d", "1.74"), {"sample": pair(clusters=36)}),
        (T34, size("Cohen's d", "1.74"), {"sample": pair(), "covariates": ["baseline"]}),
        (T34, size("adjusted Cohen's d", "1.74"), {"sample": pair()}),
        (T34, size("Cohen's d of change", "1.74"), {"sample": pair()}),
        (T34, size("Cohen's d", "1.74", null=0.5), {"sample": pair()}),
        (T34, size("hazard", "1.74"), {"sample": pair()}),
        ({"name": "z", "statistic": "z", "value": "2.21"}, size("Cohen's d", "1.74"), {"sample": pair()}),
        (PAIRED, size("Glass's delta", "1.74"), {"sample": {"n": 18}}),
        ({**PAIRED, "df": None}, size("Cohen's dz", "1.74"), {"sample": {"n": 18}}),
        ({**T34, "df": 1, "name": "Student t"}, size("Cohen's d", "2.0"), {"sample": {"n": 3}}),
        # Among other factors a share may be smaller; of other ratios than of sums of squares none follows.
        ({**F57, "name": "two-way ANOVA"}, size("eta squared", "0.05"), {}),
        ({**F57, "name": "Welch ANOVA"}, size("eta squared", "0.45"), {}),
        ({**F57, "name": "Welch ANOVA"}, size("omega squared", "0.45"), {}),
        ({**F57, "name": "Welch ANOVA"}, size("Cohen's f", "0.95"), {}),
        (CHI2, size("eta squared", "0.45"), {}),
        (F57, size("eta", "0.39"), {}),
        (F57, size("omega squared", "0.12"), {}),
        ({**F57, "value": "0.50"}, size("omega squared", "0.00"), {}),
        ({"name": "one-way ANOVA", "statistic": "F", "value": "5.20"}, size("eta squared", "0.45"), {}),
        (CHI2, size("phi", "0.45"), {}),
        ({**CHI2, "name": "likelihood ratio test of a table"}, size("phi", "0.45"), {"sample": {"n": 100}}),
        (CHI2, size("phi", "-0.23"), {"sample": {"n": 100}}),
        ({**CHI2, "df": 4}, size("Cramér's V", "0.16"), {"sample": {"n": 100}}),
        ({**T34, "name": "Spearman rank correlation"}, size("correlation", "0.54"), {"sample": {"n": 36}}),
        ({**T34, "name": "multiple regression"}, size("correlation", "0.54"), {"sample": {"n": 36}}),
        ({**T34, "name": "Pearson correlation"}, size("correlation corrected for attenuation", "0.54"), {}),
        (T34, size("Cohen's d", "1.74"), {"sample": {"groups": [*pair()["groups"], {"name": "c", "n": 9}]}}),
        ({**T34, "name": "Yuen t"}, size("r", "0.54"), {"sample": pair()}),
        ({**T34, "name": "Hotelling t"}, size("r", "0.54"), {"sample": pair()}),
    ],
)  # fmt: skip
def test_effect_sizes_that_may_be_right_raise_no_alarm(
    tmp_path: Path, test: Document, estimate: Document, more: Document
) -> None:
    test = {name: value for name, value in test.items() if value is not None}

    assert said_of(tmp_path, test=test, estimate=estimate, **more)[:2] == ("met", "")


def test_df_that_are_of_no_design_of_two_groups_leave_d_open(tmp_path: Path) -> None:
    outcome, message, _ = said_of(
        tmp_path, test={**T34, "df": 60}, estimate=size("Cohen's d", "1.74"), sample=pair()
    )

    assert outcome == "short"
    assert "the df of t(60) = 2.21 imply 62 plots analysed" in message
    assert "usual form" not in message


def hedges(df: float) -> float:
    """The exact correction for small samples."""
    return math.exp(special.gammaln(df / 2) - special.gammaln((df - 1) / 2)) / math.sqrt(df / 2)


def of_two_groups(rng: np.random.Generator) -> tuple[dict[str, float], Any, Any, Document]:
    """Standardised differences of two groups by the forms in use, with Student's and Welch's t."""
    n1, n2 = (int(n) for n in rng.integers(8, 50, 2))
    a, b = rng.normal(10, 3, n1), rng.normal(11, 3 * rng.uniform(0.5, 2), n2)
    v1, v2, difference = a.var(ddof=1), b.var(ddof=1), a.mean() - b.mean()
    df = n1 + n2 - 2
    d = difference / math.sqrt(((n1 - 1) * v1 + (n2 - 1) * v2) / df)
    forms = {
        "Cohen's d": d,
        "Cohen's d_av": difference / math.sqrt((v1 + v2) / 2),
        "Hedges' g": d * hedges(df),
        "g": d * (1 - 3 / (4 * df - 1)),
        "d": d * math.sqrt((df + 2) / df),
        "SMD": difference / math.sqrt(v2),
        "Glass's delta": difference / math.sqrt(v1),
    }
    return forms, stats.ttest_ind(a, b), stats.ttest_ind(a, b, equal_var=False), pair(n1, n2)


def test_every_form_of_d_in_use_fits_its_t(tmp_path: Path) -> None:
    """From data: pooled and average deviations, divisor n, one group, corrected or not, Student's t and Welch's."""
    rng, records = np.random.default_rng(20310402), {}
    for number in range(12):
        forms, student, welch, sample = of_two_groups(rng)
        for measure, value in forms.items():
            for name, found, df in (("Student t", student, int(student.df)), ("Welch t", welch, f"{welch.df:.1f}")):
                test = {"name": name, "statistic": "t", "value": f"{found.statistic:.2f}", "df": df}
                records[f"{number}/{name}/{measure}".replace(" ", "-")] = {
                    "test": test, "estimate": size(measure, f"{value:.2f}"), "sample": sample
                }  # fmt: skip

    assert len(records) == 168
    assert alarms(tmp_path, records) == {}


def test_every_form_of_v_in_use_fits_its_chi_squared(tmp_path: Path) -> None:
    """From tables of two to four rows and columns: corrected for continuity or not, freed from bias or not."""
    rng, records = np.random.default_rng(20310403), {}
    for number in range(20):
        rows, columns = (int(side) for side in rng.integers(2, 5, 2))
        table = rng.multinomial(150, np.full(rows * columns, 1 / rows / columns)).reshape(rows, columns) + 1
        n, df = int(table.sum()), (rows - 1) * (columns - 1)
        phi2 = stats.chi2_contingency(table, correction=False).statistic / n
        sides = [side - (side - 1) ** 2 / (n - 1) for side in (rows, columns)]
        unbiased = math.sqrt(max(phi2 - df / (n - 1), 0) / (min(sides) - 1))
        forms = {
            "Cramér's V": math.sqrt(phi2 / (min(rows, columns) - 1)),
            "Cramér's V, bias-corrected": unbiased,
            "Cohen's w": math.sqrt(phi2),
        }
        for measure, value in forms.items():
            statistic = stats.chi2_contingency(table).statistic
            test = {"name": "chi-squared test of independence", "statistic": "chi2", "value": f"{statistic:.2f}"}
            records[f"{number}/{measure}".replace(" ", "-")] = {
                "test": {**test, "df": df}, "estimate": size(measure, f"{value:.2f}"), "sample": {"n": n}
            }  # fmt: skip

    assert len(records) == 60
    assert alarms(tmp_path, records) == {}
