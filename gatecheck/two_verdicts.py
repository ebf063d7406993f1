"""What differs between two verdicts, by claim and rule; not how it is worded."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from gatecheck.model.two_verdicts import (
    Difference,
    RecordDifference,
    ToldPlace,
    ToldRecord,
    ToldRule,
    ToldVerdict,
    TwoVerdicts,
)
from gatecheck.schema.read import Fault, read
from gatecheck.schema.shapes import Form, Items, Shape, form_of

Problems = Counter[tuple[str, str]]


def read_verdict(document: Any) -> tuple[ToldVerdict | None, tuple[Fault, ...]]:
    """Read a parsed `verdict/1` document, or return all its faults; see `gatecheck schema verdict`.

    Fields that are not compared are passed over, as those of a later version of the gate would be.
    """
    told, faults = read(ToldVerdict, _known(form_of(ToldVerdict), document))
    if told is None:
        return None, faults
    repeated = tuple(_repeated(told))
    return (None, repeated) if repeated else (told, ())


def compared(first: ToldVerdict, second: ToldVerdict) -> TwoVerdicts:
    """Return what `first` and `second` say differently of records, by rule, and under what each was given."""
    before, after = _by_id(first), _by_id(second)
    both = sorted(before.keys() & after.keys())
    changed = (_of_record(before[name], after[name]) for name in both)
    return TwoVerdicts(
        conditions=tuple(_conditions(first, second)),
        records=len(before.keys() | after.keys()),
        only_first=tuple(sorted(before.keys() - after.keys())),
        only_second=tuple(sorted(after.keys() - before.keys())),
        changed=tuple(one for one in changed if one.itself or one.rules),
        problems=tuple(_problems(_problems_of(first), _problems_of(second))),
    )


def _known(shape: Shape, value: Any) -> Any:
    if isinstance(shape, Form) and isinstance(value, dict):
        return {key: _known(shape.parts[key].shape, inner) for key, inner in value.items() if key in shape.parts}
    if isinstance(shape, Items) and isinstance(value, list):
        return [_known(shape.member, inner) for inner in value]
    return value


def _repeated(told: ToldVerdict) -> Iterator[Fault]:
    """An id that stands twice could not be compared with its like; the gate writes none."""
    seen: set[str] = set()
    for field, records in (("claims", told.claims), ("reported", told.reported), ("others", told.others)):
        for row, one in enumerate(records):
            if one.id in seen:
                yield Fault((field, row, "id"), f"stands twice ({one.id})", "write the verdict again")
            seen.add(one.id)


def _by_id(verdict: ToldVerdict) -> Mapping[str, ToldRecord]:
    return {one.id: one for one in (*verdict.claims, *verdict.reported, *verdict.others)}


def _conditions(first: ToldVerdict, second: ToldVerdict) -> Iterator[Difference]:
    yield from _unlike("tool", _tool(first), _tool(second))
    yield from _unlike("policy", _policy(first), _policy(second))
    yield from _unlike("base", first.base, second.base)
    yield from _unlike("judged commit", first.head, second.head)
    plans, others = ({each.path: each.digest for each in one.plans} for one in (first, second))
    for path in sorted(plans.keys() | others.keys()):
        yield from _unlike(f"plan {path}", plans.get(path), others.get(path))


def _tool(verdict: ToldVerdict) -> str | None:
    return None if verdict.tool is None else f"{verdict.tool.name} {verdict.tool.version}"


def _policy(verdict: ToldVerdict) -> str | None:
    policy = verdict.policy
    return None if policy is None else f"{policy.name} ({policy.digest})"


def _unlike(what: str, first: str | float | None, second: str | float | None) -> Iterator[Difference]:
    if first != second:
        yield Difference(what, first, second)


def _of_record(first: ToldRecord, second: ToldRecord) -> RecordDifference:
    itself = (
        *_unlike("verdict", first.verdict, second.verdict),
        *_unlike("claimed", _yes(first.claim is not None), _yes(second.claim is not None)),
        *_unlike("counts now", _yes(first.counts_now), _yes(second.counts_now)),
    )
    before, after = _by_rule(first.rules), _by_rule(second.rules)
    rules = {name: tuple(_of_rule(before.get(name), after.get(name))) for name in sorted(before | after)}
    return RecordDifference(first.id, itself, {name: found for name, found in rules.items() if found})


def _yes(holds: bool) -> str:
    return "yes" if holds else "no"


def _by_rule(rules: Sequence[ToldRule]) -> dict[str, ToldRule]:
    return {each.rule: each for each in rules}


def _of_rule(first: ToldRule | None, second: ToldRule | None) -> Iterator[Difference]:
    if first is None or second is None:
        before, after = (None if one is None else one.outcome for one in (first, second))
        yield Difference("outcome", before, after)
        return
    yield from _unlike("outcome", first.outcome, second.outcome)
    yield from _unlike("enforce", first.enforce, second.enforce)
    yield from _unlike("observed", first.observed, second.observed)
    yield from _unlike("limit", first.limit, second.limit)


def _problems_of(verdict: ToldVerdict) -> Problems:
    return Counter((_where(each.at), each.message) for each in verdict.problems)


def _where(at: ToldPlace) -> str:
    inner = "" if at.cell is None else f" (cell {at.cell}, output {at.output})"
    return f"{at.path}:{at.line}{inner}"


def _problems(first: Problems, second: Problems) -> Iterator[Difference]:
    for (where, message), _ in sorted((first - second).items()):
        yield Difference(where, message, None)
    for (where, message), _ in sorted((second - first).items()):
        yield Difference(where, None, message)
