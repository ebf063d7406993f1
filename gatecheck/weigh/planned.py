"""Tests that are planned: how the statistic and the non-centrality of the true effect follow from the size.

Every function takes the size of the true effect, above zero, the numbers of units of shape (n,), and whether the
direction was fixed beforehand; ``scale`` is that of the Cauchy prior. Standardised effects are those of Cohen:
d, h, r, f and w.

References
----------
Cohen, J. (1988). Statistical Power Analysis for the Behavioral Sciences, 2nd ed. (d, h, w, f; from memory).
Schoenfeld, D. A. (1983). Sample-size formula for the proportional-hazards regression model. Biometrics 39, 499-503.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import IntEnum
from typing import TYPE_CHECKING

import numpy as np

from gatecheck.weigh.mixed import Statistic

if TYPE_CHECKING:
    from gatecheck.weigh.arrays import FloatArray


class About(IntEnum):
    """What a test is about: its default prior follows from that.

    Means: a Cauchy prior on the standardised effect. A correlation: a uniform prior. Another single effect: the
    prior worth one observation. Several effects at once have no default prior here.
    """

    MEANS = 0
    CORRELATION = 1
    ONE_EFFECT = 2
    SEVERAL_EFFECTS = 3


@dataclass(frozen=True, slots=True, eq=False)
class Planned:
    """A test at several sizes, one a row: arrays of shape (n,).

    Attributes
    ----------
    kind : Statistic
        Its statistic; a correlation enters as its t.
    about : About
        What it is about.
    one_sided : bool
        Whether the direction of the effect was fixed beforehand; of t and z alone.
    df1, df2 : ndarray of float64
        Degrees of freedom, as in :func:`gatecheck.weigh.mixed.observed_effect`.
    ncp : ndarray of float64
        Non-centrality of the true effect, above zero.
    n : ndarray of float64
        About means the number by which the squared effect is multiplied to give the squared non-centrality, else
        the number of independent observations; nan where it is not known: then there is no default prior.
    scale : float
        Scale of the Cauchy prior; about means alone.
    """

    kind: Statistic
    about: About
    one_sided: bool
    df1: FloatArray
    df2: FloatArray
    ncp: FloatArray
    n: FloatArray
    scale: float = np.nan


def one_sample_t(d: float, n: FloatArray, *, one_sided: bool, scale: float) -> Planned:
    """The t test of ``n`` units or pairs, ``d`` standard deviations (of the differences) from the null."""
    return Planned(Statistic.T, About.MEANS, one_sided, n - 1, _none(n), d * np.sqrt(n), n, scale)


def two_sample_t(d: float, n1: FloatArray, n2: FloatArray, *, one_sided: bool, scale: float) -> Planned:
    """The pooled t test of two groups that lie ``d`` standard deviations apart."""
    effective = n1 / (n1 + n2) * n2
    ncp = d * np.sqrt(effective)
    return Planned(Statistic.T, About.MEANS, one_sided, n1 + n2 - 2, _none(n1), ncp, effective, scale)


def correlation(r: float, n: FloatArray, *, one_sided: bool) -> Planned:
    """The t test of the correlation of ``n`` pairs, at least 3."""
    ncp = r / np.sqrt((1 - r) * (1 + r)) * np.sqrt(n)
    return Planned(Statistic.T, About.CORRELATION, one_sided, n - 2, _none(n), ncp, n)


def one_proportion(h: float, n: FloatArray, *, one_sided: bool) -> Planned:
    """The z test of the proportion of ``n`` units, ``h`` from the null on the arcsine scale."""
    return Planned(Statistic.Z, About.ONE_EFFECT, one_sided, _none(n), _none(n), h * np.sqrt(n), n)


def two_proportions(h: float, n1: FloatArray, n2: FloatArray, *, one_sided: bool) -> Planned:
    """The z test of the proportions of two groups that lie ``h`` apart on the arcsine scale."""
    ncp = h * np.sqrt(n1 / (n1 + n2) * n2)
    return Planned(Statistic.Z, About.ONE_EFFECT, one_sided, _none(n1), _none(n1), ncp, n1 + n2)


def one_way_f(f: float, groups: int, n_each: FloatArray, *, scale: float) -> Planned:
    """The F test of equal groups; ``f`` is the spread of their means (divisor: groups) over that within.

    That of two groups is the square of their t, and about means as this is.
    """
    n, df1 = groups * n_each, np.full_like(n_each, groups - 1.0)
    if groups == 2:  # noqa: PLR2004
        return Planned(Statistic.F, About.MEANS, False, df1, n - 2, f * f * n, n_each / 2, scale)
    return Planned(Statistic.F, About.SEVERAL_EFFECTS, False, df1, n - groups, f * f * n, n)


def chi_squared(w: float, df: int, n: FloatArray) -> Planned:
    """The chi-squared test of ``n`` units, non-centrality ``n w^2``."""
    about = About.ONE_EFFECT if df == 1 else About.SEVERAL_EFFECTS
    return Planned(Statistic.CHI2, about, False, np.full_like(n, df), _none(n), n * w * w, n)


def log_rank(log_hazard_ratio: float, ratio: float, events: FloatArray, *, one_sided: bool) -> Planned:
    """The log-rank test after so many events in all, by Schoenfeld's approximation.

    ``ratio`` is the size of the second group over that of the first. How many units give so many events is not
    known here, so that there is no default prior.
    """
    ncp = log_hazard_ratio * np.sqrt(events * ratio) / (1 + ratio)
    return Planned(Statistic.Z, About.ONE_EFFECT, one_sided, _none(events), _none(events), ncp, _none(events))


def _none(n: FloatArray) -> FloatArray:
    return np.full_like(n, np.nan)
