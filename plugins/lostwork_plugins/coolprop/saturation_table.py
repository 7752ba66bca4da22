"""Both saturated states of a pure fluid over a column of pressures.

A few pressures are asked of the equation one by one.  Many are read off polynomials in ln p, each
through Chebyshev points of a piece of the column and in the barycentric form (J.-P. Berrut, L. N.
Trefethen, SIAM Review 46 (2004) 501-517).  Each piece is compared with the equation between its
points and halved until they agree; where they never do, as next to the critical point, there is no
entry and the row is left to the flash of the library.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import TypeAlias

import numpy as np
import numpy.typing as npt

from lostwork_plugins.coolprop.rows import NaN, Row

__all__ = ["LIQUID", "VAPOUR", "saturated_at"]

_Array: TypeAlias = npt.NDArray[np.float64]

LIQUID, VAPOUR = 0, 1

_POINTS = 16
_HALVINGS = 5
# Relative to the span between the phases; T relative to itself.
_AGREES = 2e-12
# Cheaper asked one by one than by a piece.
_FEW = 2 * _POINTS

_ANGLES = (np.arange(_POINTS) + 0.5) * (math.pi / _POINTS)
_NODES = np.cos(_ANGLES)
_WEIGHTS = np.sin(_ANGLES) * np.where(np.arange(_POINTS) % 2 == 0, 1.0, -1.0)
_BETWEEN = np.array([-0.98, -0.6, 0.05, 0.65, 0.97])


def saturated_at(row: Callable[[float, float], Row], p: _Array) -> _Array:
    """Give T (K), v (m3/kg), h (J/kg), s (J/kg/K) of saturated liquid and vapour.

    Parameters
    ----------
    row
        State of a pressure (Pa) and a quality.
    p
        Pressures (Pa), in any order.

    Returns
    -------
    Array of the shape (rows, 2, 4), NaN for a pressure at which nothing is known.
    """
    several, where = np.unique(p, return_inverse=True)
    if several.size <= _FEW:
        return _asked(row, several)[where]
    table = np.full((several.size, 2, 4), NaN)
    ln_p = np.log(several)
    _fill(row, ln_p, table, float(ln_p[0]), float(ln_p[-1]), _HALVINGS)
    return table[where]


def _asked(row: Callable[[float, float], Row], p: _Array) -> _Array:
    table = np.full((p.size, 2, 4), NaN)
    for index, pressure in enumerate(p.tolist()):
        both = row(pressure, 0.0), row(pressure, 1.0)
        for phase, found in enumerate(both):
            if not isinstance(found, str):
                table[index, phase] = found[0], found[2], found[3], found[4]
    table[np.isnan(table).any(axis=(1, 2))] = NaN
    return table


def _fill(
    row: Callable[[float, float], Row],
    ln_p: _Array,
    table: _Array,
    low: float,
    high: float,
    halvings: int,
) -> None:
    """Fill the entries of `table` whose ln p lies within `low` and `high`."""
    first, last = np.searchsorted(ln_p, low, "left"), np.searchsorted(ln_p, high, "right")
    if last - first <= _FEW:
        table[first:last] = _asked(row, np.exp(ln_p[first:last]))
        return
    middle, half = 0.5 * (low + high), 0.5 * (high - low)
    known = _asked(row, np.exp(middle + half * _NODES))
    known[:, :, 1] = np.log(known[:, :, 1])
    wanted = _asked(row, np.exp(middle + half * _BETWEEN))
    wanted[:, :, 1] = np.log(wanted[:, :, 1])
    off = np.abs(_interpolated(_BETWEEN, known) - wanted)
    T = wanted[:, :1, :1]
    span = np.abs(wanted[:, 1:] - wanted[:, :1])
    span[:, :, :1] = T
    span[:, :, 1] = 1.0
    if np.all(off <= _AGREES * span):
        found = _interpolated((ln_p[first:last] - middle) / half, known)
        found[:, :, 1] = np.exp(found[:, :, 1])
        table[first:last] = found
    elif halvings:
        _fill(row, ln_p, table, low, middle, halvings - 1)
        _fill(row, ln_p, table, middle, high, halvings - 1)


def _interpolated(x: _Array, known: _Array) -> _Array:
    apart = x[:, None] - _NODES
    exact = apart == 0.0
    hit = exact.any(axis=1)
    apart[hit] = np.where(exact[hit], 1e-300, 1.0)  # the weight of that one point alone counts
    share = _WEIGHTS / apart
    share /= share.sum(axis=1, keepdims=True)
    found: _Array = share @ known.reshape(_POINTS, -1)
    return found.reshape(-1, 2, 4)
