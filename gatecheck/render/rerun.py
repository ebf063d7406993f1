"""What a rerun will do, and what it found, as plain text."""

from __future__ import annotations

from collections.abc import Sequence

from gatecheck.model.rerun import ChangedRecord, Compared, Failure, FieldDifference, Rerun
from gatecheck.render import words
from gatecheck.render.layout import BLANK_LINE, item, labelled, page, paragraph, problem, section
from gatecheck.render.text import cut, plain

_NO_SANDBOX = (
    "The code runs in a copy of the tree, which is removed afterwards; but that is no sandbox: it can reach "
    "whatever you can, files elsewhere and the network too. Run only what you trust."
)
_CAUTION = (
    "Commit, time and versions are not compared. That a run gives the same numbers shows that the code gives them "
    "in this environment, not that they are right."
)
_NOTHING = "nothing"
_MOST_FIELDS = 20
_LONGEST_VALUE = 160


def ahead(paths: Sequence[str], width: int) -> str:
    """Return what will run, in order, and what that means."""
    return page([
        section(f"Runs {words.count(len(paths), 'file')}, in this order", [item(path, width) for path in paths]),
        paragraph(_NO_SANDBOX, width),
    ])


def account(found: Rerun, width: int) -> str:
    """Return how the records compare, and what could not be run or read."""
    compared = found.compared
    return page([
        paragraph(_headline(found), width),
        section("Could not be run to the end", [_failure(one, width) for one in found.failures], BLANK_LINE),
        section("Could not be read", [problem(one, width) for one in found.problems], BLANK_LINE),
        section("Different", [_changed(one, width) for one in compared.changed], BLANK_LINE),
        _listed("In the tree, and not emitted by the run", compared.not_emitted, width),
        _listed("Emitted by the run, and not in the tree", compared.new, width),
        _listed(f"Equal within the tolerance ({found.tolerance:g}), or as rounded", compared.close, width),
        _listed("Equal", compared.equal, width),
        section("Of the copy", [item(note, width) for note in found.notes]),
        paragraph(_CAUTION, width),
    ])


def _headline(found: Rerun) -> str:
    compared = found.compared
    if not compared.records:
        clauses = ["There is nothing to compare: neither the tree nor the run holds a record"]
    elif compared.same:
        clauses = [f"The run gives what stands in the tree ({words.count(compared.records, 'record')})"]
    else:
        clauses = [f"The run does not give what stands in the tree: {_counts(compared)}"]
    clauses += [f"{words.count(len(found.failures), 'file')} of {len(found.ran)} did not run to the end"] * bool(
        found.failures
    )
    clauses += [f"{words.count(len(found.problems), 'problem')} in reading records"] * bool(found.problems)
    return f"{'; '.join(clauses)}."


def _counts(compared: Compared) -> str:
    counts = {
        "different": compared.changed,
        "not emitted": compared.not_emitted,
        "new": compared.new,
        "the same": (*compared.equal, *compared.close),
    }
    told = ", ".join(f"{len(ids)} {name}" for name, ids in counts.items() if ids)
    return f"of {words.count(compared.records, 'record')}, {told}"


def _listed(title: str, ids: Sequence[str], width: int) -> str:
    return section(title, [item(name, width) for name in ids])


def _failure(one: Failure, width: int) -> str:
    return "\n".join([
        item(one.path, width),
        labelled("Found", words.sentence(one.message), width),
        labelled("To mend", words.sentence(one.advice), width),
    ])


def _changed(one: ChangedRecord, width: int) -> str:
    lines = [item(one.id, width), *(labelled("", _field(each), width) for each in one.fields[:_MOST_FIELDS])]
    if len(one.fields) > _MOST_FIELDS:
        lines.append(labelled("", f"and {len(one.fields) - _MOST_FIELDS} more fields", width))
    return "\n".join(lines)


def _field(one: FieldDifference) -> str:
    return f"{one.field}: {_value(one.in_tree)} in the tree, {_value(one.from_run)} from the run"


def _value(value: str | None) -> str:
    return _NOTHING if value is None else cut(plain(value), _LONGEST_VALUE)
