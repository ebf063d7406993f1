"""Evidence: the columns of records weighed under the alternatives and priors that the policy names."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np

from gatecheck import weigh
from gatecheck.columns import CHI2, NO_STATISTIC, Booleans, Columns, F, Floats, Integers, R, T, Z
from gatecheck.default_priors import Weighed, log_bf_default, why_no_default_prior
from gatecheck.model.struct import struct
from gatecheck.policy import AlternativeName, EvidenceSettings
from gatecheck.together import Together, log_bf_together, pool_columns

_KINDS = {
    NO_STATISTIC: -1,
    T: weigh.Statistic.T,
    R: weigh.Statistic.T,
    Z: weigh.Statistic.Z,
    CHI2: weigh.Statistic.CHI2,
    F: weigh.Statistic.F,
}
_NEARLY = 1e-6


@struct
class Statistics:
    """The statistics as they are weighed, arrays of shape (n,).

    A correlation stands as its t; a one-sided statistic is signed so that the direction tested is positive;
    one that a record does not give is recovered from its raw p. `log_p` is the natural log of the raw p.
    """

    kind: Integers
    value: Floats
    df1: Floats
    df2: Floats
    one_sided: Booleans
    recovered: Booleans
    log_p: Floats


@struct
class Design:
    """How the units were laid out: `total` of them in `arms` equal groups."""

    arms: Floats
    total: Floats
    two_samples: Booleans
    one_sample: Booleans


@struct
class Evidence:
    """Evidence of shape (n,): the natural log of the likelihood ratio under the alternative that was chosen.

    `under` holds it for every alternative; nan where a record does not allow it. `alternative` is empty where
    none could be used. `ncp` is the non-centrality that the design effect stands for. `statistics` are the records'
    own; `weighed` those that were weighed, which are pooled where `on_all` records of a hypothesis a row is judged.
    """

    statistics: Statistics
    weighed: Statistics
    together: Together
    on_all: Booleans
    design: Design
    ncp: Floats
    under: Mapping[AlternativeName, Floats]
    alternative: tuple[AlternativeName | None, ...]
    log_likelihood_ratio: Floats
    prior: Floats
    prior_is_own: Booleans
    false_positive_risk: Floats


def weigh_columns(columns: Columns, settings: Sequence[EvidenceSettings]) -> Evidence:
    """Weigh each row of `columns` by the settings in the same position."""
    statistics, together = _statistics(columns), pool_columns(columns, [one.together for one in settings])
    on_all = together.pooled & (together.stated | (together.log_p > statistics.log_p))
    weighed = _pooled(statistics, columns, together, on_all)
    design = _design(columns, statistics)
    ncp = _pooled_ncp(_design_noncentrality(columns, statistics, design), columns, together, on_all)
    default_prior = _default_prior(columns, statistics, design, settings)
    under: dict[AlternativeName, Floats] = {
        "observed-effect": weigh.observed_effect(
            weighed.kind, weighed.value, weighed.df1, weighed.df2, weighed.one_sided
        ),
        "design-effect": weigh.at_noncentrality(
            weighed.kind, weighed.value, weighed.df1, weighed.df2, ncp, weighed.one_sided
        ),
        "default-prior": np.where(on_all, log_bf_together(columns, together, weighed.one_sided), default_prior),
        "bound": weigh.log_lr_bound(weighed.log_p),
    }
    alternative = _choose(weighed.kind, under, settings)
    log_lr = np.array(
        [np.nan if name is None else under[name][row] for row, name in enumerate(alternative)], np.float64
    )
    own = np.isfinite(columns.own_prior)
    prior = np.where(own, columns.own_prior, np.array([one.prior for one in settings], np.float64))
    return Evidence(
        statistics,
        weighed,
        together,
        on_all,
        design,
        ncp,
        under,
        alternative,
        log_lr,
        prior,
        own,
        weigh.false_positive_risk(log_lr, prior),
    )


def _default_prior(
    columns: Columns, statistics: Statistics, design: Design, settings: Sequence[EvidenceSettings]
) -> Floats:
    weighed = Weighed(statistics.value, statistics.one_sided, design.total, design.two_samples, design.one_sample)
    scales = np.array([one.scale for one in settings], np.float64)
    with np.errstate(all="ignore"):
        return log_bf_default(columns, weighed, scales)


def _choose(
    kinds: Integers, under: Mapping[AlternativeName, Floats], settings: Sequence[EvidenceSettings]
) -> tuple[AlternativeName | None, ...]:
    """The first alternative of the policy that each record allows.

    A test without a likelihood ratio of its own, such as a rank test, is judged by the bound.
    """

    def chosen(row: int) -> AlternativeName | None:
        has_ratio = kinds[row] >= 0
        names = settings[row].alternative
        if not has_ratio:
            names = ("default-prior", "bound") if "default-prior" in names else ("bound",)
        return next((name for name in names if np.isfinite(under[name][row])), None)

    return tuple(chosen(row) for row in range(len(settings)))


def _pooled(statistics: Statistics, columns: Columns, together: Together, on_all: Booleans) -> Statistics:
    """The statistics with the pooled t or z where a row is judged on several records."""
    if not on_all.any():
        return statistics
    one_sided = statistics.one_sided & on_all
    pooled = np.where(one_sided, together.t * columns.test.toward, together.t)
    by_t = np.isfinite(together.df)
    kind = np.where(on_all, np.where(by_t, weigh.Statistic.T, weigh.Statistic.Z), statistics.kind)
    value = np.where(on_all, pooled, statistics.value)
    df1 = np.where(on_all, np.where(by_t, together.df, np.nan), statistics.df1)
    df2 = np.where(on_all, np.nan, statistics.df2)
    log_p = weigh.log_p(kind, value, df1, df2, statistics.one_sided)
    return Statistics(
        kind,
        value,
        df1,
        df2,
        statistics.one_sided,
        statistics.recovered & ~on_all,
        np.where(on_all, log_p, statistics.log_p),
    )


def _pooled_ncp(ncp: Floats, columns: Columns, together: Together, on_all: Booleans) -> Floats:
    """The planned effect against the pooled estimate, where every record pooled was planned for the same effect.

    For one common effect the squares of the non-centralities add up; the spread between records takes from that.
    """
    pooled = ncp.copy()
    for row in np.flatnonzero(on_all):
        rows = list(together.members[row])
        same = np.unique(columns.effect[rows]).size == np.unique(columns.effect_is_raw[rows]).size == 1
        pooled[row] = np.sqrt((ncp[rows] ** 2).sum()) * together.share[row] if same else np.nan
    return pooled


def _statistics(columns: Columns) -> Statistics:
    test = columns.test
    kind = np.array([_KINDS[code] for code in test.statistic.tolist()], np.intp)
    signed = test.is_one_of(T, Z, R) & test.one_sided
    as_r = test.is_one_of(R)
    given = np.where(as_r, weigh.t_from_r(np.where(as_r, test.value.value, 0.0), test.df1.value), test.value.value)
    given = np.where(signed, given * test.toward, given)
    with np.errstate(all="ignore"):
        # p above a bound ("> 0.05") says too little, p = 0 is no probability that a test can give.
        usable = np.isfinite(test.p.high) & (test.p.value > 0)
        reported = np.log(np.where(usable, test.p.value, np.nan))
    raw = np.where(test.p_is_raw, reported, np.nan)
    df1, df2 = test.df1.value, test.df2.value
    recovered = ~np.isfinite(given) & (kind >= 0)
    value = np.where(recovered, weigh.value_from_log_p(kind, raw, df1, df2, signed), given)
    from_statistic = weigh.log_p(kind, value, df1, df2, signed)
    # A raw p is that of its statistic, in all its digits; an exact or resampled one is its own.
    own = np.isfinite(reported) & (test.p_is_exact | (test.p_is_raw & np.isnan(from_statistic)))
    log_p = np.where(own, reported, from_statistic)
    return Statistics(kind, value, df1, df2, signed, recovered & np.isfinite(value), log_p)


def _design(columns: Columns, statistics: Statistics) -> Design:
    sample, df = columns.sample, columns.test.df1.value
    on_means = columns.test.is_one_of(T, Z)
    pairs = (sample.n1 == sample.n2) & _near(df, sample.n1 - 1) & columns.test.is_one_of(T)
    two_samples = on_means & (sample.groups == 2) & ~pairs  # noqa: PLR2004
    one_sample = on_means & (pairs | ((sample.groups < 2) & (_near(df, sample.n - 1) | np.isnan(df))))  # noqa: PLR2004
    spread = statistics.kind == weigh.Statistic.F
    arms = np.where(two_samples | (spread & (sample.groups > 1)), np.maximum(sample.groups, 1), 1.0)
    return Design(arms, np.where(pairs, sample.n1, sample.n), two_samples, one_sample)


def _near(a: Floats, b: Floats) -> Booleans:
    near: Booleans = np.abs(a - b) < _NEARLY
    return near


def _design_noncentrality(columns: Columns, statistics: Statistics, design: Design) -> Floats:
    """The non-centrality of the effect that the study was designed to find; nan where it cannot be told.

    Standardised effects follow the common definitions (Cohen, Statistical Power Analysis for the Behavioral
    Sciences, 2nd ed., 1988; from memory): d and h over the harmonic size of two groups or the root of one,
    r through r / sqrt(1 - r^2), chi2 as n w^2, F as n f^2. A raw effect is counted in standard errors.
    """
    test, sample, effect = columns.test, columns.sample, columns.effect
    with np.errstate(all="ignore"):
        harmonic = sample.n1 * sample.n2 / (sample.n1 + sample.n2)
        root = np.sqrt(np.where(design.two_samples, harmonic, design.total))
        ncp = np.where(design.two_samples | design.one_sample, np.abs(effect) * root, np.nan)
        pairs_of_r = np.where(np.isfinite(sample.n), sample.n, test.df1.value + 2)
        of_r = np.abs(effect) / np.sqrt(1 - effect**2) * np.sqrt(pairs_of_r)
        ncp = np.where(test.is_one_of(R), of_r, ncp)
        ncp = np.where(test.is_one_of(CHI2, F), sample.n * effect**2, ncp)
        raw = _raw_in_standard_errors(columns, statistics)
    return np.where(columns.effect_is_raw & ~test.is_one_of(R), raw, ncp)


def _raw_in_standard_errors(columns: Columns, statistics: Statistics) -> Floats:
    estimate, effect = columns.estimate, columns.effect
    shift = np.where(estimate.log_scale, np.log(effect) - np.log(estimate.null), effect - estimate.null)
    implied = np.abs(estimate.value.value / statistics.value)
    error = np.where(estimate.standard_error.known, estimate.standard_error.value, implied)
    in_errors = np.abs(shift) / error
    single = columns.test.is_one_of(T, Z)
    return np.where(
        single, in_errors, np.where(_one_df(columns) & estimate.standard_error.known, in_errors**2, np.nan)
    )


def _one_df(columns: Columns) -> Booleans:
    one: Booleans = columns.test.df1.value == 1
    return columns.test.is_one_of(CHI2, F) & one


def why_unweighed(columns: Columns, evidence: Evidence, row: int, settings: EvidenceSettings) -> tuple[str, str]:
    """Say why row `row` has no likelihood ratio, and what to do about it."""
    test = columns.found[row].record.test
    if test is None or (test.p is None and test.value is None):
        return "the record gives neither a statistic nor a p-value", "give test.statistic, value, df and p"
    if test.value is None and test.p is not None and test.p.relation != ">" and test.p.value == 0:
        return "p is given as 0, which no test gives", "give all its digits, or the statistic with its df"
    if test.value is None and test.p_kind == "adjusted":
        return (
            "its p-value is adjusted for several tests, and evidence is weighed on the raw result",
            "give the statistic with its df, or the raw p with p_kind raw",
        )
    if not np.isfinite(evidence.statistics.value[row]) and evidence.statistics.kind[row] >= 0:
        return "the statistic cannot be told from what the record gives", "give test.value with test.df"
    names = settings.alternative
    if "design-effect" in names:
        return why_not_under(columns, row, "design-effect")
    if evidence.statistics.kind[row] < 0:
        return _why_not_at_all(" or ".join(names))
    return why_not_under(columns, row, names[-1])


def why_not_under(columns: Columns, row: int, name: AlternativeName) -> tuple[str, str]:
    """Say why a result that can be weighed cannot be under this alternative, and what to do about it."""
    if name == "default-prior":
        return why_no_default_prior(columns, row)
    if name == "design-effect":
        return _why_no_design(columns, row)
    return _why_not_at_all(name)


def _why_not_at_all(names: str) -> tuple[str, str]:
    return f"the record does not allow the alternative {names}", "give test.p, or the statistic with its df"


def _why_no_design(columns: Columns, row: int) -> tuple[str, str]:
    effect, raw, test = columns.effect[row], columns.effect_is_raw[row], columns.test
    if np.isnan(effect):
        advice = "give alternative: {effect, scale}, as it was planned before the data"
        return "the record does not say which effect the study was designed to find", advice
    cannot = "the planned effect cannot be set against this statistic"
    if test.is_one_of(R)[row] and abs(effect) >= 1:
        return cannot, f"the planned correlation is {effect:g}: give one between -1 and 1"
    if raw and test.is_one_of(CHI2, F)[row]:
        return cannot, "give the planned effect on the standardised scale: f of F, w of chi-squared"
    return cannot, "give sample.groups with their n, or the effect on the raw scale with estimate.standard_error"
