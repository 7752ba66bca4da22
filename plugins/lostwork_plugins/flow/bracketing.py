"""Root of a monotone function in a bracket, row by row."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import numpy.typing as npt

__all__ = ["bracketed_root"]

_Array = npt.NDArray[np.float64]
_MOST_STEPS = 100


def bracketed_root(
    residual: Callable[[_Array], _Array],
    low: _Array,
    high: _Array,
    *,
    relative: float = 1e-12,
    enough: float = 0.0,
) -> _Array:
    """Find where `residual` crosses zero between `low` and `high`.

    False position with halved end values (Dowell and Jarratt, BIT 11, 1971), and a bisection
    every third step, so that a kink cannot stall it.

    Parameters
    ----------
    residual
        Of an array of unknowns, one a row.
    low, high
        Ends of the brackets, of one shape.
    relative
        Width of the bracket, against its first width, at which a row is done.
    enough
        Size of the residual at which a row is done, and stays where it is.

    Returns
    -------
    ndarray
        Roots; NaN in rows whose ends do not differ in sign.
    """
    a, b = np.array(low, dtype=np.float64), np.array(high, dtype=np.float64)
    f_a, f_b = residual(a), residual(b)
    width = np.abs(b - a)
    with np.errstate(invalid="ignore"):
        bracketed = (f_a * f_b) <= 0.0
    for step in range(_MOST_STEPS):
        with np.errstate(invalid="ignore", divide="ignore"):
            secant = b - f_b * (b - a) / (f_b - f_a)
            inside = (secant > np.minimum(a, b)) & (secant < np.maximum(a, b))
        middle = np.where(inside & (step % 3 != 2), secant, 0.5 * (a + b))
        middle = np.where(np.abs(f_b) <= enough, b, middle)
        f_middle = residual(middle)
        with np.errstate(invalid="ignore"):
            crossed = f_middle * f_b < 0.0
        a, f_a = np.where(crossed, b, a), np.where(crossed, f_b, 0.5 * f_a)
        b, f_b = middle, f_middle
        with np.errstate(invalid="ignore"):
            done = (np.abs(b - a) <= relative * width) | (np.abs(f_b) <= enough) | ~bracketed
        if np.all(done | ~np.isfinite(f_b)):
            break
    return np.where(bracketed, b, np.nan)
