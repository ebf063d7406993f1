"""Repositories whose code is read for tests, through the real command."""

from __future__ import annotations

from pathlib import Path

from support import Answer, Document, changed, commit_all, drainage, weigh, write_tree

CODE = "analysis/soil.py"
POLICY: Document = {
    "gatecheck": "policy/1",
    "scan": {"include": ["*.json"]},
    "at_least": 0,
    "rules": {"all-tests-recorded": {}},
}
PRIMARY = "from scipy import stats\nfrom gatecheck import declare\ndeclare(stats.ttest_ind(a, b), id='primary')\n"
#: 14 correlations of an invented survey.
CORRELATIONS = "".join(f"r{number} = stats.pearsonr(d[{number}], y)\n" for number in range(14))
R_CODE = "declare(t.test(y ~ g), id = 'primary')\nfor (v in c('ph', 'clay')) print(cor.test(d[[v]], y))\n"


def station(folder: Path, code: str, *records: Document, path: str = CODE, policy: Document = POLICY) -> Answer:
    """A repository with this code and these records, judged."""
    file = folder / path
    file.parent.mkdir(parents=True)
    file.write_text(code)
    write_tree(folder, *records, policy=policy)
    commit_all(folder, "analysis")
    return weigh(folder)


def record(identifier: str, path: str = CODE, **changes: object) -> Document:
    """A record that names the code that made it."""
    return changed(drainage(id=identifier, **changes), provenance={"code": path})


def exploratory(number: int) -> Document:
    """One of 14 recorded correlations, of which nothing is claimed."""
    test = {"name": "Pearson correlation", "statistic": "r", "value": 0.5, "df": 34, "p": "0.0019"}
    return record(f"survey/{number}", claim=..., status="exploratory", test=test, estimate=..., sample=...)


def test_recorded_exploratory_tests_leave_the_primary_alone(tmp_path: Path) -> None:
    answer = station(tmp_path, PRIMARY + CORRELATIONS, record("primary"), *map(exploratory, range(14)))

    assert answer.status == 0
    assert answer.rule("all-tests-recorded", "primary")["outcome"] == "met"


def test_unrecorded_tests_stand_behind_the_claim_of_the_same_file(tmp_path: Path) -> None:
    answer = station(tmp_path, PRIMARY + CORRELATIONS, record("primary"), *map(exploratory, range(4)))

    assert answer.status == 1
    file = answer.rule("all-tests-recorded", CODE)
    assert file["outcome"] == "short"
    assert file["message"].startswith(
        "No record was found for 10 of 15 hypothesis tests in this file: stats.pearsonr"
    )
    claim = answer.rule("all-tests-recorded", "primary")
    assert "so at least 11 tests stand behind this claim, which names no family" in claim["message"]


def test_primary_outcomes_in_a_family_of_their_own_stand(tmp_path: Path) -> None:
    family = {"name": "primary", "size": 6, "procedure": "holm"}
    code = (
        "from scipy import stats\nfrom gatecheck import declare\n"
        "for name in ['a', 'b', 'c', 'd', 'e', 'f']:\n    declare(stats.ttest_ind(x, y), id=f'primary/{name}')\n"
    )

    answer = station(tmp_path, code, *(record(f"primary/{name}", family=family) for name in "abcdef"))

    assert answer.status == 0


def test_a_claim_of_another_file_is_left_alone(tmp_path: Path) -> None:
    answer = station(tmp_path, "from scipy import stats\n" + CORRELATIONS, record("elsewhere", "other.py"))

    assert answer.status == 1
    assert [each["rule"] for each in answer.claim("elsewhere")["rules"]].count("all-tests-recorded") == 0
    assert answer.rule("all-tests-recorded", CODE)["outcome"] == "short"


def test_code_in_r_is_read_too(tmp_path: Path) -> None:
    answer = station(tmp_path, R_CODE, record("primary", "soil.R"), path="analysis/soil.R")

    message = answer.rule("all-tests-recorded", "analysis/soil.R")["message"]
    assert message == ("No record was found for 2 of 3 hypothesis tests in this file: cor.test (line 2, 2 times).")


def test_tests_of_the_code_itself_are_left_out_and_broken_code_is_noted(tmp_path: Path) -> None:
    (tmp_path / "tests").mkdir()
    (tmp_path / "tests" / "test_soil.py").write_text("from scipy import stats\nstats.ttest_ind(a, b)\n")

    answer = station(tmp_path, "from scipy.stats import ttest_ind\nprint 'no'\n", record("primary"))

    assert answer.status == 0
    assert answer.rule("all-tests-recorded", CODE)["outcome"] == "undecided"


def test_the_rule_is_off_unless_it_is_named(tmp_path: Path) -> None:
    answer = station(tmp_path, PRIMARY + CORRELATIONS, record("primary"), policy=changed(POLICY, rules={}))

    assert answer.status == 0
    assert [one["id"] for one in answer.verdict["claims"] + answer.verdict["reported"]] == ["primary"]
