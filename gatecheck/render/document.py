"""The verdict as a JSON document (`verdict/1`), for machines."""

from __future__ import annotations

import json
import math
from typing import Any

from gatecheck.model.verdict import Figures, Finding, Judged, Place, Verdict
from gatecheck.render.order import by_place, by_rule, changes, place_key, problems_by_place

KIND = "verdict/1"


def document(verdict: Verdict) -> str:
    """Return the verdict as JSON: ASCII, sorted by place, id and rule; what is unknown is null."""
    policy = verdict.policy
    whole = {
        "gatecheck": KIND,
        "verdict": verdict.answer,
        "exit": int(verdict.exit),
        "policy": policy and {"name": policy.name, "digest": policy.digest, "from": policy.origin},
        "counts": _counts(verdict),
        "claims": [_judged(one) for one in by_place(verdict.claims)],
        "reported": [_judged(one) for one in by_place(verdict.reported)],
        "others": [{**_judged(one), "kind": one.kind} for one in by_place(verdict.others)],
        "problems": [
            {"at": _place(problem.at), "message": problem.message, "advice": problem.advice}
            for problem in problems_by_place(verdict.problems)
        ],
        "notes": list(verdict.notes),
        "changes": [
            {"id": one.id, "change": one.kind, "at": _place(one.at), "told": one.told} for one in changes(verdict)
        ],
        "plans": [{"path": path, "digest": digest} for path, digest in sorted(verdict.plans)],
        "base": verdict.base,
        "head": verdict.head,
        "tool": {"name": "gatecheck", "version": verdict.version},
    }
    return json.dumps(whole, indent=2, ensure_ascii=True, allow_nan=False) + "\n"


def _counts(verdict: Verdict) -> dict[str, int]:
    return {
        "claims": len(verdict.claims),
        "stands": verdict.count("stands"),
        "falls-short": verdict.count("falls-short"),
        "waived": verdict.count("waived"),
        "undecided": verdict.count("undecided"),
        "reported": len(verdict.reported),
        "reported-falling-short": sum(one.standing == "falls-short" for one in verdict.reported),
    }


def _judged(one: Judged) -> dict[str, Any]:
    shown = {
        "id": one.id,
        "verdict": one.standing,
        "at": _place(one.at),
        "claim": one.claim,
        "result": one.result,
        "evidence": one.evidence and _figures(one.evidence),
        "rules": [_finding(finding) for finding in by_rule(one.findings)],
        "also_at": [_place(place) for place in sorted(one.also_at, key=place_key)],
    }
    return shown if one.counts_now else {**shown, "counts_now": False}


def _place(place: Place) -> dict[str, str | int]:
    shown: dict[str, str | int] = {"path": place.path, "line": place.line}
    if place.cell is not None:
        shown["cell"] = place.cell
    if place.output is not None:
        shown["output"] = place.output
    return shown


def _figures(figures: Figures) -> dict[str, str | float | None]:
    return {
        "alternative": figures.alternative,
        "log_likelihood_ratio": _number(figures.log_likelihood_ratio),
        "prior": _number(figures.prior),
        "prior_from": figures.prior_from,
        "false_positive_risk": _number(figures.false_positive_risk),
        "prior_needed": _number(figures.prior_needed),
        "note": figures.note,
    }


def _finding(finding: Finding) -> dict[str, str | float | None]:
    return {
        "rule": finding.rule,
        "outcome": finding.outcome,
        "enforce": finding.enforce,
        "observed": _number(finding.observed),
        "limit": _number(finding.limit),
        "message": finding.message,
        "remedy": finding.remedy,
    }


def _number(value: float | None) -> float | None:
    # JSON has no word for what is not finite; a reader must not take it for a number.
    return float(value) if value is not None and math.isfinite(value) else None
