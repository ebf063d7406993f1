"""Which changed figures the others of a record contradict, worked out anew by plain formulas with scipy.

A second computation, apart from the gate's: a figure is determined where no numbers within the rounding of all
that is printed satisfy one of the relations below. Only relations that hold for the kind of result are asked.
"""

from __future__ import annotations

import itertools
import re
from collections.abc import Callable, Iterator, Sequence
from decimal import Decimal
from typing import Any

from scipy import stats

Ends = tuple[float, float]
#: What rounding inside a program may add to that of the printed figures.
_SLACK = 2e-3
_OF_COEFFICIENT = re.compile(r"^(?:t|z|Wald z) test of a coefficient$|^t test of a slope$")
_OF_MEANS = re.compile(
    r"^(?:Welch|Welch Two Sample t-test|Welch t|Two Sample t-test|two-sample t|Paired t-test|paired t)$"
)


def contradicted(document: dict[str, Any]) -> list[str]:
    """Return the names of the relations that the figures of a record cannot satisfy together."""
    return [name for name, holds in _RELATIONS.items() if holds(document) is False]


def ends(figure: Any) -> Ends | None:
    """The numbers that a printed figure may stand for; an exact count is itself; a bound tells no figure."""
    if figure is None or (isinstance(figure, str) and figure.startswith("<")):
        return None
    if not isinstance(figure, str):
        return float(figure), float(figure)
    number = Decimal(figure)
    half = Decimal(1).scaleb(int(number.as_tuple().exponent)) / 2
    return float(number - half), float(number + half)


def _meet(one: Ends, other: Ends, slack: float = _SLACK) -> bool:
    room = slack * max(abs(each) for each in (*one, *other))
    return one[0] <= other[1] + room and other[0] <= one[1] + room


def _over(compute: Callable[..., float], *given: Ends) -> Ends:
    values = [compute(*each) for each in itertools.product(*given)]
    return min(values), max(values)


def _size(given: Ends) -> Ends:
    low, high = sorted(map(abs, given))
    return (0.0 if given[0] <= 0 <= given[1] else low), high


def _test(document: dict[str, Any]) -> dict[str, Any]:
    return dict(document.get("test", {}))


def _p(document: dict[str, Any]) -> bool | None:
    """P from the statistic and its df, on the sides that the record names."""
    test = _test(document)
    value, p, df = ends(test.get("value")), ends(test.get("p")), _df(test)
    if value is None or p is None or df is None or test.get("p_kind", "raw") != "raw":
        return None
    if test["statistic"] in {"F", "chi2"} and value[0] < 0:
        value = (max(value[0], 0.0), max(value[1], 0.0))
    tail = _TAILS[test["statistic"]]
    if test.get("sides") == 1:
        sign = 1 if test["tail"] == "greater" else -1
        return _meet(p, _over(lambda x, *d: tail(sign * x, *d), value, *df))
    of_two = 2 if test["statistic"] in {"t", "z", "r"} else 1
    return _meet(p, _over(lambda x, *d: of_two * tail(x, *d), _size(value) if of_two == 2 else value, *df))


def _df(test: dict[str, Any]) -> Sequence[Ends] | None:
    statistic = test.get("statistic")
    if statistic == "z":
        return ()
    given = test.get("df")
    listed = given if isinstance(given, list) else [given]
    found = [each for each in map(ends, listed) if each is not None and each[0] > 0]
    return found if len(found) == {"t": 1, "r": 1, "chi2": 1, "F": 2}.get(str(statistic)) else None


def _tail_of_r(r: float, df: float) -> float:
    return float(stats.t.sf(r * (df / (1 - r * r)) ** 0.5, df)) if abs(r) < 1 else 0.0


_TAILS: dict[str, Callable[..., float]] = {
    "t": lambda x, df: float(stats.t.sf(x, df)),
    "z": lambda x: float(stats.norm.sf(x)),
    "chi2": lambda x, df: float(stats.chi2.sf(x, df)),
    "F": lambda x, df1, df2: float(stats.f.sf(x, df1, df2)),
    "r": _tail_of_r,
}


def _estimate(document: dict[str, Any]) -> tuple[Ends, Ends | None, dict[str, Any]] | None:
    """The distance of an estimate from no effect, and its error, of a coefficient or a difference of means."""
    estimate, name = document.get("estimate", {}), str(_test(document).get("name"))
    linear = estimate.get("scale", "linear") == "linear"
    value = ends(estimate.get("value"))
    if value is None or not linear or not (_OF_COEFFICIENT.match(name) or _OF_MEANS.match(name)):
        return None
    null = ends(estimate.get("null", 0)) or (0.0, 0.0)
    return (value[0] - null[1], value[1] - null[0]), ends(estimate.get("standard_error")), estimate


def _ratio(document: dict[str, Any]) -> bool | None:
    """The size of the statistic as that of the estimate over its error."""
    found, value = _estimate(document), ends(_test(document).get("value"))
    if found is None or value is None or found[1] is None or found[1][0] <= 0:
        return None
    size, error = _size(found[0]), found[1]
    return _meet(_size(value), (size[0] / error[1], size[1] / error[0]))


def _limit(document: dict[str, Any], end: str) -> bool | None:
    """One limit as the estimate and so many errors."""
    found, test = _estimate(document), _test(document)
    limit = None if found is None else ends(found[2].get("interval", {}).get(end))
    df = _df(test)
    if found is None or found[1] is None or limit is None or df is None or test.get("sides") == 1:
        return None
    level, value = found[2]["interval"]["level"], ends(found[2]["value"])
    times = (
        _over(lambda *d: float(stats.t.ppf((1 + level) / 2, *d)), *df)
        if df
        else (float(stats.norm.ppf((1 + level) / 2)),) * 2
    )
    sign = 1 if end == "high" else -1
    assert value is not None
    return _meet(limit, _over(lambda v, e, by: v + sign * e * by, value, found[1], times))


def _middle(document: dict[str, Any]) -> bool | None:
    """The estimate as the middle of its interval."""
    found = _estimate(document)
    interval = {} if found is None else found[2].get("interval", {})
    low, high = ends(interval.get("low")), ends(interval.get("high"))
    if found is None or low is None or high is None:
        return None
    value = ends(found[2]["value"])
    assert value is not None
    room = 2 * _SLACK * (high[1] - low[0])
    return value[0] <= (low[1] + high[1]) / 2 + room and (low[0] + high[0]) / 2 <= value[1] + room


def _means(document: dict[str, Any]) -> bool | None:
    """The difference of two means as the estimate."""
    found, groups = _estimate(document), document.get("sample", {}).get("groups", [])
    means = [ends(each.get("mean")) for each in groups]
    if found is None or len(means) != 2 or means[0] is None or means[1] is None:
        return None
    difference = (means[0][0] - means[1][1], means[0][1] - means[1][0])
    return _meet(_size(found[0]), _size(difference))


def _groups(document: dict[str, Any]) -> bool | None:
    """Student's or Welch's t from means, standard deviations and sizes of two groups."""
    name, value = str(_test(document).get("name")), ends(_test(document).get("value"))
    groups = document.get("sample", {}).get("groups", [])
    told = [tuple(ends(each.get(key)) for key in ("mean", "sd", "n")) for each in groups]
    if len(told) != 2 or not _OF_MEANS.match(name) or "aired" in name or value is None:
        return None
    given: list[Ends] = [each for group in told for each in group if each is not None]
    if len(given) != 6 or min(given[1][0], given[4][0]) <= 0:
        return None
    pooled = "Welch" not in name
    means = (given[0][0] - given[3][1], given[0][1] - given[3][0])
    errors = _over(lambda s1, s2: _error(s1, given[2][0], s2, given[5][0], pooled=pooled), given[1], given[4])
    size = _size(means)
    return _meet(_size(value), (size[0] / errors[1], size[1] / errors[0]))


def _error(s1: float, n1: float, s2: float, n2: float, *, pooled: bool) -> float:
    if not pooled:
        return float((s1 * s1 / n1 + s2 * s2 / n2) ** 0.5)
    both = ((n1 - 1) * s1 * s1 + (n2 - 1) * s2 * s2) / (n1 + n2 - 2)
    return float((both * (1 / n1 + 1 / n2)) ** 0.5)


def _inside(document: dict[str, Any]) -> bool | None:
    """An estimate of any kind between its limits."""
    estimate = document.get("estimate", {})
    value, interval = ends(estimate.get("value")), estimate.get("interval", {})
    low, high = ends(interval.get("low")), ends(interval.get("high"))
    if value is None or (low is None and high is None):
        return None
    return (low is None or low[0] <= value[1]) and (high is None or value[0] <= high[1])


_RELATIONS: dict[str, Callable[[dict[str, Any]], bool | None]] = {
    "p from the statistic": _p,
    "statistic from estimate and error": _ratio,
    "lower limit from estimate and error": lambda document: _limit(document, "low"),
    "upper limit from estimate and error": lambda document: _limit(document, "high"),
    "estimate in the middle": _middle,
    "estimate from means": _means,
    "statistic from groups": _groups,
    "estimate inside": _inside,
}


def relations() -> Iterator[str]:
    """The names of the relations."""
    return iter(_RELATIONS)
