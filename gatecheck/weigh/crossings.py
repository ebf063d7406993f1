"""Where rising functions reach zero, many of them at a time.

References
----------
Dowell, M. & Jarratt, P. (1971). A modified regula falsi method for computing the root of an equation. BIT 11,
168-174 (the Illinois method: an end of the bracket that stays counts half; from memory).
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from collections.abc import Callable

    from gatecheck.weigh.arrays import BoolArray, FloatArray

FIRST_END = 16.0
GROWTH = 8.0
# So often a bracket is halved: the method alone may creep where a function bends sharply.
HALVED_EVERY = 4
# Halvings alone narrow any bracket of doubles in as many steps.
MOST_STEPS = 240
RELATIVE_WIDTH = 1e-12


def least_reached(function: Callable[[FloatArray], FloatArray], farthest: FloatArray) -> FloatArray:
    """Least points from 0 on at which rising functions are at least zero.

    Parameters
    ----------
    function : callable
        Takes the points of all rows and returns the values of all rows; each row rises. What is not a number
        reaches nothing.
    farthest : ndarray of float64, shape (n,)
        Where to give up, above zero and finite.

    Returns
    -------
    ndarray of float64, shape (n,)
        To a relative width of 1e-12, never a point where the function is still below zero; 0 where it is not below
        zero there, infinite where it is so at ``farthest``.
    """
    with np.errstate(all="ignore"):
        return _least_rows(function, farthest)


def _least_rows(function: Callable[[FloatArray], FloatArray], farthest: FloatArray) -> FloatArray:
    low, high = np.zeros_like(farthest), np.minimum(FIRST_END, farthest)
    at_low, at_high = function(low), function(high)
    at_once = at_low >= 0
    while (short := ~(at_high >= 0) & (high < farthest)).any():
        low, at_low = np.where(short, high, low), np.where(short, at_high, at_low)
        high = np.where(short, np.minimum(high * GROWTH, farthest), high)
        at_high = np.where(short, function(high), at_high)
    possible = at_high >= 0
    high = _narrowed(function, possible & ~at_once, (low, at_low), (high, at_high))
    return np.where(at_once, 0.0, np.where(possible, high, np.inf))


def _narrowed(
    function: Callable[[FloatArray], FloatArray],
    rows: BoolArray,
    below: tuple[FloatArray, FloatArray],
    above: tuple[FloatArray, FloatArray],
) -> FloatArray:
    """Return the upper ends of the brackets of these rows, narrowed; each end comes with the value there."""
    (low, at_low), (high, at_high) = below, above
    stayed = np.zeros_like(low)
    for step in range(1, MOST_STEPS + 1):
        width = high - low
        unfinished = rows & (width > RELATIVE_WIDTH * high)
        if not unfinished.any():
            break
        least = np.where(unfinished, RELATIVE_WIDTH * high / np.where(unfinished, width, 1.0) / 2, 0.0)
        share = np.full_like(low, 0.5) if step % HALVED_EVERY == 0 else at_low / (at_low - at_high)
        point = low + width * np.clip(np.where(np.isfinite(share), share, 0.5), least, 1 - least)
        value = function(point)
        reached = unfinished & (value >= 0)
        fell_short = unfinished & ~reached
        at_low = np.where(fell_short, value, np.where(reached & (stayed < 0), at_low / 2, at_low))
        at_high = np.where(reached, value, np.where(fell_short & (stayed > 0), at_high / 2, at_high))
        low, high = np.where(fell_short, point, low), np.where(reached, point, high)
        stayed = np.where(reached, -1.0, np.where(fell_short, 1.0, stayed))
    return high
