"""What is told of a rerun."""

from __future__ import annotations

from typing import Any

from gatecheck.model.rerun import ChangedRecord, Compared, Failure, FieldDifference, Rerun
from gatecheck.model.verdict import Place, Problem
from gatecheck.render import rerun_account as told
from gatecheck.render import rerun_ahead

CAUTION = (
    "Commit, time and versions are not compared. That a run gives the same numbers\n"
    "shows that the code gives them in this environment, not that they are right.\n"
)
CHANGED = ChangedRecord("worms", (FieldDifference("test.p", "0.034", "0.041"), FieldDifference("claim", None, "x")))


def outcome(**changes: Any) -> Rerun:
    compared: dict[str, Any] = {"equal": ("a",), "close": (), "changed": (), "not_emitted": (), "new": ()}
    compared |= {name: changes.pop(name) for name in list(changes) if name in compared}
    rest: dict[str, Any] = {"ran": ("a.py", "b.py"), "failures": (), "problems": (), "notes": (), "tolerance": 1e-9}
    return Rerun(compared=Compared(**compared), **(rest | changes))


def test_what_will_run_is_told_before() -> None:
    assert rerun_ahead(("a.py", "li\nne \x1b[31m.py"), 80) == (
        "Runs 2 files, in this order\n\n  a.py\n  li ne {U+001B}[31m.py\n\n"
        "The code runs in a copy of the tree, which is removed afterwards; but that is no\n"
        "sandbox: it can reach whatever you can, files elsewhere and the network too. Run\n"
        "only what you trust.\n"
    )


def test_agreement() -> None:
    assert told(outcome(close=("b",)), 80) == (
        "The run gives what stands in the tree (2 records).\n\n"
        "Equal within the tolerance (1e-09), or as rounded\n\n  b\n\n"
        f"Equal\n\n  a\n\n{CAUTION}"
    )


def test_differences() -> None:
    found = outcome(changed=(CHANGED,), not_emitted=("b", "c"), new=("d",), notes=("Not copied: x.",))

    assert told(found, 80) == (
        "The run does not give what stands in the tree: of 5 records, 1 different, 2 not\n"
        "emitted, 1 new, 1 the same.\n\n"
        "Different\n\n"
        "  worms\n"
        "           test.p: 0.034 in the tree, 0.041 from the run\n"
        "           claim: nothing in the tree, x from the run\n\n"
        "In the tree, and not emitted by the run\n\n  b\n  c\n\n"
        "Emitted by the run, and not in the tree\n\n  d\n\n"
        "Equal\n\n  a\n\n"
        f"Of the copy\n\n  Not copied: x.\n\n{CAUTION}"
    )


def test_what_could_not_be_run_or_read() -> None:
    found = outcome(
        failures=(Failure("a.py", "it was ended by the signal SIGKILL", "see what ends it"),),
        problems=(Problem(Place("r.json", 3), "x: p is 7", "mend it"),),
    )

    assert told(found, 80) == (
        "The run gives what stands in the tree (1 record); 1 file of 2 did not run to the\n"
        "end; 1 problem in reading records.\n\n"
        "Could not be run to the end\n\n"
        "  a.py\n"
        "  Found    it was ended by the signal SIGKILL.\n"
        "  To mend  see what ends it.\n\n"
        "Could not be read\n\n"
        "  r.json, line 3\n"
        "  Found    x: p is 7.\n"
        "  To mend  mend it.\n\n"
        f"Equal\n\n  a\n\n{CAUTION}"
    )


def test_nothing_to_compare() -> None:
    assert told(outcome(equal=()), 80).startswith(
        "There is nothing to compare: neither the tree nor the run holds a record.\n"
    )


def test_many_fields_and_long_values_are_cut() -> None:
    fields = tuple(FieldDifference(f"f{number}", "x\x1b" * 300, "y") for number in range(23))

    lines = told(outcome(changed=(ChangedRecord("worms", fields),)), 80)

    assert "and 3 more fields" in lines
    assert "f19:" in lines
    assert "f20:" not in lines
    assert "\x1b" not in lines
    assert max(map(len, lines.split())) == 160
