"""Whole columns of a pure fluid by p with h or s.

The saturated states at the pressures of the column say of every row whether it is liquid, wet or
vapour.  Wet rows are joined by the lever rule, at once; liquid and vapour are each solved from
neighbour to neighbour, and so is what lies above the critical pressure.  Whatever is not certain is
asked of the library one by one: rows within a hair of a saturation line, next to the critical
point, without a saturation line, out of range, or not found from their neighbour.
"""

from __future__ import annotations

from collections.abc import Callable
from functools import partial
from typing import Any

import numpy as np
import numpy.typing as npt
from CoolProp.CoolProp import (
    DmassT_INPUTS,
    iphase_gas,
    iphase_liquid,
    iphase_not_imposed,
)

from lostwork import Columns, Critical, Pair
from lostwork_plugins.coolprop.bounds import Bounds
from lostwork_plugins.coolprop.neighbours import solve_neighbours, tour
from lostwork_plugins.coolprop.rows import NaN, Row, columns_of
from lostwork_plugins.coolprop.saturation_table import LIQUID, VAPOUR, saturated_at

__all__ = ["LEAST_ROWS", "WARM_PAIRS", "pure_columns"]

_Array = npt.NDArray[np.float64]

WARM_PAIRS: frozenset[Pair] = frozenset({("p", "h"), ("p", "s")})
LEAST_ROWS = 256
_LEAST_GROUP = 24
# From here on the saturation table pays even where no row has a neighbour.
_MANY_ROWS = 1500

_T, _V, _H, _S = range(4)
_COLUMN = {"h": _H, "s": _S}
# Of the span between the phases: closer to a line than this, the library says on which side.
_HAIR = 1e-7
_NEAR_CRITICAL = 0.999
_SOME = 5
_FAR = 0.05
_CLEAR = 0.2


def pure_columns(
    state: Any,
    zero: tuple[float, float],
    bounds: Bounds,
    critical: Critical,
    cold: Callable[[Pair, float, float], Row],
    pair: Pair,
    p: _Array,
    y: _Array,
) -> Columns:
    """State columns of a pair of `WARM_PAIRS`.

    Parameters
    ----------
    state, zero
        Object of CoolProp, and what is added to its h and s.
    bounds, critical
        Range and critical point of the fluid.
    cold
        Row of any pair by the library's own flash.
    p, y
        Pressures (Pa) and h (J/kg) or s (J/kg/K).
    """
    name = pair[1]
    columns = np.full((p.size, 6), NaN)
    usual = np.isfinite(p) & np.isfinite(y) & (p > 0.0) & (p <= bounds.p_max)
    if p.size < _MANY_ROWS and (usual.sum() < 2 or tour(p[usual], y[usual]) is None):
        return columns_of(partial(cold, pair), p, y)
    lines = _lines(bounds, critical, cold, name, p, y, usual)
    known = ~np.isnan(lines[:, LIQUID, _T])
    low, high = (lines[:, phase, _COLUMN[name]] for phase in (LIQUID, VAPOUR))
    share = (y - low) / (high - low)

    wet = usual & known & (share > _HAIR) & (share < 1.0 - _HAIR)
    if wet.any():
        columns[wet] = _joined(name, p[wet], y[wet], lines[wet], share[wet])

    rest = usual & ~wet
    groups = (
        (iphase_liquid, rest & known & (share <= -_HAIR)),
        (iphase_gas, rest & known & (share >= 1.0 + _HAIR)),
        (iphase_not_imposed, rest & ~known),
    )
    given: dict[int, Row] = {}
    for phase, group in groups:
        rows = np.flatnonzero(group)
        if rows.size < _LEAST_GROUP:
            continue
        neighbours = tour(p[rows], y[rows])
        if neighbours is None:
            continue
        order, span = neighbours
        rows = rows[order]
        p_rows, y_rows = p[rows], y[rows]
        at = partial(_asked, cold, pair, p_rows.tolist(), y_rows.tolist())
        equation = partial(_evaluated, state, zero, phase)
        table, found = solve_neighbours(equation, at, name, p_rows, y_rows, span)
        given.update((int(rows[index]), row) for index, row in found.items())
        solved = ~np.isnan(table[:, 0])
        rows, (T, rho, h, s) = rows[solved], table[solved].T
        columns[rows] = np.stack((T, p[rows], 1.0 / rho, h, s, np.full(T.size, NaN)), axis=1)
        right = _believable(state, bounds, critical, columns[rows], lines[rows], share[rows])
        columns[rows[~right]] = NaN

    failed: dict[int, str] = {}
    for index in np.flatnonzero(np.isnan(columns[:, _T])).tolist():
        row = given.get(index) or cold(pair, float(p[index]), float(y[index]))
        if isinstance(row, str):
            failed[index] = row
        else:
            columns[index] = row
    T, p, v, h, s, quality = (column.copy() for column in columns.T)
    return Columns(T, p, v, h, s, quality, failed)


def _lines(
    bounds: Bounds,
    critical: Critical,
    cold: Callable[[Pair, float, float], Row],
    name: str,
    p: _Array,
    y: _Array,
    usual: npt.NDArray[np.bool_],
) -> _Array:
    """Saturated states of the rows that may be near them; NaN for the others."""
    lines = np.full((p.size, 2, 4), NaN)
    lowest = cold(("T", "quality"), bounds.T_min, 0.0)
    if isinstance(lowest, str):
        return lines
    boiling = usual & (p > lowest[1]) & (p < _NEAR_CRITICAL * critical.p)
    if not boiling.any():
        return lines

    def at_quality(p: float, quality: float) -> Row:
        return cold(("p", "quality"), p, quality)

    # Far above all saturated vapour there is nothing to tell apart.
    some = np.geomspace(p[boiling].min(), p[boiling].max(), _SOME)
    edges = saturated_at(at_quality, some)[:, :, _COLUMN[name]]
    if not np.isnan(edges).all():
        span = np.nanmax(edges[:, VAPOUR] - edges[:, LIQUID])
        boiling &= y < np.nanmax(edges[:, VAPOUR]) + _FAR * span
    if boiling.any():
        lines[boiling] = saturated_at(at_quality, p[boiling])
    return lines


def _joined(name: str, p: _Array, y: _Array, lines: _Array, share: _Array) -> _Array:
    """Rows between the two saturated states."""
    liquid, vapour = lines[:, LIQUID], lines[:, VAPOUR]
    mixed = liquid + share[:, None] * (vapour - liquid)
    mixed[:, _COLUMN[name]] = y
    T, v, h, s = mixed.T
    return np.stack((T, p, v, h, s, share), axis=1)


def _asked(
    cold: Callable[[Pair, float, float], Row], pair: Pair, p: list[float], y: list[float], i: int
) -> Row:
    return cold(pair, p[i], y[i])


def _evaluated(state: Any, zero: tuple[float, float], phase: Any, T: _Array, rho: _Array) -> _Array:
    """The equation at T and density, see `Equation`.

    A phase is imposed where the saturation lines are known and the answer is held against them; it
    saves a look at these lines in every evaluation.  Elsewhere none is, so that a metastable state
    shows itself as two phases.  The derivatives of p come from those of the residual Helmholtz
    energy, which are there already:  dp/drho = 2 p / rho - R T + R T delta^2 a_dd,
    dp/dT = p / T - rho R delta tau a_dt.
    """
    update, nothing = state.update, (NaN,) * 7
    get_p, get_h, get_s, get_c = state.p, state.hmass, state.smass, state.cvmass
    get_dd, get_dt, get_quality = state.d2alphar_dDelta2, state.d2alphar_dDelta_dTau, state.Q
    rows = []
    state.specify_phase(phase)
    try:
        for T_row, rho_row in zip(T.tolist(), rho.tolist(), strict=True):
            try:
                update(DmassT_INPUTS, rho_row, T_row)
                rows.append((get_p(), get_h(), get_s(), get_dd(), get_dt(), get_c(), get_quality()))
            except (ValueError, RuntimeError):
                rows.append(nothing)
    finally:
        state.unspecify_phase()
    p, h, s, a_dd, a_dt, c_v, quality = np.array(rows).T
    R = float(state.gas_constant()) / float(state.molar_mass())
    delta, RT = rho / float(state.rhomass_reducing()), R * T
    p_rho = 2.0 * p / rho - RT + RT * delta * delta * a_dd
    p_T = p / T - rho * R * delta * (float(state.T_reducing()) / T) * a_dt
    p_rho[(quality >= 0.0) & (quality <= 1.0)] = NaN
    return np.stack((p, h + zero[0], s + zero[1], p_rho, p_T, c_v), axis=1)


def _believable(
    state: Any, bounds: Bounds, critical: Critical, rows: _Array, lines: _Array, share: _Array
) -> npt.NDArray[np.bool_]:
    """Whether single-phase rows lie in range and on their side of the saturation lines."""
    T, p, v = rows[:, 0], rows[:, 1], rows[:, 2]
    edge = np.where(share < 0.5, LIQUID, VAPOUR)
    T_line, v_line = lines[np.arange(T.size), edge, :2].T
    liquid = (share < 0.5) & (T_line >= T) & (v <= v_line)
    vapour = (share > 0.5) & (T_line <= T) & (v >= v_line)
    # Without lines the equation has told two phases from one; next to the critical point it cannot.
    clear = np.abs(np.log(v / critical.v)) > _CLEAR
    beyond = np.isnan(share) & ((T > critical.T) | (p > critical.p) | clear)
    right: npt.NDArray[np.bool_] = liquid | vapour | beyond
    right &= (bounds.T_min <= T) & (bounds.T_max >= T)
    dense = right & (bounds.T_melt_max > T) & (v < critical.v)
    for index in np.flatnonzero(dense).tolist():
        if bounds.reason_if_solid(state, float(T[index]), float(p[index])) is not None:
            right[index] = False
    return right
