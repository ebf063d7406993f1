"""The rules of consistency on results that nobody wrote for them: documented examples of scipy, statsmodels and R.

The material: the examples in scipy's own docstrings, run as installed; fits of statsmodels on the data sets that it
brings; and the examples of R's help pages, run again, with the figures as R prints them. All of it is correct, so
no rule may block on it; and a figure that is changed beyond rounding must be found where others determine it.

Counted by hand on 2026-12-01, on the documentation of scipy 1.10.1 and statsmodels 0.13.5 as packaged by Debian 12,
and the docstrings of scipy 1.17.1 and statsmodels 0.15.0 as installed (none of it is kept here). 99 findings were
judged by reading: 54 true, 45 false. All rules were set to block; left to themselves all-tests-recorded and
text-agrees are off, and a statistic without a record is a note, so that one false finding blocks by default.

- all-tests-recorded: 64 calls drawn at random from the 107 listed in notebooks and unfinished scripts; 50 true (a
  test, or a fit whose p-values the file shows). False: 9 fits to data that the same file simulates; 2 fits of which
  the file shows intervals alone; 2 fits that only an analysis of variance looks at, which was listed too; 1 step of
  an iteration that fits again. In the modules of both libraries no test was called missing, and 23 were left open.
- text-agrees, statistics without a record: all 4 in 6,002 pages and 69 notebooks, false: orders such as p = 1.
  These being mended, all 30 in the docstrings; 4 true. False: 17 in Python sessions of reStructuredText (3 of them
  statistics, but printed by code), 4 shares of an overlap such as 75 % (3/4), 3 parameters p = 0.5, a square
  x² = 1/3 and an index t[0] = 0. Sessions, squares and indices are left alone since, so that 11 are listed now, and
  4 of them are true.
- numbers-agree: 1 in 522 records, false: R prints X-squared = 8.3539e-30 where the counts give 0. It is mended, and
  no correct record here falls short since.
- Sentences written from the same records (`usual_sentences`) raised some 290 disagreements, all false, by two
  faults of reading, which are mended: the figure before an interval was taken for its estimate where it was a p or
  a statistic, and "-3.99 to -1.46" lost its second sign.

Measured on the same day: of 6,608 records with one figure changed 75.7 % were found, and of the 4,132 among them
that the other figures contradict by a second computation (`recomputed`), 98.8 %: all but limits, df and corrected
tests as `is_left_alone` tells. The others nothing determines: n beside a model, p of a rank test or beside a bound,
an odds ratio beside Fisher's p. Of 2,295 sentences with one figure changed 99.5 % were found: all but signs of a
statistic, and one estimate.
"""

from __future__ import annotations

import json
import os
import shutil
from collections import Counter
from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import Any

import pytest
from consistent_records import names_short
from prose.prosing import held
from real.material import Case, by_id
from real.mutations import Mutation, mutated_sentences, mutations_of
from real.python_results import computed_in_python
from real.r_printouts import printed_by_r
from real.recomputed import contradicted
from real.usual_sentences import Sentence, sentence
from support import Document, weigh

from gatecheck.prose.statistics_in_text import Result, ShownInterval, ShownShare, Statistic, statistics
from gatecheck.schema.records import read_record

pytestmark = pytest.mark.xdist_group("real")

SEED = 20261201
RULES = ("numbers-agree", "planned-split", "reported-in-full", "wording")
#: The names by which R tells that p is that of a corrected statistic; a larger p beside them is explained so.
CORRECTED = "with continuity correction"
HEADS = "In all, 55 of 100 (55 %), 0.55 (95 % CI: 0.45 to 0.65), χ²(1) = 0.81, p = .368."


@pytest.fixture(params=["Python", "R"])
def cases(request: pytest.FixtureRequest) -> Sequence[Case]:
    """The documented results of one source; a missing R fails continuous integration alone."""
    if request.param == "Python":
        return computed_in_python()
    if shutil.which("Rscript") is None:
        if os.environ.get("CI"):
            pytest.fail("Rscript is missing: install R and its package jsonlite")
        pytest.skip("Rscript is not installed")
    return printed_by_r()


def judged(folder: Path, cases: Sequence[Case], rules: Mapping[str, Any], prose: str = "") -> Document:
    """The verdict of the command on all cases, with a file of prose beside them."""
    documents = [each.document for each in by_id(cases).values()]
    policy = {"gatecheck": "policy/1", "name": "real material", "rules": rules}
    (folder / "all.json").write_text(json.dumps(documents), encoding="utf-8")
    (folder / "gatecheck.yaml").write_text(json.dumps(policy), encoding="utf-8")
    (folder / "report.md").write_text(prose, encoding="utf-8")
    verdict = weigh(folder).verdict
    assert verdict["problems"] == []
    return dict(verdict)


def test_there_is_material_of_many_kinds(cases: Sequence[Case]) -> None:
    assert len(cases) >= 150
    assert len({each.kind for each in cases}) >= 20
    assert sum(each.in_full for each in cases) >= 100


def test_no_correct_result_falls_short(tmp_path: Path, cases: Sequence[Case]) -> None:
    known = by_id(cases)
    verdict = judged(tmp_path, cases, {rule: {"enforce": "block"} for rule in RULES})

    told = [(row["id"], each) for row in verdict["claims"] for each in row["rules"] if each["rule"] in RULES]
    assert {row["id"] for row in verdict["claims"]} == set(known)
    short = [
        (identifier, each["rule"], each["message"])
        for identifier, each in told
        if each["outcome"] == "short" and (each["rule"] != "reported-in-full" or known[identifier].in_full)
    ]
    assert short == []
    met = Counter(each["rule"] for _, each in told if each["outcome"] == "met")
    assert min(met[rule] for rule in ("numbers-agree", "reported-in-full", "wording")) >= 100


def test_the_usual_sentence_on_a_correct_result_agrees(tmp_path: Path, cases: Sequence[Case]) -> None:
    told = "\n\n".join(sentence(each).text for each in cases)
    rules = {"text-agrees": {"unlinked": "block"}, "numbers-agree": {"enforce": "off"}}
    verdict = judged(tmp_path, cases, rules, f"# Results\n\n{told}\n")

    of_text = [row for row in verdict["others"] if row["id"].startswith("report.md")]
    assert [(row["result"], row["rules"][0]["message"]) for row in of_text] == []
    # The rule is on, and reads this file: a statistic of no record is listed.
    other = judged(tmp_path, cases, rules, "# Results\n\nIt fell, t(7.25) = -31.5, p = .0123.\n")
    assert [row["id"] for row in other["others"]] == ["report.md:3"]


def kind_of(one: Statistic) -> str:
    """The kind by which a sentence counts it."""
    if isinstance(one, Result):
        return "p alone" if one.statistic.kind == "p" else one.statistic.kind
    return "interval" if isinstance(one, ShownInterval) else "share"


def test_nearly_all_statistics_of_the_usual_sentences_are_recognised(cases: Sequence[Case]) -> None:
    told = [sentence(each) for each in cases]
    written = Counter(kind for each in told for kind in each.statistics)
    recognised = Counter[str]()
    for each in told:
        recognised += Counter(map(kind_of, statistics(each.text))) & Counter(each.statistics)
    report("recognised", written, recognised)

    assert len(written) >= 6
    assert {kind for kind, many in written.items() if recognised[kind] < 0.95 * many} <= {"p alone"}
    assert recognised.total() >= 0.95 * written.total()
    assert any(isinstance(one, ShownShare) for each in told for one in statistics(each.text)) == (
        "share" in written
    )


def report(title: str, seeded: Counter[str], found: Counter[str]) -> None:
    """Print how many of each kind were found."""
    for kind, many in sorted(seeded.items()):
        print(f"{title}: {kind:15} {found[kind]:5} of {many:5} ({found[kind] / many:.1%})")  # noqa: T201  # a measure
    print(f"{title}: in all {found.total()} of {seeded.total()}")  # noqa: T201  # a measure


def test_changed_figures_are_found(cases: Sequence[Case]) -> None:
    made = list(mutations_of(cases, SEED, each=2))
    found = [bool(names) for names in names_short(*(each.document for each in made))]
    determined = [bool(contradicted(each.document)) for each in made]
    report("changed", Counter(each.figure for each in made), figures(made, found))
    of_determined = [each for each, is_so in zip(made, determined, strict=True) if is_so]
    both = [one and other for one, other in zip(found, determined, strict=True)]
    report("determined", Counter(each.figure for each in of_determined), figures(made, both))

    assert len(made) >= 2_000
    assert sum(found) >= 0.70 * len(made)
    assert sum(both) >= 0.975 * len(of_determined) >= 1_000
    missed = [each for each, is_so, caught in zip(made, determined, found, strict=True) if is_so and not caught]
    assert [told(each) for each in missed if not is_left_alone(each)] == []


def is_left_alone(one: Mutation) -> bool:
    """What the gate does not call a disagreement, although the formula of the usual case contradicts it.

    An interval may be skewed by nature, so a limit counts as a slip only where the other one is just in its place
    and this one is off by a tenth of its distance, or by more where the error is known to few digits. A p larger
    than that of the statistic is explained by a continuity correction that the test names. And an interval may have
    the multiple of the normal or of t for its error, or any between them, so the df are not those of its limits.
    """
    of_limits = all("limit" in name for name in contradicted(one.document))
    corrected = CORRECTED in one.document["test"]["name"]
    return one.figure in {"lower limit", "upper limit"} or corrected or (one.figure == "df" and of_limits)


def figures(made: Sequence[Mutation], found: Sequence[bool]) -> Counter[str]:
    """How many of each figure were found."""
    return Counter(each.figure for each, caught in zip(made, found, strict=True) if caught)


def told(one: Mutation) -> str:
    """A mutation in one line."""
    return f"{one.case.id}: {one.figure} {one.before} became {one.after}"


def test_no_correct_result_is_contradicted_by_the_second_computation(cases: Sequence[Case]) -> None:
    assert [(each.id, contradicted(each.document)) for each in cases if contradicted(each.document)] == []


def test_changed_figures_of_sentences_are_found(cases: Sequence[Case]) -> None:
    seeded, found, missed = Counter[str](), Counter[str](), []
    for figure, one, text in mutated_sentences([sentence(each) for each in cases], SEED):
        seeded[figure] += 1
        caught = disagrees(one, text)
        found[figure] += caught
        if not caught:
            missed.append((figure, one.text, text))
    report("in text", seeded, found)

    assert seeded.total() >= 800
    assert found.total() >= 0.98 * seeded.total()
    # A text may leave out the sign of a statistic, which only says which group came first; and the estimate of an
    # interval may stand further up in its sentence, where another number may look like it.
    assert [each for each in missed if not lost_its_sign(*each) and each[:2] != ("estimate", HEADS)] == []


def disagrees(one: Sentence, text: str) -> bool:
    """Whether a text beside the record of the sentence says something that the record does not."""
    record, _ = read_record(one.case.document)
    assert record is not None
    return bool(held(f"# Results\n\n{text}\n", record).facts)


def lost_its_sign(figure: str, before: str, after: str) -> bool:
    """Whether all that a change took away is the sign of a statistic."""
    return figure == "statistic" and len(after) == len(before) - 1 and sorted(f"{after}-") == sorted(before)
