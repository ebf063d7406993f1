"""Rule `screen`: of the hits that a whole screen calls findings, few enough are expected to be false.

A hit list is one claim on a whole screen of tests: `screen: {tests, hits, alpha, power, prior, called, removed}`,
with the level of each test, its power, and the share of true effects expected among them, as assumed beforehand.
Of all tests called positive the design is expected to get alpha · (1 - *p*) / (alpha · (1 - *p*) + power · *p*)
wrong, where *p* is that prior (Altman 1991, section 14.4). That is the long-run risk of the whole design; the
risk of a single hit with its own p is another figure. Hits that are called `findings`, as they are unless the
record says otherwise, fall short where that share is above `limit` (0.05 unless the policy says otherwise); those
called `candidates` are still to be confirmed, and stand. Tests left out before the hits were counted (`removed:
[{n, reason, planned}]`) fall short whatever the hits are called, unless their filter was registered beforehand.
What is missing makes the claim undecided, and so do fewer than 100 tests, each of which can be weighed by itself.
Safety outcomes are exempt. A record with a screen and no result of a single test is judged here, and not by the
rules on evidence.

> By its design (10,000 tests at alpha 0.01, power 0.8, prior 0.005) this screen is expected to call 40 true and
> 99.5 false positives, so 71 % of its hits are false, which is the long-run risk of the whole design and not
> that of a single hit; the policy allows 5 % for findings. Call them candidates (screen.called) and confirm
> them, or test each at an alpha of 0.000211 or less with the power kept at 0.8.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import KW_ONLY
from typing import Annotated

import numpy as np

from gatecheck.columns import Booleans
from gatecheck.compare.screens import LEAST_TESTS, Screens, alpha_within, screens
from gatecheck.model.record import OpenProbability, Screen
from gatecheck.model.shown import decimal, percent
from gatecheck.model.struct import struct
from gatecheck.policy import RuleSettings
from gatecheck.rules.rule import Exemption, Judgement, Rule, Said, Table, setting

_NO_SCREEN = Screen()
_NEEDED = ("tests", "hits", "alpha", "power", "prior")
_MOST_REASONS = 3
_DIGITS = 3
_LEAST_ALPHA = 1e-15
_LARGEST_COUNT = 1e15


@struct
class Settings(RuleSettings):
    """The share of false hits that a list of findings may have."""

    _: KW_ONLY
    limit: Annotated[OpenProbability, "largest share of false positives expected among hits called findings"] = 0.05


def concerns(table: Table, _: Sequence[Settings | None]) -> Booleans:
    """Claims on a whole screen."""
    screened = [one.record.screen is not None for one in table.columns.found]
    return table.columns.claims & np.array(screened, np.bool_)


def judge(table: Table, settings: Sequence[Settings | None]) -> Judgement:
    """Short by the share of false hits among findings, or by a filter that was not planned."""
    found = screens(table.columns)
    limit = np.where(found.as_findings, setting(settings, "limit"), np.nan)
    filtered = found.unplanned > 0
    told = np.isfinite(found.false_share) & (found.hits <= found.tests) & (found.tests >= LEAST_TESTS)
    return Judgement(
        filtered | (found.false_share > limit), found.false_share, limit, known=filtered | told, facts=found
    )


def explain(table: Table, row: int, settings: Settings, judgement: Judgement) -> Said:
    """What the design is expected to find, what was left out before, and what would mend it."""
    found: Screens = judgement.facts
    screen = table.record(row).screen or _NO_SCREEN
    if judgement.known is not None and not judgement.known[row]:
        return _tell_unknown(screen)
    too_many = bool(found.as_findings[row] and found.false_share[row] > settings.limit) and not _missing(screen)
    if found.unplanned[row] > 0:
        beside = f" {_tell_design(found, row, screen, settings)}" if too_many else ""
        return Said(_tell_filter(found, row, screen) + beside, _mend_filter(screen, settings, too_many=too_many))
    design = _tell_design(found, row, screen, settings)
    return Said(f"{design}{_tell_hits(found, row)}", _mend_share(screen, settings))


def _missing(screen: Screen) -> list[str]:
    return [f"screen.{name}" for name in _NEEDED if getattr(screen, name) is None]


def _tell_unknown(screen: Screen) -> Said:
    if missing := _missing(screen):
        listed = ", ".join(missing)
        return Said(
            f"The share of false positives among the hits of this screen cannot be told without {listed}.",
            f"Give {listed}, as assumed when the screen was planned.",
        )
    if (screen.tests or 0) < LEAST_TESTS:
        return Said(
            f"The screen has fewer than {LEAST_TESTS} tests, so each of its results can be weighed by itself, "
            "which a long-run risk does not do.",
            "Report each result in a record of its own, with the family that they make.",
        )
    return Said(
        f"The screen is said to have {_count(screen.hits or 0)} hits of {_count(screen.tests or 0)} tests, which "
        "cannot be.",
        "Give in screen.tests the number of tests among which the hits were counted.",
    )


def _tell_design(found: Screens, row: int, screen: Screen, settings: Settings) -> str:
    share = float(found.false_share[row])
    limit = settings.limit if found.as_findings[row] else None
    allowed = "as they are called candidates for confirmation, the policy allows that"
    if limit is not None:
        allowed = f"the policy allows {percent(limit, limit)} for findings"
    return (
        f"By its design ({_count(found.tests[row])} tests at alpha {screen.alpha:g}, power {screen.power:g}, prior "
        f"{screen.prior:g}) this screen is expected to call {decimal(found.true_positives[row])} true and "
        f"{decimal(found.false_positives[row])} false positives, so {percent(share, limit)} of its hits are false, "
        f"which is the long-run risk of the whole design and not that of a single hit; {allowed}."
    )


def _tell_hits(found: Screens, row: int) -> str:
    """A sentence on the hits that were found, where they say something about the design."""
    hits = _count(found.hits[row])
    if found.by_chance[row]:
        return f" It had {hits} hits, and so many would be expected with no true effect at all."
    if found.unlike_design[row]:
        expected = decimal(found.true_positives[row] + found.false_positives[row])
        return (
            f" It had {hits} hits where the design expects {expected}: the assumptions do not fit what was found."
        )
    return ""


def _tell_filter(found: Screens, row: int, screen: Screen) -> str:
    reasons = [part.reason for part in screen.removed if part.n and not part.planned]
    more = f" and {len(reasons) - _MOST_REASONS} more reasons" if len(reasons) > _MOST_REASONS else ""
    return (
        f"{_count(found.unplanned[row])} tests were left out before the hits were counted "
        f"({'; '.join(reasons[:_MOST_REASONS])}{more}), and no such filter was planned; the policy wants filters "
        "registered before the data, for one chosen afterwards can choose the hits."
    )


def _mend_share(screen: Screen, settings: Settings) -> str:
    candidates = "Call them candidates (screen.called) and confirm them"
    alpha = alpha_within(settings.limit, screen)
    if alpha < _LEAST_ALPHA:
        return f"{candidates}; no level that a test could have would do."
    return (
        f"{candidates}, or test each at an alpha of {_rounded_down(alpha)} or less with the power kept at "
        f"{screen.power:g}."
    )


def _mend_filter(screen: Screen, settings: Settings, *, too_many: bool) -> str:
    anew = "Count the hits over all tests, or say planned: true where the filter was registered before the data"
    if not too_many:
        return f"{anew}."
    share = _mend_share(screen, settings)
    return f"{anew}; {share[0].lower()}{share[1:]}"


def _count(number: float) -> str:
    return f"{number:,.0f}" if number < _LARGEST_COUNT else decimal(number)


def _rounded_down(alpha: float) -> str:
    """Few digits that are no more than `alpha`, so that what is told to do does."""
    unit = 10.0 ** (math.floor(math.log10(alpha)) - _DIGITS + 1)
    return f"{math.floor(alpha / unit) * unit:.{_DIGITS}g}"


RULE = Rule(
    name="screen",
    asks="few enough of the hits that a whole screen calls findings are expected to be false",
    settings=Settings,
    judge=judge,
    explain=explain,
    exempt=(
        Exemption(
            lambda table, _: table.columns.harm,
            "A safety outcome: nobody needs strong evidence to report a possible harm.",
        ),
    ),
    concerns=concerns,
)
