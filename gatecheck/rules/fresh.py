"""Rule `fresh`: a result was made from the inputs that are in the tree now.

A result was made from the files that are here: the SHA-256 digests in `provenance.inputs` (`{path, sha256}`,
which `declare(..., inputs=[...])` writes) are those of the files in the tree. Line ends may differ, as a checkout
may convert them, and of a file kept by Git LFS its pointer tells the digest. A file that differs or is gone falls
short; an input without a digest, or outside of the repository, is undecided, and so is a claim that names no
input. That the code (`provenance.code`) changed in a later commit than the record is only noted, unless the policy
has `code: true`.

Common practice, no source.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import KW_ONLY
from typing import Annotated

import numpy as np

from gatecheck.columns import Booleans
from gatecheck.model.freshness import Freshness, InputFact
from gatecheck.model.struct import struct
from gatecheck.policy import RuleSettings
from gatecheck.rules.rule import Judgement, Rule, Said, Table

_MOST_NAMED = 3
_SHOWN = 12
_NOTHING = Freshness()
_WANTED = "the policy wants results made from what is here"


@struct
class Settings(RuleSettings):
    """What may not be newer than the record."""

    _: KW_ONLY
    code: Annotated[bool, "true: code that changed in a later commit than the record is a shortfall too"] = False


def _facts(table: Table) -> Sequence[Freshness]:
    return table.inputs or (_NOTHING,) * len(table.applied)


def concerns(table: Table, _: Sequence[Settings | None]) -> Booleans:
    """Claims, and whatever else names its inputs."""
    return table.columns.claims | np.array([bool(facts.inputs) for facts in _facts(table)], np.bool_)


def judge(table: Table, settings: Sequence[Settings | None]) -> Judgement:
    """Short where an input differs or is gone; undecided where an input, or what is newer, cannot be told."""
    facts = _facts(table)
    with_code = [each is not None and each.code for each in settings]
    gone = [any(each.state in {"changed", "missing"} for each in one.inputs) for one in facts]
    same = [bool(one.inputs) and all(each.state == "same" for each in one.inputs) for one in facts]
    newer = [one.code_is_newer is True and asked for one, asked in zip(facts, with_code, strict=True)]
    ordered = [one.code_is_newer is not None or not asked for one, asked in zip(facts, with_code, strict=True)]
    short = np.array(gone, np.bool_) | np.array(newer, np.bool_)
    known = short | (np.array(same, np.bool_) & np.array(ordered, np.bool_))
    return Judgement(short, known=known, noted=np.array([one.code_is_newer is True for one in facts], np.bool_))


def explain(table: Table, row: int, _: Settings, judgement: Judgement) -> Said:
    """Which inputs differ, and what to do."""
    facts: Freshness = _facts(table)[row]
    if judgement.short[row]:
        return _explain_short(facts)
    if judgement.known is not None and not judgement.known[row]:
        return _explain_unknown(facts)
    return Said(
        f"The inputs ({_listed([each.path for each in facts.inputs])}) are as the record says.{_code(facts)}"
    )


def _explain_short(facts: Freshness) -> Said:
    differ = [_difference(each) for each in facts.inputs if each.state in {"changed", "missing"}]
    rerun = "Rerun the analysis" if facts.code is None else f"Rerun {facts.code}"
    remedy = f"{rerun}, and commit the record that it writes."
    if not differ:
        return Said(f"Result made by other code than committed: {facts.code} changed later; {_WANTED}.", remedy)
    return Said(f"Result made from other data than committed: {_listed(differ)}; {_WANTED}.{_code(facts)}", remedy)


def _difference(one: InputFact) -> str:
    if one.state == "missing":
        return f"{one.path} is not here"
    return f"{one.path} has the SHA-256 digest {one.found[:_SHOWN]}…, and the record says {one.recorded[:_SHOWN]}…"


def _explain_unknown(facts: Freshness) -> Said:
    if not facts.inputs:
        return Said(
            "The record does not say what it was made from.",
            "Give provenance.inputs, each with its path and sha256; in Python, declare(..., inputs=[...]).",
        )
    unknown = [f"{each.path} {each.why}" for each in facts.inputs if each.state == "unknown"]
    if unknown:
        return Said(
            f"Whether the inputs are those that the result was made from cannot be told: {_listed(unknown)}.",
            "Give the sha256 of each input, and keep it in the repository.",
        )
    return Said(
        "Whether the code changed later than the record cannot be told.",
        "Give provenance.code, and judge in a clone that has the whole history.",
    )


def _code(facts: Freshness) -> str:
    return f" Its code, {facts.code}, changed in a later commit than the record." if facts.code_is_newer else ""


def _listed(parts: Sequence[str]) -> str:
    more = f" and {len(parts) - _MOST_NAMED} more" if len(parts) > _MOST_NAMED else ""
    return f"{'; '.join(parts[:_MOST_NAMED])}{more}"


RULE = Rule(
    name="fresh",
    asks="the inputs of a result are the files that are in the tree now",
    settings=Settings,
    judge=judge,
    explain=explain,
    concerns=concerns,
    reads=("provenance",),
)
