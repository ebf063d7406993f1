"""Where a monotone function crosses zero.

References
----------
Chandrupatla, T. R. (1997). A new hybrid quadratic/bisection algorithm for finding the zero of a nonlinear
function without using derivatives. Advances in Engineering Software 28(3), 145-149 (from memory).
"""

from __future__ import annotations

from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Callable

MOST_STEPS = 200
# Four units in the last place of a double.
RELATIVE_WIDTH = 1e-15
SMALLEST_WIDTH = 1e-300


def crossing(function: Callable[[float], float], low: float, high: float) -> float:
    """Find where ``function`` changes its sign between ``low`` and ``high``, to the last digits.

    Bisection, unless the last three values are so nearly straight that inverse quadratic interpolation is safe.

    Parameters
    ----------
    function : callable
        Finite on the interval, of opposite signs (or zero) at its ends.
    low, high : float
        The ends of the interval.

    Returns
    -------
    float
        The point of the final bracket where the function is nearer to zero.
    """
    newest, other = (low, function(low)), (high, function(high))
    share = 0.5
    for _ in range(MOST_STEPS):
        x = newest[0] + share * (other[0] - newest[0])
        trial = (x, function(x))
        if (trial[1] > 0) == (newest[1] > 0):
            newest, dropped = trial, newest
        else:
            newest, other, dropped = trial, newest, other
        best = min(newest, other, key=lambda point: abs(point[1]))
        least = (RELATIVE_WIDTH * abs(best[0]) + SMALLEST_WIDTH) / abs(other[0] - newest[0])
        if least >= 1 / 2 or best[1] == 0:
            break
        share = min(max(_next_share(newest, other, dropped), least), 1 - least)
    return best[0]


def _next_share(newest: tuple[float, float], other: tuple[float, float], dropped: tuple[float, float]) -> float:
    """Say how far to go from ``newest`` to ``other``, as a share of the bracket."""
    (a, fa), (b, fb), (c, fc) = newest, other, dropped
    xi, phi = (a - b) / (c - b), (fa - fb) / (fc - fb)
    if not (phi * phi < xi and (1 - phi) ** 2 < 1 - xi):
        return 0.5
    return fa / (fb - fa) * fc / (fb - fc) + (c - a) / (b - a) * fa / (fc - fa) * fb / (fc - fb)
