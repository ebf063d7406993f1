"""Columns that mix statistics of several kinds: each row is computed by its kind."""

from __future__ import annotations

from enum import IntEnum
from typing import TYPE_CHECKING

import numpy as np

from gatecheck.weigh import chi2, f, quantiles, t, tails, z

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import ArrayLike

    from gatecheck.weigh.arrays import FloatArray


class Statistic(IntEnum):
    """The kinds of statistic. A correlation enters as its t."""

    T = 0
    Z = 1
    CHI2 = 2
    F = 3


def observed_effect(
    kind: ArrayLike, value: ArrayLike, df1: ArrayLike, df2: ArrayLike, one_sided: ArrayLike
) -> FloatArray:
    """Log likelihood ratio of each row at the non-centrality of its own statistic.

    Parameters
    ----------
    kind : array_like of int
        Values of :class:`Statistic`; any other gives nan.
    value : array_like
        The statistic; t and z signed towards the promised direction where one-sided.
    df1, df2 : array_like
        Degrees of freedom: t and chi-squared use ``df1``, F both, z none (whatever stands there).
    one_sided : array_like of bool
        For t and z; chi-squared and F have no sides.

    Returns
    -------
    ndarray of float64
        Broadcast shape; nan where the row lies outside its domain.
    """
    return _by_kind(
        kind,
        (value, df1, df2, one_sided),
        {
            Statistic.T: lambda t_, df, _, side: t.observed_t(t_, df, one_sided=side),
            Statistic.Z: lambda z_, _, __, side: z.observed_z(z_, one_sided=side),
            Statistic.CHI2: lambda x, df, _, __: chi2.observed_chi2(x, df),
            Statistic.F: lambda f_, df1, df2, _: f.observed_f(f_, df1, df2),
        },
    )


def at_noncentrality(  # noqa: PLR0917  # one argument a column of the result, and the alternative
    kind: ArrayLike,
    value: ArrayLike,
    df1: ArrayLike,
    df2: ArrayLike,
    ncp: ArrayLike,
    one_sided: ArrayLike,
) -> FloatArray:
    """Log likelihood ratio of each row at ``ncp``; the other arguments as in :func:`observed_effect`."""
    return _by_kind(
        kind,
        (value, df1, df2, ncp, one_sided),
        {
            Statistic.T: lambda t_, df, _, ncp, side: t.log_lr_t(t_, df, ncp, one_sided=side),
            Statistic.Z: lambda z_, _, __, ncp, side: z.log_lr_z(z_, ncp, one_sided=side),
            Statistic.CHI2: lambda x, df, _, ncp, __: chi2.log_lr_chi2(x, df, ncp),
            Statistic.F: lambda f_, df1, df2, ncp, _: f.log_lr_f(f_, df1, df2, ncp),
        },
    )


def log_p(kind: ArrayLike, value: ArrayLike, df1: ArrayLike, df2: ArrayLike, one_sided: ArrayLike) -> FloatArray:
    """Natural log of the p value of each row; arguments as in :func:`observed_effect`."""
    return _by_kind(
        kind,
        (value, df1, df2, one_sided),
        {
            Statistic.T: lambda t_, df, _, side: tails.log_p_t(t_, df, one_sided=side),
            Statistic.Z: lambda z_, _, __, side: tails.log_p_z(z_, one_sided=side),
            Statistic.CHI2: lambda x, df, _, __: tails.log_p_chi2(x, df),
            Statistic.F: lambda f_, df1, df2, _: tails.log_p_f(f_, df1, df2),
        },
    )


def value_from_log_p(
    kind: ArrayLike, log_p: ArrayLike, df1: ArrayLike, df2: ArrayLike, one_sided: ArrayLike
) -> FloatArray:
    """Statistic of each row from the natural log of its p value; two-sided t and z come out non-negative."""
    return _by_kind(
        kind,
        (log_p, df1, df2, one_sided),
        {
            Statistic.T: lambda p, df, _, side: quantiles.t_from_log_p(p, df, one_sided=side),
            Statistic.Z: lambda p, _, __, side: quantiles.z_from_log_p(p, one_sided=side),
            Statistic.CHI2: lambda p, df, _, __: quantiles.chi2_from_log_p(p, df),
            Statistic.F: lambda p, df1, df2, _: quantiles.f_from_log_p(p, df1, df2),
        },
    )


def _by_kind(
    kind: ArrayLike, columns: tuple[ArrayLike, ...], functions: dict[Statistic, Callable[..., FloatArray]]
) -> FloatArray:
    kinds, *arrays = np.broadcast_arrays(np.asarray(kind), *columns)
    result = np.full(kinds.shape, np.nan)
    for statistic, function in functions.items():
        rows = kinds == statistic
        if rows.any():
            result[rows] = function(*(array[rows] for array in arrays))
    return result
