"""Whole columns of a mixture while it is a single phase.

The states are solved from neighbour to neighbour as if there were one phase, and then the phase is
established: by the map that is kept with the model, or by a stability test of the row.  What
splits, and what has no neighbour, is solved row by row.
"""

from __future__ import annotations

from functools import partial

import numpy as np
import numpy.typing as npt

from lostwork import Column, Columns, Pair
from lostwork_plugins.coolprop.bounds import Bounds
from lostwork_plugins.coolprop.mixture_states import MixtureStates
from lostwork_plugins.coolprop.neighbours import solve_neighbours, tour
from lostwork_plugins.coolprop.rows import NaN, Row, columns_of

__all__ = ["mixture_columns"]

_Array = npt.NDArray[np.float64]

_WARM_PAIRS: frozenset[Pair] = frozenset({("T", "p"), ("p", "h"), ("p", "s")})
_LEAST_ROWS = 24
# Tests that it takes to go through one pressure of the map.
_TESTS_PER_PRESSURE = 40
_SAME = 1e-6


def mixture_columns(
    states: MixtureStates, bounds: Bounds, pair: Pair, x: Column, y: Column
) -> Columns:
    """State columns of a pair, for two floats or two arrays."""
    one_by_one = partial(states.row, pair)
    if pair not in _WARM_PAIRS or not (isinstance(x, np.ndarray) or isinstance(y, np.ndarray)):
        return columns_of(one_by_one, x, y)
    x, y = np.broadcast_arrays(x, y)
    p, wanted, name = (y, x, "T") if pair == ("T", "p") else (x, y, pair[1])
    usual = np.isfinite(p) & np.isfinite(wanted) & (p > 0.0) & (p <= bounds.p_max)
    if name == "T":
        # Without the map, a test of the phase costs as much as the state.
        usual &= (bounds.T_min <= wanted) & (wanted <= bounds.T_max)
        usual[usual] = _known(states, wanted[usual], p[usual])
    rows = np.flatnonzero(usual)
    neighbours = tour(p[rows], wanted[rows]) if rows.size >= _LEAST_ROWS else None
    if neighbours is None:
        return columns_of(one_by_one, x, y)
    order, span = neighbours
    rows = rows[order]
    p_rows, wanted_rows = p[rows], wanted[rows]
    firsts, seconds = x[rows].tolist(), y[rows].tolist()

    def cold(index: int) -> Row:
        return one_by_one(firsts[index], seconds[index])

    table, found = solve_neighbours(states.evaluated, cold, name, p_rows, wanted_rows, span)
    given = {int(rows[index]): row for index, row in found.items()}
    solved = ~np.isnan(table[:, 0])
    rows, (T, rho, h, s) = rows[solved], table[solved].T
    right = (bounds.T_min <= T) & (bounds.T_max >= T)
    right[right] = _one_phase(states, name, T[right], p[rows[right]], rho[right])

    columns = np.full((x.size, 6), NaN)
    found_rows = np.stack((T, p[rows], 1.0 / rho, h, s, np.full(T.size, NaN)), axis=1)
    columns[rows[right]] = found_rows[right]
    failed: dict[int, str] = {}
    for index in np.flatnonzero(np.isnan(columns[:, 0])).tolist():
        row = given.get(index) or one_by_one(float(x[index]), float(y[index]))
        if isinstance(row, str):
            failed[index] = row
        else:
            columns[index] = row
    T, p, v, h, s, quality = (column.copy() for column in columns.T)
    return Columns(T, p, v, h, s, quality, failed)


def _known(
    states: MixtureStates, T: _Array, p: _Array, rho: _Array | None = None
) -> npt.NDArray[np.bool_]:
    """What the map says, where it is worth while to draw it."""
    phases = states.phase_map
    if phases.unknown_pressures(p) * _TESTS_PER_PRESSURE > T.size:
        return np.zeros(T.size, dtype=bool)
    return phases.single(T, p, rho)


def _one_phase(
    states: MixtureStates, name: str, T: _Array, p: _Array, rho: _Array
) -> npt.NDArray[np.bool_]:
    """Whether each state is established as the single phase of this density (kg/m3)."""
    single = _known(states, T, p, rho / states.molar_mass)
    if name == "T":
        return single
    for index in np.flatnonzero(~single).tolist():
        tested = states.single_phase_density(float(T[index]), float(p[index]))
        single[index] = tested is not None and abs(tested / rho[index] - 1.0) < _SAME
    return single
