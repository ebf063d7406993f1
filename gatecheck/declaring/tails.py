"""Which side of its distribution a result's p-value measures."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from typing import Any

from gatecheck.declaring.errors import DeclareError
from gatecheck.declaring.values import is_number

# Libraries compute one tail by different routes, which agree to many more digits than this.
_AGREES = 1e-6
# Below this a double runs out of digits, and then becomes 0.
_SMALLEST = 1e-300
_WORDS: dict[str, dict[str, Any]] = {
    "both": {"sides": 2},
    "greater": {"sides": 1, "tail": "greater"},
    "less": {"sides": 1, "tail": "less"},
    "upper": {},
}


def with_sides(test: Mapping[str, Any]) -> dict[str, Any]:
    """Return `test` with `sides` and `tail` added, where its statistic, df and p tell them and it does not.

    Most results do not say whether their test was one-sided, but only one tail of the statistic's
    distribution is equal to their p. A p that underflowed to 0 becomes the bound "<1e-300".

    Raises
    ------
    DeclareError
        p is no tail of the statistic's distribution, so it was made in another way.
    """
    p = test.get("p")
    if test.get("p_kind", "raw") != "raw" or not is_number(p):
        return dict(test)
    tails = _tails(test)
    fitting = [name for name, tail in tails.items() if _agree(tail, float(str(p)))]
    if tails and not fitting:
        raise DeclareError(_contradiction(test))
    shown = {"p": "<1e-300"} if p == 0 and fitting else {}
    words = _WORDS[fitting[0]] if len(fitting) == 1 and "sides" not in test else {}
    return {**test, **shown, **words}


def t_quantile(df: float, probability: float) -> float:
    """Return the quantile of Student's t with `df` degrees of freedom."""
    from scipy import special  # noqa: PLC0415  # a result alone needs it, and it costs start-up time

    return float(special.stdtrit(df, probability))


def _agree(tail: float, p: float) -> bool:
    return math.isclose(tail, p, rel_tol=_AGREES) or max(tail, p) < _SMALLEST


def _tails(test: Mapping[str, Any]) -> dict[str, float]:
    """Return the tail probabilities of the statistic by name; none where it has no distribution here."""
    from scipy import special  # noqa: PLC0415  # a result alone needs it, and it costs start-up time

    value, degrees = test.get("value"), _numbers(test.get("df"))
    if not is_number(value) or degrees is None:
        return {}
    x = float(str(value))
    match test.get("statistic"), degrees:
        case "z", _:
            return _of_symmetric(lambda at: float(special.ndtr(at)), x)
        case "t", [one]:
            return _of_symmetric(lambda at: float(special.stdtr(one, at)), x)
        case "r", [one] if abs(x) < 1:
            t = x * math.sqrt(one / (1 - x * x))
            return _of_symmetric(lambda at: float(special.stdtr(one, at)), t)
        case "chi2", [one]:
            return {"upper": float(special.chdtrc(one, x))}
        case "F", [first, second]:
            return {"upper": float(special.fdtrc(first, second, x))}
    return {}


def _numbers(df: Any) -> list[float] | None:
    members = df if isinstance(df, list) else [] if df is None else [df]
    return [float(member) for member in members] if all(map(is_number, members)) else None


def _of_symmetric(below: Callable[[float], float], x: float) -> dict[str, float]:
    return {"both": 2 * below(-abs(x)), "greater": below(-x), "less": below(x)}


def _contradiction(test: Mapping[str, Any]) -> str:
    df = "" if test["statistic"] == "z" else f", df = {test['df']}"
    return (
        f"p = {test['p']} belongs to no tail of {test['statistic']} = {test['value']}{df}: say how p was "
        "made, such as test={'p_kind': 'permutation'}, or correct the statistic or df that were given"
    )
