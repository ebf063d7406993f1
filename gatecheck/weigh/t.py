"""Log likelihood ratio of Student's t: exact expansions for many degrees of freedom, series below.

With ``q = t^2 + df`` and ``mu = ncp t / sqrt(q)`` the ratio of the non-central to the central density is

- one-sided: ``exp(-ncp^2/2) E exp(mu Y)``, ``Y`` chi-distributed on ``df + 1`` degrees of freedom;
- two-sided (density of ``|t|``): ``exp(-ncp^2/2) 1F1((df+1)/2; 1/2; mu^2/2)``.

The expectation is a parabolic cylinder function. Its logarithm has a uniform expansion in ``1/(df + 1/2)``
whose leading part holds all that is large, so that no density is formed and nothing under- or overflows.
Most rows are of ordinary size, and have one formula in few passes over memory; a row's result is the same to the
last bit whichever rows stand beside it.

References
----------
NIST Digital Library of Mathematical Functions, chapters 12 (parabolic cylinder functions; 12.10 the
expansion) and 13 (confluent hypergeometric functions; 13.7 large argument).
"""

from __future__ import annotations

from functools import partial
from typing import TYPE_CHECKING, Any, NamedTuple

import numpy as np

from gatecheck.weigh.arrays import piecewise, rowwise
from gatecheck.weigh.chi_laplace import ORDERS, few_df_laplace
from gatecheck.weigh.t_any_size import SAFE_TO_SQUARE, chi_exponent
from gatecheck.weigh.t_few import few_df_two_sided
from gatecheck.weigh.t_ordinary import CALLERS, LARGEST, MOST_DF, halves, scratch_for
from gatecheck.weigh.z import log_lr_z_rows

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import ArrayLike, NDArray

    from gatecheck.weigh.arrays import BoolArray, Column, FloatArray

# Ordinary statistics from here on are computed by one formula; fewer degrees of freedom have their own orders.
COMMON = ORDERS[2]
UNCOMMON = ORDERS[3:]
# Up to this share of other rows a formula is computed for all, and once more for those.
MOST_OTHERS = 0.25
# So many rows keep what the formula for ordinary statistics holds at once in the second-level cache, and their
# columns just below the 128 KiB from which on allocators fetch fresh memory every time.
LONG_CHUNK = 12288
# Of so many rows the uncommon ones are computed together.
SPAN = 40 * LONG_CHUNK


class Methods(NamedTuple):
    """Which rows are common, their one formula, given scratch arrays, and what computes the others."""

    is_common: Callable[..., BoolArray]
    common: Callable[..., FloatArray]
    other: Callable[..., FloatArray]


def log_lr_t(t: ArrayLike, df: ArrayLike, ncp: ArrayLike, *, one_sided: ArrayLike) -> FloatArray:
    """Natural log of the likelihood ratio, ``ncp`` against zero, of Student's t as observed.

    Parameters
    ----------
    t : array_like
        The statistic; for one-sided rows signed so that the promised direction is positive.
    df : array_like
        Degrees of freedom, above zero, not necessarily whole; infinity means the normal distribution.
    ncp : array_like
        Non-centrality under the alternative, signed in the same way (two groups of n and a standardised
        difference d: ``d sqrt(n/2)``).
    one_sided : array_like of bool
        Whether the direction was fixed beforehand; otherwise the densities of ``|t|`` are compared.

    Returns
    -------
    ndarray of float64
        Broadcast shape; nan where an input is not finite or ``df`` is not positive.
    """
    return _any_rows(AT_NONCENTRALITY, t, df, ncp, one_sided)


def observed_t(t: ArrayLike, df: ArrayLike, *, one_sided: ArrayLike) -> FloatArray:
    """Log likelihood ratio at the effect as observed: ``ncp = |t|``, or ``max(t, 0)`` where one-sided."""
    return _any_rows(AS_OBSERVED, t, df, one_sided)


def t_from_r(r: ArrayLike, df: ArrayLike) -> FloatArray:
    """Turn a correlation into t: ``r sqrt(df / (1 - r^2))``, ``df`` = pairs - 2; nan unless ``|r| < 1``."""
    return rowwise(
        lambda r, df: r * np.sqrt(df / ((1 - r) * (1 + r))),
        lambda r, df: (np.abs(r) < 1) & _positive(df),
        r,
        df,
    )


def r_from_t(t: ArrayLike, df: ArrayLike) -> FloatArray:
    """Turn t into a correlation: ``t / sqrt(t^2 + df)``."""
    return rowwise(lambda t, df: t / np.hypot(t, np.sqrt(df)), lambda t, df: np.isfinite(t) & _positive(df), t, df)


def log_lr_t_rows(t: FloatArray, df: FloatArray, ncp: FloatArray, one_sided: BoolArray) -> FloatArray:
    """Compute rows known to be legal."""
    return _commonest_first(LEGAL_ROWS, t, df, ncp, one_sided)


def _any_rows(methods: Methods, *columns: ArrayLike) -> FloatArray:
    """Broadcast, and compute; what is not legal is not common, and left to the other methods."""
    arrays = np.broadcast_arrays(*(np.asarray(column) for column in columns))
    with np.errstate(all="ignore"):
        return _commonest_first(methods, *map(_flat, arrays)).reshape(arrays[0].shape)


def _flat(values: NDArray[Any]) -> Column:
    """Booleans stay, all else becomes float64."""
    kept: Column
    if values.dtype == np.bool_:
        kept = values.reshape(-1).astype(np.bool_, copy=False)
    else:
        kept = values.reshape(-1).astype(np.float64, copy=False)
    return kept


def _commonest_first(methods: Methods, *columns: Column) -> FloatArray:
    """Compute common rows by one formula, chunk by chunk; the others wait until they are many of each kind."""
    result = np.empty(columns[0].size)
    formula = partial(methods.common, scratch_for(min(result.size, LONG_CHUNK)))
    for first in range(0, result.size, SPAN):
        left = []
        for start in range(first, min(first + SPAN, result.size), LONG_CHUNK):
            rows = slice(start, start + LONG_CHUNK)
            chunk = [column[rows] for column in columns]
            common = methods.is_common(*chunk)
            others = np.flatnonzero(~common)
            # To compute a few others in vain costs less than to pick out the rest.
            many = others.size > MOST_OTHERS * common.size
            result[rows] = piecewise([(common, formula)], *chunk) if many else formula(*chunk)
            others += start
            left.append(others)
        rest = np.concatenate(left)
        if rest.size:
            result[rest] = methods.other(*(column.take(rest) for column in columns))
    return result


def _is_common(t: FloatArray, df: FloatArray, ncp: FloatArray, _: BoolArray) -> BoolArray:
    return _ordinary(t, df, ncp) & (df >= COMMON[0])


def _observed_is_common(t: FloatArray, df: FloatArray, _: BoolArray) -> BoolArray:
    return _ordinary(t, df, t) & (df >= COMMON[0])


def _ordinary(t: FloatArray, df: FloatArray, ncp: FloatArray) -> BoolArray:
    """Whether the halves can be computed."""
    ordinary = np.abs(t) <= LARGEST
    if ncp is not t:
        ordinary &= np.abs(ncp) <= LARGEST
    ordinary &= df <= MOST_DF
    return ordinary


def _uncommon_rows(t: FloatArray, df: FloatArray, ncp: FloatArray, one_sided: BoolArray) -> FloatArray:
    # The number of orders that the degrees of freedom suffice for.
    level = np.zeros(df.shape, np.uint8)
    for least, _ in ORDERS:
        level += df >= least
    ordinary = _ordinary(t, df, ncp)
    pieces: list[tuple[BoolArray, Callable[..., FloatArray]]] = [(level == 0, _few_df)]
    for reached, least_and_order in enumerate(reversed(UNCOMMON), start=1):
        pieces.append((ordinary & (level == reached), partial(_by_halves, least_and_order, None)))
    if not ordinary.all():
        normal = np.isinf(df)
        pieces.append((normal, lambda t, _, ncp, one_sided: log_lr_z_rows(t, ncp, one_sided)))
        beyond = ~ordinary & ~normal
        for reached, (_, order) in enumerate(reversed(ORDERS), start=1):
            pieces.append((beyond & (level == reached), _expansion(order)))
    return piecewise(pieces, t, df, ncp, one_sided)


def _common_observed(scratch: FloatArray, t: FloatArray, df: FloatArray, one_sided: BoolArray) -> FloatArray:
    if one_sided.any():
        return _by_halves(COMMON, scratch, t, df, _observed_ncp(t, one_sided), one_sided)
    square, half = scratch[-CALLERS:, : t.size]
    np.multiply(t, t, out=square)
    np.multiply(square, 0.5, out=half)
    even, odd = halves(half, square, df, COMMON, scratch)
    even -= half
    even += odd
    return _folded(even, odd)


def _uncommon_observed(t: FloatArray, df: FloatArray, one_sided: BoolArray) -> FloatArray:
    return _uncommon_rows(t, df, _observed_ncp(t, one_sided), one_sided)


def _observed_ncp(t: FloatArray, one_sided: BoolArray) -> FloatArray:
    return np.where(one_sided & (t < 0), 0.0, np.abs(t))


def _by_halves(  # noqa: PLR0917  # where it holds and where it works, then the columns
    order: tuple[float, int],
    scratch: FloatArray | None,
    t: FloatArray,
    df: FloatArray,
    ncp: FloatArray,
    one_sided: BoolArray,
) -> FloatArray:
    scratch = scratch_for(t.size) if scratch is None else scratch
    square, half_product = scratch[-CALLERS:, : t.size]
    np.multiply(t, t, out=square)
    np.multiply(t, ncp, out=half_product)
    np.abs(half_product, out=half_product)
    half_product *= 0.5
    even, odd = halves(half_product, square, df, order, scratch)
    np.multiply(ncp, ncp, out=square)
    square *= 0.5
    even -= square
    towards = even + odd
    if not one_sided.any():
        return _folded(towards, odd)
    directed = np.where((t < 0) ^ (ncp < 0), even - odd, towards)
    return directed if one_sided.all() else np.where(one_sided, directed, _folded(towards, odd))


def _expansion(order: int) -> Callable[..., FloatArray]:
    def rows(t: FloatArray, df: FloatArray, ncp: FloatArray, one_sided: BoolArray) -> FloatArray:
        size_t, size_ncp = np.abs(t), np.abs(ncp)
        root_q = _root_q(size_t, df)
        half = size_ncp / root_q
        size_t *= half
        growth, exponent, even = chi_exponent(size_t, df, order)
        half *= half
        half *= df
        half *= 0.5
        towards = np.subtract(even, half, out=half)
        towards += growth
        if not one_sided.any():
            return _folded(towards, exponent)
        away = even - growth
        away -= 0.5 * size_ncp * size_ncp
        directed = np.where((t < 0) ^ (ncp < 0), away, towards)
        return directed if one_sided.all() else np.where(one_sided, directed, _folded(towards, exponent))

    return rows


def _folded(towards: FloatArray, exponent: FloatArray) -> FloatArray:
    """Mean of the ratio and its mirror, ``exp(-2 exponent)`` times it; ``exponent`` is overwritten."""
    exponent *= -2
    np.expm1(exponent, out=exponent)
    exponent *= 0.5
    np.log1p(exponent, out=exponent)
    exponent += towards
    return exponent


def _root_q(size_t: FloatArray, df: FloatArray) -> FloatArray:
    """Root of ``t^2 + df`` without overflow."""
    root = np.minimum(size_t, SAFE_TO_SQUARE)
    root *= root
    root += df
    np.sqrt(root, out=root)
    return np.maximum(root, size_t, out=root)


def _few_df(t: FloatArray, df: FloatArray, ncp: FloatArray, one_sided: BoolArray) -> FloatArray:
    return piecewise([(~one_sided, _few_df_two_sided), (one_sided, _few_df_one_sided)], t, df, ncp, one_sided)


def _few_df_two_sided(t: FloatArray, df: FloatArray, ncp: FloatArray, _: BoolArray) -> FloatArray:
    size_t, size_ncp = np.abs(t), np.abs(ncp)
    root_q = _root_q(size_t, df)
    return few_df_two_sided(size_ncp * (size_t / root_q), df, size_ncp, size_ncp / root_q)


def _few_df_one_sided(t: FloatArray, df: FloatArray, ncp: FloatArray, one_sided: BoolArray) -> FloatArray:
    """Against the direction by downward recursion, along it from the two-sided ratio: the mean of the two."""
    size_t, size_ncp = np.abs(t), np.abs(ncp)
    mu = size_ncp * (size_t / _root_q(size_t, df))
    away = few_df_laplace(mu, df) - 0.5 * size_ncp * size_ncp
    both = _few_df_two_sided(t, df, ncp, one_sided)
    towards = both + np.log1p(-np.expm1(away - both))
    return np.where(np.sign(t) * np.sign(ncp) < 0, away, towards)


def _positive(df: FloatArray) -> BoolArray:
    return np.isfinite(df) & (df > 0)


def _legal(t: FloatArray, df: FloatArray, ncp: FloatArray, _: BoolArray) -> BoolArray:
    return np.isfinite(t) & (df > 0) & np.isfinite(ncp)


def _legal_observed(t: FloatArray, df: FloatArray, _: BoolArray) -> BoolArray:
    return np.isfinite(t) & (df > 0)


LEGAL_ROWS = Methods(_is_common, partial(_by_halves, COMMON), _uncommon_rows)
AT_NONCENTRALITY = LEGAL_ROWS._replace(other=partial(rowwise, _uncommon_rows, _legal))
AS_OBSERVED = Methods(_observed_is_common, _common_observed, partial(rowwise, _uncommon_observed, _legal_observed))
