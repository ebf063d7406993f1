"""Does the personalised system of instruction (PSI) go with better grades? 32 students of one economics course.

Data: Spector and Mazzeo (1980), loaded from the statsmodels package. Run from the root of the repository.
"""

import statsmodels.api as sm
from scipy import stats

from gatecheck import declare

students = sm.datasets.spector.load_pandas().data
taught_by_psi = students["PSI"] == 1
plain_course = students["PSI"] == 0
improved = students["GRADE"] == 1

# Planned: the chance of a better grade, with the average grade and the entry test held fixed.
model = sm.Logit(students["GRADE"], sm.add_constant(students[["GPA", "TUCE", "PSI"]])).fit(disp=False)
declare(
    model,
    coefficient="PSI",
    id="psi/grade-improved",
    claim="Taking part in PSI is associated with a higher chance of an improved grade.",
    status="confirmatory",
    role="primary",
    test={"alpha": 0.05},
    sample={
        "unit": "student",
        "groups": {
            "PSI": {"n": int(taught_by_psi.sum()), "events": int((taught_by_psi & improved).sum())},
            "plain course": {"n": int(plain_course.sum()), "events": int((plain_course & improved).sum())},
        },
    },
)

# Described, not claimed: the two groups before the course.
gpa_by_psi = {"PSI": students.loc[taught_by_psi, "GPA"], "plain course": students.loc[plain_course, "GPA"]}
declare(
    stats.ttest_ind(*gpa_by_psi.values(), equal_var=False),
    id="psi/average-grade-before",
    status="descriptive",
    test={"name": "Welch two-sample t"},
    estimate={"unit": "grade points"},
    sample={"unit": "student", "groups": gpa_by_psi},
)

# Seen in passing.
declare(
    stats.pearsonr(students["GPA"], students["TUCE"]),
    id="psi/average-grade-and-entry-test",
    claim="Average grade is associated with the score in the entry test.",
    status="exploratory",
    sample={"unit": "student"},
)
