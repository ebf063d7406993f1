"""Arrays in, arrays out: broadcasting, blocks of bounded memory, and rows that cannot spoil each other."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

    from numpy.typing import ArrayLike, NDArray

    FloatArray = NDArray[np.float64]
    BoolArray = NDArray[np.bool_]
    Column = NDArray[np.float64] | NDArray[np.bool_]

# So many rows are divided among the pieces at a time, lest small pieces cost more than they hold.
BLOCK = 65536
# So many rows keep the temporary arrays of one formula in the second-level cache.
CHUNK = 8192


def rowwise(
    kernel: Callable[..., FloatArray],
    legal: Callable[..., BoolArray],
    *columns: ArrayLike,
) -> FloatArray:
    """Apply ``kernel`` to the legal rows of broadcast columns, block by block.

    Parameters
    ----------
    kernel : callable
        Takes one-dimensional arrays (booleans stay boolean, all else is float64) and returns float64.
    legal : callable
        Takes the same arrays and says which rows lie in the domain.
    *columns : array_like
        Broadcast against each other.

    Returns
    -------
    ndarray of float64
        The broadcast shape; nan where a row is not legal or a number in it is not finite.
    """
    arrays = np.broadcast_arrays(*(_column(column) for column in columns))
    flat = [array.ravel() for array in arrays]
    result = np.full(flat[0].size, np.nan)
    with np.errstate(all="ignore"):
        for start in range(0, result.size, BLOCK):
            rows = slice(start, start + BLOCK)
            result[rows] = _legal_only(kernel, legal, [column[rows] for column in flat])
    return result.reshape(arrays[0].shape)


def piecewise(
    pieces: Sequence[tuple[BoolArray, Callable[..., FloatArray]]],
    *columns: Column,
) -> FloatArray:
    """Compute each row by the function whose mask holds it, in chunks; nan where no mask does."""
    result = np.full(columns[0].size, np.nan)
    for mask, function in pieces:
        rows = np.flatnonzero(mask)
        if rows.size == result.size <= CHUNK:
            return function(*columns)
        for start in range(0, rows.size, CHUNK):
            chunk = rows[start : start + CHUNK]
            result[chunk] = function(*(column.take(chunk) for column in columns))
    return result


def polynomial(coefficients: Sequence[float], x: FloatArray, out: FloatArray | None = None) -> FloatArray:
    """Sum of ``coefficients[j] * x**j`` by Horner's rule (row by row the same, whatever the neighbours).

    ``out`` may be overwritten; the result is what is returned.
    """
    if len(coefficients) == 1:
        return np.full_like(x, coefficients[0])
    total = np.multiply(x, coefficients[-1], out=out)
    for coefficient in coefficients[-2:0:-1]:
        total += coefficient
        total *= x
    total += coefficients[0]
    return total


def _legal_only(
    kernel: Callable[..., FloatArray], legal: Callable[..., BoolArray], block: list[Column]
) -> FloatArray:
    mask = legal(*block)
    if mask.all():
        return kernel(*block)
    result = np.full(mask.size, np.nan)
    result[mask] = kernel(*(column[mask] for column in block))
    return result


def _column(values: ArrayLike) -> Column:
    """Return the values themselves where their type allows, but not for writing: they are the caller's."""
    column = np.asarray(values)
    kept: Column
    if column.dtype == np.bool_:
        kept = column.astype(np.bool_, copy=False).view()
    else:
        kept = column.astype(np.float64, copy=False).view()
    kept.flags.writeable = False
    return kept
