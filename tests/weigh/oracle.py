"""Likelihood ratios and p values at 50 digits, by formulas other than those of the package.

Likelihood ratios of t come from the integral over the chi distribution of the scale estimate, those of
chi-squared and F from the Poisson mixture of central densities, p values from integrating the density. Nothing
here imports the package. Arguments are floats, taken as the exact numbers that they are.
"""

from __future__ import annotations

from functools import cache
from typing import TYPE_CHECKING

import mpmath as mp

if TYPE_CHECKING:
    from collections.abc import Callable

DIGITS = 50
# The series of a mixture is summed term by term up to this many terms; beyond it, in strides around its mode.
MOST_TERMS = 6000


def log_lr_t(t: float, df: float, ncp: float, one_sided: bool) -> mp.mpf:
    """Log of the ratio of non-central to central density of t (of ``|t|`` unless one-sided)."""
    with mp.workdps(DIGITS):
        t, df, ncp = mp.mpf(t), mp.mpf(df), mp.mpf(ncp)
        mu = ncp * t / mp.sqrt(t * t + df)
        if one_sided:
            return -ncp * ncp / 2 + _log_chi_moment(mu, df)
        towards, away = _log_chi_moment(abs(mu), df), _log_chi_moment(-abs(mu), df)
        return -ncp * ncp / 2 + towards + mp.log((1 + mp.exp(away - towards)) / 2)


def log_lr_z(z: float, ncp: float, one_sided: bool) -> mp.mpf:
    """Log of the ratio of two normal densities (of ``|z|`` unless one-sided)."""
    with mp.workdps(DIGITS):
        z, ncp = mp.mpf(z), mp.mpf(ncp)
        if one_sided:
            return (z * z - (z - ncp) ** 2) / 2
        z = abs(z)
        densities = mp.exp(-((z - ncp) ** 2) / 2) + mp.exp(-((z + ncp) ** 2) / 2)
        return mp.log(densities / 2) + z * z / 2


def log_lr_chi2(x: float, df: float, ncp: float) -> mp.mpf:
    """Log of the Poisson mixture of chi-squared densities over the central one."""
    with mp.workdps(DIGITS):
        x, half_df, half_ncp = mp.mpf(x), mp.mpf(df) / 2, mp.mpf(ncp) / 2
        w = half_ncp * x / 2
        return -half_ncp + _log_mixture(None, half_df, w)


def log_lr_f(f: float, df1: float, df2: float, ncp: float) -> mp.mpf:
    """Log of the Poisson mixture of (scaled) F densities over the central one."""
    with mp.workdps(DIGITS):
        a, b = (mp.mpf(df1) + df2) / 2, mp.mpf(df1) / 2
        half_ncp = mp.mpf(ncp) / 2
        x = half_ncp * df1 * mp.mpf(f) / (df2 + df1 * mp.mpf(f))
        return -half_ncp + _log_mixture(a, b, x)


def log_p_z(z: float, one_sided: bool) -> mp.mpf:
    """Log of the normal tail, by the complementary error function."""
    with mp.workdps(DIGITS):
        z = mp.mpf(z)
        if one_sided:
            return mp.log(mp.erfc(z / mp.sqrt(2)) / 2)
        return mp.log(mp.erfc(abs(z) / mp.sqrt(2)))


def log_p_t(t: float, df: float, one_sided: bool) -> mp.mpf:
    """Log of the tail of Student's t."""
    with mp.workdps(DIGITS):
        t, df = mp.mpf(t), mp.mpf(df)
        both = mp.mpf(0) if t == 0 else _log_f_tail(t * t, mp.mpf(1), df)
        if not one_sided:
            return both
        return both - mp.log(2) if t >= 0 else mp.log1p(-mp.exp(both) / 2)


def log_p_f(f: float, df1: float, df2: float) -> mp.mpf:
    """Log of the upper tail of F."""
    with mp.workdps(DIGITS):
        return _log_f_tail(mp.mpf(f), mp.mpf(df1), mp.mpf(df2))


def log_p_chi2(x: float, df: float) -> mp.mpf:
    """Log of the upper tail of chi-squared."""
    with mp.workdps(DIGITS):
        a = mp.mpf(df) / 2
        scale = mp.loggamma(a)
        return _log_tail(lambda u: a * u - mp.exp(u) - scale, mp.log(mp.mpf(x) / 2), mp.log(a), 1 / mp.sqrt(a))


def log_bf_t(t: float, df: float, n_effective: float, scale: float, one_sided: bool) -> mp.mpf:
    """Log of the mean likelihood ratio over a Cauchy prior.

    Two-sided: given the scale estimate, Cauchy times normal is Voigt's profile, the real part of Faddeeva's
    function. One-sided: the posterior of the mean given the prior variance is Student's, so that each variance
    counts by how much of it lies in the promised direction.
    """
    with mp.workdps(DIGITS):
        t, df = mp.mpf(t), mp.mpf(df)
        c = mp.mpf(scale) * mp.sqrt(mp.mpf(n_effective))
        return _log_half_cauchy_factor(t, df, c) if one_sided else _log_cauchy_factor(t, df, c)


def log_bf_r(r: float, n: float, kappa: float, one_sided: bool) -> mp.mpf:
    """Log of Jeffreys's exact factor of a correlation.

    Two-sided: by the hypergeometric function. One-sided: the sampling density of r, as Fisher's integral, averaged
    over the positive half of the prior.
    """
    with mp.workdps(DIGITS):
        r, n, b = mp.mpf(r), mp.mpf(n), 1 / mp.mpf(kappa)
        if one_sided:
            return _log_half_beta_factor(r, n, b)
        scale = (1 - 2 * b) * mp.log(2) + mp.log(mp.pi) / 2 - mp.log(mp.beta(b, b))
        gammas = mp.loggamma(b + (n - 1) / 2) - mp.loggamma(b + n / 2)
        return scale + gammas + mp.log(mp.hyp2f1((n - 1) / 2, (n - 1) / 2, n / 2 + b, r * r))


def log_bf_proportions(successes: float, trials: float, successes2: float, trials2: float) -> mp.mpf:
    """Log of the ratio of beta-binomial probabilities, uniform priors, by factorials."""
    with mp.workdps(DIGITS):
        groups = ((successes, trials), (successes2, trials2), (successes + successes2, trials + trials2))
        first, second, pooled = (
            mp.loggamma(mp.mpf(k) + 1) + mp.loggamma(mp.mpf(n) - k + 1) - mp.loggamma(mp.mpf(n) + 2)
            for k, n in groups
        )
        return first + second - pooled


def log_lr_folded_bound(z: float) -> mp.mpf:
    """Log of the largest mean of two normal likelihood ratios at opposite effects."""
    with mp.workdps(DIGITS):
        z = abs(mp.mpf(z))
        if z <= 1:
            return mp.mpf(0)
        # The best effect d solves d = z tanh(d z); the bracket is halved to the last digit.
        low, high = mp.mpf(0) + mp.sqrt(z * z - 1) / z, z
        for _ in range(4 * DIGITS):
            effect = (low + high) / 2
            low, high = (effect, high) if effect < z * mp.tanh(effect * z) else (low, effect)
        return -effect * effect / 2 + mp.log(mp.cosh(effect * z))


def _log_cauchy_factor(t: mp.mpf, df: mp.mpf, c: mp.mpf) -> mp.mpf:
    q = t * t + df
    rho = abs(t) / mp.sqrt(q)

    def exponent(u: mp.mpf) -> mp.mpf:
        return (df + 1) * u - mp.exp(2 * u) * df / q / 2

    peak = mp.log((df + 1) * q / df) / 2
    top = exponent(peak)
    step = min(mp.mpf("0.25") / mp.sqrt(2 * (df + 1)), mp.mpf("0.05"))

    def term(j: int) -> mp.mpf:
        u = peak + j * step
        return mp.exp(exponent(u) - top) * _voigt(rho * mp.exp(u), c)

    total = _sum_outward(term)
    norm = (df - 1) / 2 * mp.log(2) + mp.loggamma((df + 1) / 2)
    return mp.log(total * step) + top - norm


def _voigt(b: mp.mpf, c: mp.mpf) -> mp.mpf:
    """Real part of Faddeeva's function at ``(b + ic) / sqrt 2``, far out by its asymptotic series."""
    point = mp.mpc(b, c) / mp.sqrt(2)
    size = abs(point) ** 2
    if size < 200:
        with mp.extradps(20 + int(size)):
            return mp.re(mp.exp(-point * point) * mp.erfc(mp.mpc(point.imag, -point.real)))
    total = term = mp.mpc(1)
    for k in range(1, 150):
        term *= (2 * k - 1) / (2 * point * point)
        total += term
        if abs(term) < mp.eps:
            break
    return mp.re(mp.mpc(0, 1) / (mp.sqrt(mp.pi) * point) * total)


def _log_half_cauchy_factor(t: mp.mpf, df: mp.mpf, c: mp.mpf) -> mp.mpf:
    tau, m = t * t / df, (df + 1) / 2

    def term(j: int) -> mp.mpf:
        w = mp.exp(mp.mpf(j) / 8)
        share = c * c / (w + c * c)
        square = tau * share / (1 + tau * (1 - share))
        beyond = mp.betainc(m, mp.mpf("0.5"), 0, 1 / (1 + square), regularized=True)
        factor = mp.exp(-w / 2) * ((1 + tau) / (1 + tau * (1 - share))) ** m / mp.sqrt(w + c * c)
        return w * factor * (beyond if t < 0 else 2 - beyond)

    return mp.log(_sum_outward(term) / 8 / mp.sqrt(2 * mp.pi))


def _log_half_beta_factor(r: mp.mpf, n: mp.mpf, b: mp.mpf) -> mp.mpf:
    """Integrate over ``u``, the correlation being ``tanh(u)``, from the peak on in steps that end at u = 0."""
    power, none = n - 1 + 2 * b, _log_fisher_integral(mp.mpf(0), n)
    root = mp.sqrt(power * power - 4 * r * r * (2 * b + mp.mpf("0.5")) * (n - mp.mpf("1.5")))
    peak = max(mp.mpf(0), mp.atanh((2 * n - 3) * r / (power + root)))
    width = 2 / (mp.sqrt(n) - n * min(r, mp.mpf(0)))

    def log_weighed(u: mp.mpf) -> mp.mpf:
        return _log_fisher_integral(r * mp.tanh(u), n) - none - power * mp.log(mp.cosh(u))

    def term(j: int) -> mp.mpf:
        v = start + j * step
        s = mp.exp(v - mp.exp(-v))
        return mp.exp(log_weighed(width * mp.log1p(s)) - top) * s / (1 + s) * (1 + mp.exp(-v))

    start, step, top = peak / width, mp.mpf("0.1"), log_weighed(peak)
    return mp.log(_sum_outward(term) * step * width * 2 / mp.beta(b, mp.mpf("0.5"))) + top


def _log_fisher_integral(x: mp.mpf, n: mp.mpf) -> mp.mpf:
    """Log of the integral of ``(cosh w - x)^(1-n)`` over w > 0, the poles moved away by ``w = d sinh y``."""
    d = mp.acos(x)
    step = min(mp.mpf("0.1"), mp.mpf("0.2") / mp.sqrt(n))
    least = 2 * mp.sin(d / 2) ** 2
    total, j = mp.mpf("0.5"), 0
    while True:
        j += 1
        sinh, cosh = _sinh_and_cosh(j * step)
        term = cosh * mp.exp((1 - n) * mp.log1p(2 * mp.sinh(d * sinh / 2) ** 2 / least))
        total += term
        if term < total * mp.mpf("1e-36"):
            return mp.log(total * step * d) + (1 - n) * mp.log(least)


@cache
def _sinh_and_cosh(y: mp.mpf) -> tuple[mp.mpf, mp.mpf]:
    return mp.sinh(y), mp.cosh(y)


def _sum_outward(term: Callable[[int], mp.mpf]) -> mp.mpf:
    """Sum of positive terms over all whole numbers, each side until they no longer count."""
    total = term(0)
    for direction in (-1, 1):
        j, last = 0, total
        while True:
            j += direction
            value = term(j)
            total += value
            if value < last and value < total * mp.mpf("1e-32"):
                break
            last = value
    return total


def _log_f_tail(f: mp.mpf, df1: mp.mpf, df2: mp.mpf) -> mp.mpf:
    a, b = df1 / 2, df2 / 2
    scale = mp.loggamma(a + b) - mp.loggamma(a) - mp.loggamma(b)

    def log_density(u: mp.mpf) -> mp.mpf:
        return scale + a * u - (a + b) * mp.log1p(mp.exp(u))

    return _log_tail(log_density, mp.log(df1 * f / df2), mp.log(a / b), mp.sqrt(1 / a + 1 / b))


def _log_tail(log_density: Callable[[mp.mpf], mp.mpf], start: mp.mpf, peak: mp.mpf, width: mp.mpf) -> mp.mpf:
    """Log of the integral of a log-concave density from ``start`` on, in pieces that grow with distance."""
    edges = sorted({start, *(max(start, peak - distance * width) for distance in (30, 10, 3, 1, 0))})
    last = edges[-1]
    top = log_density(last)
    step = min(width, 1 / abs(mp.diff(log_density, last + width / 100)))
    while log_density(last) > top - 90:
        last += step
        edges.append(last)
        step *= 2
    total = mp.quad(lambda u: mp.exp(log_density(u) - top), edges)
    return top + mp.log(total)


def _log_mixture(a: mp.mpf | None, b: mp.mpf, x: mp.mpf) -> mp.mpf:
    """Log of the sum over j of ``(a)_j x^j / ((b)_j j!)``, or of ``x^j / ((b)_j j!)`` without ``a``."""
    mode = _mode(a, b, x)
    if mode < MOST_TERMS / 2:
        return mp.log(_series(lambda j: (x if a is None else (a + j) * x) / ((b + j) * (j + 1))))

    def log_term(j: mp.mpf) -> mp.mpf:
        term = j * mp.log(x) - mp.loggamma(b + j) + mp.loggamma(b) - mp.loggamma(j + 1)
        return term if a is None else term + mp.loggamma(a + j) - mp.loggamma(a)

    # Every h-th of many slowly varying terms sums to the whole over h, up to exp(-2 (pi sigma/h)^2).
    curvature = 1 / mode + 1 / (b + mode) - (0 if a is None else 1 / (a + mode))
    sigma = 1 / mp.sqrt(curvature)
    stride = max(1, int(sigma / 2))
    top = log_term(mode)
    total = mp.mpf(0)
    for j in range(int(mode - 14 * sigma), int(mode + 14 * sigma), stride):
        total += mp.exp(log_term(mp.mpf(max(j, 0))) - top)
    return top + mp.log(total * stride)


def _mode(a: mp.mpf | None, b: mp.mpf, x: mp.mpf) -> mp.mpf:
    """Where successive terms are equal: ``(b + j)(1 + j) = x``, or ``(a + j) x``."""
    linear = b + 1 if a is None else b + 1 - x
    constant = b - (x if a is None else a * x)
    root = mp.sqrt(max(linear * linear - 4 * constant, 0))
    return (-linear + root) / 2


def _series(ratio: Callable[[int], mp.mpf]) -> mp.mpf:
    """One plus the terms whose successive quotients are ``ratio(j)``, all positive."""
    total = term = mp.mpf(1)
    j = 0
    while True:
        quotient = ratio(j)
        term *= quotient
        total += term
        j += 1
        if quotient < 0.5 and term < total * mp.eps:
            return total


def _log_chi_moment(mu: mp.mpf, df: mp.mpf) -> mp.mpf:
    """Log of ``E exp(mu Y)``, ``Y`` chi-distributed on ``df + 1``, by the trapezoidal rule in ``log y``.

    The integrand is analytic and falls off at both ends, so halving the step doubles the digits.
    """
    power = df + 1
    peak = mp.log((mu + mp.sqrt(mu * mu + 4 * power)) / 2)
    if mu < 0:
        peak = mp.log(2 * power / (-mu + mp.sqrt(mu * mu + 4 * power)))

    def exponent(u: mp.mpf) -> mp.mpf:
        y = mp.exp(u)
        return power * u - y * y / 2 + mu * y

    top = exponent(peak)
    y = mp.exp(peak)
    step = mp.mpf("0.3") / mp.sqrt(2 * y * y - mu * y)
    step = min(step, mp.mpf("0.05"))
    total = mp.mpf(1)
    for direction in (-1, 1):
        u = peak
        while True:
            u += direction * step
            value = exponent(u) - top
            if value < -85:
                break
            total += mp.exp(value)
    norm = (df - 1) / 2 * mp.log(2) + mp.loggamma(power / 2)
    return mp.log(total * step) + top - norm
