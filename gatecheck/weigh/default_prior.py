"""Bayes factors that average the likelihood ratio over a default prior of the effect, in logarithms.

A Cauchy prior on a standardised effect is a normal prior whose variance is drawn from an inverse gamma
distribution. Given the variance the factor of Student's t is closed; with ``w`` one over the variance, ``c^2 =
scale^2 n``, ``tau = t^2/df`` and ``m = (df+1)/2`` it remains ::

    BF = (1+tau)^m (2 pi)^(-1/2)  integral of  (w+c^2)^(-1/2) exp(-w/2) [1 + tau w/(w+c^2)]^(-m)  over w > 0

whose every factor is positive and bounded. Where the direction was fixed beforehand the half against it is
integrated over the effect itself, and the half along it is what that leaves of twice the whole; so it is with
correlations. All integrals are trapezoidal sums in ``v``, the variable being ``exp(v - exp(-v))`` over a rate: they
end double-exponentially.

References
----------
Rouder, J. N., Speckman, P. L., Sun, D., Morey, R. D. & Iverson, G. (2009). Bayesian t tests for accepting and
rejecting the null hypothesis. Psychonomic Bulletin & Review 16(2), 225-237 (the prior; not seen).
Ly, A., Verhagen, J. & Wagenmakers, E.-J. (2016). Harold Jeffreys's default Bayes factor hypothesis tests. Journal
of Mathematical Psychology 72, 19-32 (correlations).
Hotelling, H. (1953). New light on the correlation coefficient and its transforms. JRSS B 15(2), 193-232 (the
density of a correlation; from memory).
"""

from __future__ import annotations

from functools import partial
from typing import TYPE_CHECKING

import numpy as np
from scipy import special

from gatecheck.weigh.arrays import piecewise, rowwise
from gatecheck.weigh.chi_laplace import log_chi_laplace
from gatecheck.weigh.gamma import stirling_remainder

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator

    from numpy.typing import ArrayLike

    from gatecheck.weigh.arrays import BoolArray, FloatArray

# Steps at which the sums err by less than 1e-15. The Gaussian in the effect needs half the step of the others.
STEP = 0.25
EFFECT_STEP = 0.125
FIRST_NODE = -3.5
# What lies beyond: exp(-40).
LARGEST_W = 80.0
LARGEST_EFFECT = 9.0
REACH = 40.0
# So many degrees of freedom are as good as infinitely many, and their products are still numbers.
NORMAL_DF = 1e100
LARGEST_RATE = 1e250
# Narrower priors need smaller steps, wider ones reach further down than the first node.
LEAST_KAPPA, LARGEST_KAPPA = 0.1, 2.0
LEAST_PAIRS, MOST_PAIRS = 3, 1e20
# Below it the square of a correlation is more exact than what it lacks of 1.
SMALL_R = 0.5
NEGLIGIBLE_TERM = 1e-18
LEAST_SPARE = 0.1


def log_bf_t(
    t: ArrayLike,
    df: ArrayLike,
    n_effective: ArrayLike,
    scale: ArrayLike,
    *,
    one_sided: ArrayLike = False,
) -> FloatArray:
    """Natural log of the Bayes factor, Cauchy prior on the standardised effect against no effect.

    Parameters
    ----------
    t : array_like
        The statistic; for one-sided rows signed so that the promised direction is positive.
    df : array_like
        Degrees of freedom, above zero; infinity means the normal distribution.
    n_effective : array_like
        The number by which the squared standardised effect is multiplied to give the squared non-centrality: n of
        one sample or of pairs, ``n1 n2/(n1+n2)`` of two groups. Above zero.
    scale : array_like
        Scale of the prior in standard deviations (its quartiles), above zero.
    one_sided : array_like of bool
        Whether the direction was fixed beforehand; then the prior is the half in that direction, doubled.

    Returns
    -------
    ndarray of float64
        Broadcast shape; nan outside the domain, or where a square overflows.

    Notes
    -----
    With ``t`` of a correlation, ``df = n - 2``, ``n_effective = n`` and ``scale = 1`` this is the JZS factor of
    a correlation or of a regression on one predictor.
    """
    return rowwise(_t_rows, _legal_t, t, df, n_effective, scale, one_sided)


def log_bf_r(r: ArrayLike, n: ArrayLike, kappa: ArrayLike, *, one_sided: ArrayLike = False) -> FloatArray:
    """Natural log of the exact Bayes factor of a correlation under a stretched beta prior.

    The prior density of the correlation is proportional to ``(1 - rho^2)^(1/kappa - 1)``: uniform at ``kappa = 1``.
    It is the ratio of marginal likelihoods with Jeffreys's priors on the means and variances.

    Parameters
    ----------
    r : array_like
        The sample correlation, strictly between -1 and 1; for one-sided rows signed so that the promised direction
        is positive.
    n : array_like
        Number of pairs, from 3 to 1e20.
    kappa : array_like
        Width of the prior, from 0.1 to 2.
    one_sided : array_like of bool
        Whether the direction was fixed beforehand; then the prior is the half in that direction, doubled.

    Returns
    -------
    ndarray of float64
        Broadcast shape; nan outside the domain.

    Notes
    -----
    With ``b = 1/kappa`` and ``M = (n-1)/2`` the published form, a constant times ``2F1(M, M; n/2 + b; r^2)``,
    turns by Euler's transformation and integral, and Legendre's duplication, into ::

        (1-r^2)^(b+1-n/2) / B(b, M)  integral of  y^(b-1/2) (1+y)^(-M) (1 + (1-r^2) y)^(-b-1/2)  over y > 0

    The half of the prior that r points away from is integrated against Hotelling's density of r, over the inverse
    hyperbolic tangent ``u`` of the correlation. With ``x = |r| tanh u`` and ``F(y) = 2F1(1/2, 1/2; n-1/2; y)``::

        2 / B(1/2, b)  integral of  cosh(u)^(-2(b+M)) (1+x)^(3/2-n) F((1-x)/2) / F(1/2)  over u > 0
    """
    return rowwise(_r_rows, _legal_r, r, n, kappa, one_sided)


def log_bf_unit_information(log_lr_max: ArrayLike, n: ArrayLike) -> FloatArray:
    """Natural log of the Bayes factor of one parameter by the Schwarz approximation: ``log_lr_max - log(n)/2``.

    It is half the difference of the two BIC, and stands for a prior worth one observation.

    Parameters
    ----------
    log_lr_max : array_like
        Natural log of the likelihood ratio at the best estimate, not negative (``z^2/2`` of a Wald statistic).
    n : array_like
        Number of independent observations, at least 1.

    Returns
    -------
    ndarray of float64
        Broadcast shape; nan outside the domain.

    References
    ----------
    Wagenmakers, E.-J. (2007). A practical solution to the pervasive problems of p values. Psychonomic Bulletin &
    Review 14(5), 779-804 (from memory).
    """
    return rowwise(
        lambda log_lr, n: log_lr - np.log(n) / 2,
        lambda log_lr, n: np.isfinite(log_lr) & (log_lr >= 0) & np.isfinite(n) & (n >= 1),
        log_lr_max,
        n,
    )


def _t_rows(
    t: FloatArray, df: FloatArray, n_effective: FloatArray, scale: FloatArray, one_sided: BoolArray
) -> FloatArray:
    size, df, c = np.abs(t), np.minimum(df, NORMAL_DF), scale * np.sqrt(n_effective)
    m, tau = (df + 1) / 2, size * size / df
    both = _in_levels(_both_directions, np.log(LARGEST_W * _rate(m, tau, c)), m, tau, c)
    return _in_the_direction(_wrong_direction, both, one_sided, t < 0, size / np.sqrt(size * size + df), df, c)


def _in_the_direction(
    wrong_direction: Callable[..., FloatArray],
    both: FloatArray,
    one_sided: BoolArray,
    against: BoolArray,
    *columns: FloatArray,
) -> FloatArray:
    """Give one-sided rows the half against their direction, or what that leaves of twice the whole."""
    if not one_sided.any():
        return both
    wrong = wrong_direction(*(column[one_sided] for column in columns))
    whole = both[one_sided]
    result = both.copy()
    result[one_sided] = np.where(against[one_sided], wrong, whole + np.log1p(-np.expm1(wrong - whole)))
    return result


def _rate(m: FloatArray, tau: FloatArray, c: FloatArray) -> FloatArray:
    """How fast the integrand over ``w`` begins to fall."""
    return 0.5 + (0.5 + m * tau) / (c * c)


def _both_directions(end: float, m: FloatArray, tau: FloatArray, c: FloatArray) -> FloatArray:
    c_squared = c * c
    inverse = 1 / _rate(m, tau, c)
    total, minus_m = np.zeros_like(m), -m
    w, below, exponent = np.empty_like(m), np.empty_like(m), np.empty_like(m)
    for node, weight in _nodes(end, STEP):
        np.multiply(inverse, node, out=w)
        np.add(w, c_squared, out=below)
        np.divide(w, below, out=exponent)
        exponent *= tau
        np.log1p(exponent, out=exponent)
        exponent *= minus_m
        w *= 0.5
        exponent -= w
        np.exp(exponent, out=exponent)
        np.sqrt(below, out=below)
        exponent /= below
        exponent *= weight
        total += exponent
    log_integral: FloatArray = np.log(total * inverse / np.sqrt(2 * np.pi))
    return m * np.log1p(tau) + log_integral


def _wrong_direction(rho: FloatArray, df: FloatArray, c: FloatArray) -> FloatArray:
    """Log of the factor of the half prior that t points away from; ``rho = |t| / sqrt(t^2 + df)``."""
    rate = 1 + 1 / c + rho * np.sqrt(df + 0.5)
    return _in_levels(_over_effects, np.log(LARGEST_EFFECT * rate), rho, df, c, rate)


def _over_effects(end: float, rho: FloatArray, df: FloatArray, c: FloatArray, rate: FloatArray) -> FloatArray:
    total = np.zeros_like(rho)
    for node, weight in _nodes(end, EFFECT_STEP):
        effect = node / rate
        ratio = np.exp(log_chi_laplace(rho * effect, df) - effect * effect / 2)
        relative = effect / c
        total += weight * ratio / (1 + relative * relative)
    log_mean: FloatArray = np.log(total * 2 / (np.pi * c * rate))
    return log_mean


def _r_rows(r: FloatArray, n: FloatArray, kappa: FloatArray, one_sided: BoolArray) -> FloatArray:
    b, m, left = 1 / kappa, (n - 1) / 2, (1 - r) * (1 + r)
    log_left = np.where(np.abs(r) < SMALL_R, np.log1p(-r * r), np.log(left))
    # Beyond the lesser of two bounds on log y the integrand is below exp(-REACH) of its peak, which falls with b.
    reach = REACH + 3 * b
    by_left = reach / m - log_left
    spare = m - b - 0.5
    by_power = np.where(spare > LEAST_SPARE, reach / np.maximum(spare, LEAST_SPARE), np.inf)
    log_y = np.minimum(by_left, by_power + np.log(-np.expm1(-by_power)))
    log_integral = _in_levels(_over_odds, log_y + np.log(m + 1), b, m, left)
    both = (b + 1 - n / 2) * log_left - _log_beta(b, m) + log_integral
    return _in_the_direction(_wrong_correlation, both, one_sided, r < 0, np.abs(r), n, b)


def _over_odds(end: float, b: FloatArray, m: FloatArray, left: FloatArray) -> FloatArray:
    rate = m + 1
    total = np.zeros_like(m)
    for node, weight in _nodes(end, EFFECT_STEP):
        y = node / rate
        total += weight * np.exp((b - 0.5) * np.log(y) - m * np.log1p(y) - (b + 0.5) * np.log1p(left * y))
    return np.log(total / rate)


def _wrong_correlation(s: FloatArray, n: FloatArray, b: FloatArray) -> FloatArray:
    """Log of the factor of the half prior that a correlation of size ``s`` points away from."""
    m = b + (n - 1) / 2
    # Beyond the lesser of two bounds on u the integrand is below exp(-REACH): that of cosh, and that of 1 + s tanh.
    excess = np.expm1(REACH / (2 * m))
    by_cosh = np.log1p(excess + np.sqrt(excess * (excess + 2)))
    tangent = np.expm1(REACH / (n - 1.5)) / s
    by_tangent = np.where(tangent < 1, np.arctanh(np.minimum(tangent, 1)), np.inf)
    rate = 1 + np.sqrt(m) + s * n
    log_integral = _in_levels(_over_angles, np.log(np.minimum(by_cosh, by_tangent) * rate), s, n, m, rate)
    log_factor: FloatArray = np.log(2.0) - special.betaln(0.5, b) + log_integral
    return log_factor


def _over_angles(end: float, s: FloatArray, n: FloatArray, m: FloatArray, rate: FloatArray) -> FloatArray:
    total = np.zeros_like(s)
    middle = _hypergeometric(n - 0.5, np.full_like(n, 0.5))
    for node, weight in _nodes(end, EFFECT_STEP):
        u = node / rate
        along = s * np.tanh(u)
        log_cosh = np.log1p(2 * np.sinh(u / 2) ** 2)
        density = np.exp(-2 * m * log_cosh - (n - 1.5) * np.log1p(along))
        total += weight * density * _hypergeometric(n - 0.5, (1 - along) / 2)
    return np.log(total / middle / rate)


def _hypergeometric(c: FloatArray, y: FloatArray) -> FloatArray:
    """Compute ``2F1(1/2, 1/2; c; y)``, ``c`` from 2.5 on and ``y`` from 0 to 1/2, by its positive series."""
    total, term, k = np.ones_like(c), np.ones_like(c), 0
    while term.max() > NEGLIGIBLE_TERM:
        term *= (k + 0.5) ** 2 / ((c + k) * (k + 1)) * y
        total += term
        k += 1
    return total


def _log_beta(b: FloatArray, m: FloatArray) -> FloatArray:
    """Log of the beta function where ``m`` may be so large that logs of gamma functions would cancel."""
    rising = (m - 0.5) * np.log1p(b / m) + b * np.log(m + b) - b
    log_beta: FloatArray = special.gammaln(b) - (rising + stirling_remainder(m + b) - stirling_remainder(m))
    return log_beta


def _nodes(end: float, step: float) -> Iterator[tuple[float, float]]:
    """Points and weights of an integral over the positive half-line, up to ``exp(end)``."""
    v = np.arange(FIRST_NODE, end + step, step)
    nodes = np.exp(v - np.exp(-v))
    return zip(nodes.tolist(), (step * nodes * (1 + np.exp(-v))).tolist(), strict=True)


def _in_levels(function: Callable[..., FloatArray], end: FloatArray, *columns: FloatArray) -> FloatArray:
    """Sum rows together that need about equally many nodes, and each row over the same whatever its neighbours."""
    level = np.ceil(end)
    return piecewise([(level == last, partial(function, float(last))) for last in np.unique(level)], *columns)


def _legal_t(t: FloatArray, df: FloatArray, n_effective: FloatArray, scale: FloatArray, _: BoolArray) -> BoolArray:
    positive = (df > 0) & (n_effective > 0) & (scale > 0)
    finite = np.isfinite(t) & np.isfinite(n_effective) & np.isfinite(scale)
    c = scale * np.sqrt(n_effective)
    df = np.minimum(df, NORMAL_DF)
    # The comparison is false of nan, and bounds t and c.
    manageable = _rate((df + 1) / 2, t * t / df, c) + np.abs(t * t / df) + c * c < LARGEST_RATE
    return positive & finite & manageable


def _legal_r(r: FloatArray, n: FloatArray, kappa: FloatArray, _: BoolArray) -> BoolArray:
    pairs = (n >= LEAST_PAIRS) & (n <= MOST_PAIRS)
    return (np.abs(r) < 1) & pairs & (kappa >= LEAST_KAPPA) & (kappa <= LARGEST_KAPPA)
