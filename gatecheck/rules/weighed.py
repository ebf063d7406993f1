"""What the rules on the weight of evidence share: their need, and the claims that they do not bind."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np

from gatecheck.columns import Booleans
from gatecheck.compare.screens import is_whole_screen
from gatecheck.evidence import why_unweighed
from gatecheck.rules.rule import Exemption, Need, Said, Table
from gatecheck.rules.words import describe_result


def tell_unweighed(table: Table, row: int) -> Said:
    """Why the evidence of that row could not be weighed, and what to do."""
    if is_whole_screen(table.record(row)):
        return Said(
            "A whole screen has no single result whose evidence could be weighed.",
            "Leave the rule screen on, which judges it, or report each hit in a record of its own.",
        )
    what, advice = why_unweighed(table.columns, table.evidence, row, table.applied[row].evidence)
    result = describe_result(table.record(row))
    return Said(
        f"The evidence in this result ({result}) cannot be weighed: {what}.",
        f"{advice[0].upper()}{advice[1:]}.",
    )


def _harm_outcomes(table: Table, settings: Sequence[Any]) -> Booleans:
    included = np.array([each is not None and each.include_harm for each in settings], np.bool_)
    return table.columns.harm & ~included


def _judged_as_screens(table: Table, _: Sequence[Any]) -> Booleans:
    """Whole screens where the rule `screen` is on; without it they would pass in silence."""
    judged = [
        is_whole_screen(one.record) and "screen" in applied.rules
        for one, applied in zip(table.columns.found, table.applied, strict=True)
    ]
    return np.array(judged, np.bool_)


LOG_LIKELIHOOD_RATIO = Need(lambda table: table.evidence.log_likelihood_ratio, tell_unweighed)

EXEMPT = (
    Exemption(_harm_outcomes, "A safety outcome: nobody needs strong evidence to report a possible harm."),
    Exemption(
        lambda table, _: table.columns.no_effect_aim,
        "A claim of no effect is judged by no-effect-support, not by evidence for an effect.",
    ),
    Exemption(
        lambda table, _: table.columns.estimation_aim,
        "The claim is an estimate: it asserts no effect over none.",
    ),
    Exemption(
        _judged_as_screens, "A whole screen is judged by the rule screen, not by the evidence of one result."
    ),
)
