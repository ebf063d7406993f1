"""Trees of an invented field station, judged for the page."""

from __future__ import annotations

import json
import math
from dataclasses import replace
from pathlib import Path
from typing import Any

from scipy import stats
from support import Document, changed, drainage, write_tree

from gatecheck.gate import Request, check
from gatecheck.model.verdict import Judged, Verdict

RULES: Document = {
    "false-positive-risk": {"limit": 0.05},
    "practical-size": {},
    "reported-in-full": {"enforce": "note"},
    "looks": {},
}


def policy(prior: float = 0.5) -> Document:
    """The policy of the station at that prior."""
    return {
        "gatecheck": "policy/1",
        "name": "field-station reporting policy",
        "evidence": {"alternative": ["observed-effect", "bound"], "prior": prior},
        "rules": RULES,
    }


def t_record(name: str, claim: str | None, t: float, **changes: Any) -> Document:
    """A comparison of 18 + 18 plots with that t; its p and its interval follow from it."""
    half = float(stats.t.ppf(0.975, 34)) * 1.9
    return drainage(**{
        "id": name,
        "claim": ... if claim is None else claim,
        "test__value": t,
        "test__p": float(2 * stats.t.sf(abs(t), 34)),
        "estimate__value": 1.9 * t,
        "estimate__interval": {"level": 0.95, "low": 1.9 * t - half, "high": 1.9 * t + half},
        "sample__groups": [{"name": "with", "n": 18}, {"name": "without", "n": 18}],
        **changes,
    })


def station_records() -> dict[str, Document]:
    """The records by the path at which they lie."""
    wald = {"name": "Wald", "statistic": "z", "value": 3.98, "p": 6.9e-05, "sides": 2}
    ratio = {
        "measure": "odds ratio",
        "value": 2.6,
        "unit": "1",
        "scale": "log",
        "standard_error": math.log(1.6) / 1.96,
        "interval": {"level": 0.95, "low": 2.6 / 1.6, "high": 2.6 * 1.6},
        "smallest_effect": 1.25,
    }
    rank = {"name": "rank sum", "p": "0.021", "sides": 2}
    own = {"probability": 0.3, "basis": "two of seven earlier trials"}
    odd = drainage(id="variety/hardiness", claim="The hardy variety survives more winters.", alternative=...)
    mildew = drainage(id="rows/mildew", claim="Wider rows lower mildew.", estimate=..., alternative=...)
    return {
        "soil/drainage.json": t_record(
            "drainage/earthworm-biomass", "Drainage increases earthworm biomass.", 2.21, estimate__smallest_effect=2
        ),
        "soil/liming.json": t_record("liming/soil-ph", "Liming raises soil pH.", 6.1),
        "soil/mulch.json": t_record("mulch/moisture", "Mulch keeps topsoil moist.", 3.9, prior=own),
        "crops/rows.json": changed(mildew, test=rank),
        "crops/shade.json": t_record("shade/yield", "Shade lowers yield.", -2.6),
        "crops/variety/hardiness.json": changed(odd, test=wald, estimate=ratio),
        "crops/slope.json": t_record("slope/covariate", None, 0.6),
        "crops/peek.json": t_record("mixture/yield", "The mixture yields more.", 2.45, look={"number": 3}),
        "crops/seed-size.json": t_record(
            "seed/size", "Larger seed gives more.", 4.4, importance=True, estimate__smallest_effect=20
        ),
    }


def write_station(folder: Path, prior: float = 0.5) -> Path:
    """Write the tree of the station, whose policy has that prior."""
    for path, record in station_records().items():
        (folder / path).parent.mkdir(parents=True, exist_ok=True)
        (folder / path).write_text(json.dumps(record), encoding="utf-8")
    return write_tree(folder, policy=policy(prior))


def judged_station(folder: Path, prior: float = 0.5) -> Verdict:
    """The verdict of the gate on the tree of the station."""
    return check(Request(write_station(folder, prior)))


#: By which rule beside the risk a claim on a strip falls short: what its record or its policy then holds.
SECOND_RULES: dict[str, Document] = {
    "looks": {"look": {"number": 3}},
    "practical-size": {"importance": True, "estimate__smallest_effect": 20},
    "prior-needed": {},
}
_SOWN = ("barley", "clover", "lupin", "oats", "rye", "vetch", "lentil", "beet", "flax", "sorrel")


def judged_strips(folder: Path, claims: int, short: float, second: str = "looks") -> Verdict:
    """The verdict on so many claims with figures of their own, of which that share is short by two rules."""
    held = round(claims * short)
    for number in range(claims):
        sown, strip = _SOWN[number % len(_SOWN)], number // len(_SOWN) + 1
        claim = f"{sown.capitalize()} in strip {strip} raises the count of earthworms."
        # With 34 degrees of freedom the limit of 5 % lies at t = 2.82.
        t, more = (2.1 + 0.7 * number / held, SECOND_RULES[second]) if number < held else (4 + number / claims, {})
        path = folder / "fields" / sown / f"{strip}.json"
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_text(json.dumps(t_record(f"{sown}/strip-{strip}/earthworms", claim, round(t, 4), **more)))
    rules = {**RULES, "prior-needed": {"risk": 0.05, "limit": 0.5}} if second == "prior-needed" else RULES
    return check(Request(write_tree(folder, policy={**policy(), "rules": rules})))


def many(verdict: Verdict, claims: int, short: float) -> Verdict:
    """A verdict on so many claims, of which that share is short, made of those of `verdict` in turn."""
    held = [one for one in verdict.claims if one.standing == "falls-short"]
    standing = [one for one in verdict.claims if one.standing == "stands"]
    made = []
    for number in range(claims):
        source = held if number < claims * short else standing
        one = source[number % len(source)]
        made.append(replace(one, id=f"{one.id}/{number:04}", at=replace(one.at, line=number + 1)))
    return replace(verdict, judged=tuple(made))


def waived(one: Judged) -> Judged:
    """The same record with its shortfalls waived."""
    granted = "Waived until 2031-09-01 by the field board: the plots are gone."
    findings = tuple(
        replace(each, outcome="waived", message=f"{each.message} {granted}") if each.blocks else each
        for each in one.findings
    )
    return replace(one, findings=findings)
