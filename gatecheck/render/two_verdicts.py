"""What differs between two verdicts, as plain text."""

from __future__ import annotations

from gatecheck.model.shown import decimal
from gatecheck.model.two_verdicts import Difference, RecordDifference, TwoVerdicts
from gatecheck.render import words
from gatecheck.render.layout import BLANK_LINE, item, labelled, page, paragraph, section

_NOT_COMPARED = "How findings are worded is not compared, nor the notes."
_NOTHING = "nothing"


def account(found: TwoVerdicts, names: tuple[str, str], width: int) -> str:
    """Return what differs, by claim and rule, between the verdicts that are called `names`."""
    first, second = names
    return page(
        [
            paragraph(_headline(found), width),
            paragraph(f"First: {first}; second: {second}.", width),
            section("Given under other conditions", [item(_told(one), width) for one in found.conditions]),
            section(
                "Could not be read or judged in one of them", [item(_told(one), width) for one in found.problems]
            ),
            section("Only in the first", [item(name, width) for name in found.only_first]),
            section("Only in the second", [item(name, width) for name in found.only_second]),
            section("Judged otherwise", [_changed(one, width) for one in found.changed], BLANK_LINE),
            paragraph(_NOT_COMPARED, width),
        ],
    )


def _headline(found: TwoVerdicts) -> str:
    records = words.count(found.records, "record")
    if found.same:
        return f"The two verdicts say the same of every claim and rule ({records})."
    unlike = len(found.changed) + len(found.only_first) + len(found.only_second)
    where = [f"on {unlike} of {records}"] if unlike else []
    where += [f"in {words.count(len(found.problems), 'problem')}"] if found.problems else []
    return f"The two verdicts differ {' and '.join(where)}."


def _changed(one: RecordDifference, width: int) -> str:
    lines = [item(one.id, width)]
    lines += [labelled("Record", _told(each), width) for each in one.itself]
    for rule, differences in one.rules.items():
        told = "; ".join(map(_told, differences))
        lines.append(labelled("Rule", f"{words.rule_words(rule)} ({rule}): {told}", width))
    return "\n".join(lines)


def _told(one: Difference) -> str:
    first, second = _values(one.first, one.second)
    return f"{one.what}: {first} in the first, {second} in the second"


def _values(first: str | float | None, second: str | float | None) -> tuple[str, str]:
    """Both values, numbers with as many digits as tell them apart."""
    if isinstance(first, float) and isinstance(second, float) and decimal(first) == decimal(second):
        return repr(first), repr(second)
    return _value(first), _value(second)


def _value(value: str | float | None) -> str:
    if value is None:
        return _NOTHING
    return decimal(value) if isinstance(value, float) else value
