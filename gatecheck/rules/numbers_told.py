"""The words in which figures that do not fit together are told, and what would be consistent."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence

from gatecheck.columns import Estimates, columns_of
from gatecheck.compare.agreement import Agreement
from gatecheck.compare.interval_numbers import may_be_ratio, numbers_on_one_scale
from gatecheck.model.numbers import exact
from gatecheck.model.record import Estimate, Interval, Sample, Test
from gatecheck.model.struct import struct
from gatecheck.rules.rule import Said, Table
from gatecheck.rules.words import tell_number, tell_statistic

_CLOSE = 0.02
#: The decimal places to which writers commonly round p (common practice, no source), in words.
_USUAL_PLACES = {3: "three", 4: "four"}
_TAKE_TOGETHER = "Take statistic, df and p from the same run, and name the kind of p by p_kind."
_SAME_TEST = "Take estimate and statistic from the same test, and say in estimate.null what it is compared with."
_SAY_SCALE = "Say in estimate.scale on which scale the ratio is"
_EMPTY_LEVEL = 0.5


@struct
class Told:
    """What is said of one disagreement: what does not fit and would, what to do, and what to rule out first."""

    message: str
    actions: tuple[str, ...]
    harmless: tuple[str, ...]


class Explained(Said):
    """What is said where the figures show what made them disagree, so that nothing needs to be ruled out."""


Tell = Callable[[Table, int, Agreement], Said]


def tell(table: Table, row: int, agreement: Agreement) -> Told:
    """Which figures do not fit together, which would, and what to do."""
    said = (_TELL.get(agreement.name) or _of_sample(agreement.name))(table, row, agreement)
    harmless = () if isinstance(said, Explained) else agreement.harmless
    scale = (_SAY_SCALE,) if agreement.name in _ON_A_SCALE and _scale_is_read(table, row) else ()
    return Told(said.message, (said.remedy.removesuffix("."), *scale), harmless)


def _of_sample(name: str) -> Tell:
    from gatecheck.rules.derived_numbers_told import TELL as DERIVED  # noqa: PLC0415  # few such figures disagree
    from gatecheck.rules.sample_numbers_told import TELL  # noqa: PLC0415  # few figures of a sample disagree

    return TELL.get(name) or DERIVED[name]


def ends(agreement: Agreement, row: int, digits: int = 3) -> str:
    """The figure that would be consistent: one number, or the two that bound it."""
    low, high = float(agreement.low[row]), float(agreement.high[row])
    one, other = f"{low:.{digits}g}", f"{high:.{digits}g}"
    if math.isinf(high):
        return f"{one} or more"
    return one if one == other else f"{one} to {other}"


def either(texts: Sequence[str]) -> str:
    """The texts as alternatives: `a, b or c`."""
    *others, last = texts
    return f"{', '.join(others)} or {last}" if others else last


def _tell_p(table: Table, row: int, agreement: Agreement) -> Said:
    test = test_of(table, row)
    implied = math.exp(float(table.evidence.statistics.log_p[row]))
    rounded = test.value is not None and test.value.text is not None
    within = f" ({agreement.low[row]:.3g} to {agreement.high[row]:.3g} within its rounding)" if rounded else ""
    message = f"{tell_statistic(test)} gives p = {implied:.3g}{within}, and {tell_number(test.p)} is reported"
    hint = _hint_on_p(float(table.columns.test.p.value[row]), implied)
    return Explained(message, hint) if hint else Said(message, _TAKE_TOGETHER)


def _hint_on_p(reported: float, implied: float) -> str:
    """The harmless explanation that the two figures suggest, if any."""
    to = [words for places, words in _USUAL_PLACES.items() if implied < 0.5 * 10.0**-places]
    if reported == 0 and to:
        return f"Give all digits of p: some writers round to {to[-1]} decimals, which turns a small p into 0."
    if abs(2 * reported - implied) < _CLOSE * implied:
        return "The reported p is half of it: if one side was tested, say sides: 1 and which tail."
    if abs(reported - 2 * implied) < _CLOSE * reported:
        return "The reported p is twice it: if two sides were tested, say sides: 2."
    return ""


def _tell_adjusted(table: Table, row: int, agreement: Agreement) -> Said:
    family = table.record(row).family
    given = None if family is None else family.adjusted_p
    procedure = "" if family is None else family.procedure
    size = "" if family is None or family.size is None else f" of {family.size}"
    told = tell_number(given or test_of(table, row).p)
    return Said(
        f"by {procedure} in a family{size} the raw result gives an adjusted p of {ends(agreement, row)}, and "
        f"{told} is reported",
        "Adjust the raw p of all members of the family anew.",
    )


def _tell_inside(table: Table, row: int, _: Agreement) -> Said:
    estimate = estimate_of(table, row)
    return Said(
        f"the estimate {tell_number(estimate.value)} lies outside its own interval {_limits(estimate)}",
        "Take estimate and interval from the same run and on the same scale.",
    )


def _tell_width(table: Table, row: int, _: Agreement) -> Said:
    estimate, (column, at) = estimate_of(table, row), _as_read(table, row)
    width = (column.high.value[at] - column.low.value[at]) / 2
    multiple = width / column.standard_error.value[at]
    message = (
        f"the {100 * column.level[at]:.4g} % interval {_limits(estimate)} reaches {width:.3g} to either side"
        f"{_on_log_scale(table, row)}, which is {multiple:.3g} standard errors of "
        f"{tell_number(estimate.standard_error)}"
    )
    hint = _error_of_ratio(table, row)
    return Explained(message, hint) if hint else Said(message, "Check the level and the scale (ratios: log).")


def _tell_limits(table: Table, row: int, agreement: Agreement) -> Said:
    estimate = estimate_of(table, row)
    return Said(
        f"the limits of the interval {_limits(estimate)} lie at unlike distances from the estimate "
        f"{tell_number(estimate.value)}, and its standard error puts a limit at a distance of "
        f"{ends(agreement, row)}{_on_log_scale(table, row)}",
        "Take both limits from the run that gave the estimate.",
    )


def _tell_lone_limit(table: Table, row: int, agreement: Agreement) -> Said:
    estimate = estimate_of(table, row)
    return Said(
        f"the one limit of the interval {_limits(estimate)} does not lie at a distance of {ends(agreement, row)} "
        f"from the estimate {tell_number(estimate.value)}{_on_log_scale(table, row)}, where its standard error "
        "puts it",
        "Take limit, level and standard error from the same run.",
    )


def _tell_centre(table: Table, row: int, agreement: Agreement) -> Said:
    estimate, (column, at) = estimate_of(table, row), _as_read(table, row)
    middle = float(agreement.low[row] / 2 + agreement.high[row] / 2)
    null = float(column.null[at])
    middle = null * math.exp(middle) if column.log_scale[at] else null + middle
    return Said(
        f"statistic and interval {_limits(estimate)} fit an estimate of {middle:.3g}"
        f"{_on_log_scale(table, row)}, and {tell_number(estimate.value)} is reported",
        "Take estimate and interval from the same run and on the same scale.",
    )


def _tell_statistic(table: Table, row: int, agreement: Agreement) -> Said:
    test = test_of(table, row)
    if _signs_alone_differ(table, row, agreement):
        return Explained(
            f"the estimate is {tell_number(estimate_of(table, row).value)}, but the test toward {test.tail} has "
            f"{test.statistic} = {tell_number(test.value)}: the signs differ",
            "Give estimate and statistic the sign of the same difference.",
        )
    source = "standard error" if agreement.name == "statistic" else "interval"
    squared = test.statistic in {"chi2", "F"}
    size = float(agreement.low[row] / 2 + agreement.high[row] / 2) ** (2 if squared else 1)
    message = (
        f"estimate and {source}{_on_log_scale(table, row)} give {test.statistic} = {size:.3g} in size, and "
        f"{tell_number(test.value)} is reported"
    )
    hint = _error_of_ratio(table, row)
    return Explained(message, hint) if hint else Said(message, _SAME_TEST)


def _signs_alone_differ(table: Table, row: int, agreement: Agreement) -> bool:
    """Whether a test of one side has the size that the estimate gives, and the other sign."""
    test, (estimates, at) = table.columns.test, _as_read(table, row)
    signs = float(test.value.value[row]) * float(estimates.value.value[at])
    near = (agreement.low[row] * (1 - _CLOSE), agreement.high[row] * (1 + _CLOSE))
    return bool(test.one_sided[row] and signs < 0 and near[0] <= abs(test.value.value[row]) <= near[1])


def _tell_sides(table: Table, row: int, agreement: Agreement) -> Said:
    estimate, (column, at) = estimate_of(table, row), _as_read(table, row)
    excludes = column.low.low[at] > 0 or column.high.high[at] < 0
    return Said(
        f"the interval {_limits(estimate)} {'excludes' if excludes else 'includes'} {column.null[at]:g}, which "
        f"goes with p = {agreement.low[row]:.2g}{_on_log_scale(table, row)}, and "
        f"{tell_number(test_of(table, row).p)} is reported",
        "Check the scale and the level, and say what is adjusted (p_kind, interval.adjusted).",
    )


def _tell_p_of_estimate(table: Table, row: int, agreement: Agreement) -> Said:
    return Said(
        f"estimate and precision give p = {ends(agreement, row, 2)}{_on_log_scale(table, row)}, and "
        f"{tell_number(test_of(table, row).p)} is reported",
        "Check the scale and the level, and say what is adjusted (p_kind, interval.adjusted).",
    )


def _tell_correlation(table: Table, row: int, _: Agreement) -> Said:
    return Said(
        f"the correlation {tell_number(estimate_of(table, row).value)} is not the one tested, "
        f"{tell_statistic(test_of(table, row))}",
        "Take the estimate from the test.",
    )


def _tell_fisher(table: Table, row: int, agreement: Agreement) -> Said:
    return Said(
        f"the interval {_limits(estimate_of(table, row))} is not that of a correlation with so many df, "
        f"{ends(agreement, row)}",
        "Check limits, level and df.",
    )


def test_of(table: Table, row: int) -> Test:
    """The test of a row; an empty one where there is none."""
    return table.record(row).test or Test()


def sample_of(table: Table, row: int) -> Sample:
    """The sample of a row; an empty one where there is none."""
    return table.record(row).sample or Sample()


def _as_read(table: Table, row: int) -> tuple[Estimates, int]:
    """The estimates among which that of a row stands on the scale on which it was read, and its place there."""
    one = table.columns.found[row]
    if not may_be_ratio(one.record.estimate):
        return table.columns.estimate, row
    from gatecheck.compare.ratio_scales import readings  # noqa: PLC0415  # ratios that do not say their scale

    return columns_of([readings(one)[0]]).estimate, 0


def _on_log_scale(table: Table, row: int) -> str:
    estimates, at = _as_read(table, row)
    return " on the log scale" if estimates.log_scale[at] else ""


def _scale_is_read(table: Table, row: int) -> bool:
    """Whether a ratio was read on a scale that its record does not give."""
    return _on_log_scale(table, row) != "" and not table.columns.estimate.log_scale[row]


def _error_of_ratio(table: Table, row: int) -> str:
    """What to do where the standard error is that of a ratio itself; empty where that would not fit."""
    estimate = estimate_of(table, row)
    if estimate.scale != "log" or estimate.standard_error is None:
        return ""
    from gatecheck.compare.ratio_scales import fits_as_error_of_ratio  # noqa: PLC0415  # errors that do not fit

    if not fits_as_error_of_ratio(table.columns.found[row], numbers_on_one_scale):
        return ""
    error, ratio = tell_number(estimate.standard_error), tell_number(estimate.value)
    of_logarithm = estimate.standard_error.value / estimate.value.value
    return (
        f"Give the standard error of the logarithm: {error} is that of the ratio itself "
        f"({error} / {ratio} = {of_logarithm:.2g} fits)."
    )


def estimate_of(table: Table, row: int) -> Estimate:
    """The estimate of a row; an unknown one where there is none."""
    return table.record(row).estimate or Estimate("estimate", exact(math.nan))


def _limits(estimate: Estimate) -> str:
    interval = estimate.interval or Interval(_EMPTY_LEVEL)
    return f"{tell_number(interval.low)} to {tell_number(interval.high)}"


#: The comparisons that depend on the scale of the estimate.
_ON_A_SCALE = {"width", "limits", "lone-limit", "centre", "statistic", "statistic-interval", "sides", "p-estimate"}
_TELL: Mapping[str, Tell] = {
    "p": _tell_p,
    "adjusted": _tell_adjusted,
    "inside": _tell_inside,
    "width": _tell_width,
    "limits": _tell_limits,
    "lone-limit": _tell_lone_limit,
    "centre": _tell_centre,
    "statistic": _tell_statistic,
    "statistic-interval": _tell_statistic,
    "sides": _tell_sides,
    "p-estimate": _tell_p_of_estimate,
    "correlation": _tell_correlation,
    "fisher": _tell_fisher,
}
