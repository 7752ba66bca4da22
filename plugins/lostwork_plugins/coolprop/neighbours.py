"""A column of single-phase states, each sought from states already solved near by.

A flash that starts from nothing brackets its root.  Between two solved neighbours a state is known
beforehand to many digits (cubic Hermite interpolation, off the chord along the tangents), and one
evaluation at (T, density) is all that it costs:

    [dp]   [p_T  p_rho] [dT  ]        h_T = c_v + p_T / rho    h_rho = (p_rho - T p_T / rho) / rho
    [dy] = [y_T  y_rho] [drho]        s_T = c_v / T            s_rho = - p_T / rho^2

for y one of h, s and T.  A step too small to be worth another evaluation is taken along the same
tangent, where ds = (dh - dp / rho) / T gives the column that was not asked for.

First a few rows far apart are solved from nothing, then rows between them, and so on, so that the
arithmetic runs over many rows at once.  A root is believed only where it is stable, a single phase
and no leap from its neighbour; any other row is left to the flash that starts from nothing.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import TypeAlias

import numpy as np
import numpy.typing as npt

from lostwork_plugins.coolprop.rows import NaN, Row

__all__ = ["Equation", "solve_neighbours", "tour"]

_Array: TypeAlias = npt.NDArray[np.float64]
_Rows: TypeAlias = npt.NDArray[np.intp]

Equation: TypeAlias = Callable[[_Array, _Array], _Array]
"""p, h, s, (dp/drho)_T, (dp/dT)_rho, c_v at columns of T (K) and density (kg/m3), one row each;
NaN where it is no single phase."""

# An unverified last step of this size leaves an error of its square.
_CLOSE = 3e-8
_STEPS = 5
_LEAP_T = 0.10
_LEAP_DENSITY = 0.30
_POLISH = 1e-5
# More evaluations than this for each row solved say that the column is not made of neighbours.
_WORTH = 8
_MANY = 400
# A gap that closes by less than one row in so many is left to other means.
_GAP = 12
# A tour is worth its way where it is this much shorter than the order given.
_SHORTER = 0.5
_ROWS_PER_STRIP = 2.0
_LN_P_OF_STRIP = 0.25
# Of the whole extent of the column.
_STEP_OF_NEIGHBOURS = 0.25
_STRIP_OF_NEIGHBOURS = 10.0

_T, _RHO, _H, _S, _P_T, _P_RHO, _Y_T, _Y_RHO = range(8)


def tour(p: _Array, y: _Array) -> tuple[_Rows, int] | None:
    """Order in which every state has near neighbours, and how many rows on end follow a line.

    The order given where its steps are short; else strips of equal pressure ratio, up one and down
    the next.  ``None`` where the states are too few and too far apart to be neighbours at all.
    """
    count = p.size
    ln_p = np.log(p)
    across, along = _scaled(ln_p), _scaled(y)
    given = np.arange(count)
    strips, per_strip = 1, float(count)
    if across.any():
        widest = float(np.ptp(ln_p)) / _LN_P_OF_STRIP
        strips = max(1, round(max(float(np.sqrt(count / _ROWS_PER_STRIP)), widest)))
        per_strip = count / strips
    strip = np.minimum((across * strips).astype(np.intp), strips - 1)
    snake = np.lexsort((np.where(strip % 2 == 0, along, -along), strip))
    as_given = _length(across, along, given)
    if _length(across, along, snake) < _SHORTER * as_given:
        return (snake, int(per_strip)) if per_strip >= _STRIP_OF_NEIGHBOURS else None
    return (given, count) if as_given <= _STEP_OF_NEIGHBOURS * count else None


def _scaled(values: _Array) -> _Array:
    low, high = values.min(), values.max()
    return (values - low) / (high - low) if high > low else np.zeros(values.shape)


def _length(across: _Array, along: _Array, order: _Rows) -> float:
    steps = np.abs(np.diff(across[order])) + np.abs(np.diff(along[order]))
    return float(steps.sum())


def solve_neighbours(
    equation: Equation, cold: Callable[[int], Row], name: str, p: _Array, y: _Array, span: int
) -> tuple[_Array, dict[int, Row]]:
    """Solve rows that stand in an order of neighbours.

    Parameters
    ----------
    equation
        The single phase at T (K) and density (kg/m3).
    cold
        Row of an index by a flash that needs no neighbour.
    name, p, y
        "h", "s" or "T", and the columns of p (Pa) and of that.
    span
        How many rows on end follow a line, so that neighbours some rows apart are of use too.

    Returns
    -------
    A table of T, density, h, s of every row, NaN where it was not solved from a neighbour; and the
    rows that `cold` gave instead, by index.
    """
    column = _Column(equation, cold, name, p, y)
    factor = 8 if span > _MANY else 2
    stride = factor
    while 2 * stride * factor <= span:
        stride *= factor
    column.start(np.unique(np.append(np.arange(0, p.size, stride), p.size - 1)))
    while stride > 1 and column.worth_while:
        stride //= factor
        column.fill(np.arange(0, p.size, stride))
    if column.worth_while:
        column.fill(np.arange(p.size))
    return column.table[:, :4], column.given


class _Column:
    """The rows solved so far, with the slopes of the equation there."""

    def __init__(
        self, equation: Equation, cold: Callable[[int], Row], name: str, p: _Array, y: _Array
    ) -> None:
        self._equation, self._cold, self._name = equation, cold, name
        self._p, self._y = p, y
        self.table = np.full((p.size, 8), NaN)
        self.given: dict[int, Row] = {}
        self._asked = np.zeros(p.size, dtype=bool)
        self._evaluations = 0
        self._solved = 0

    @property
    def worth_while(self) -> bool:
        """Whether neighbours have been of use so far."""
        return self._evaluations < self._p.size + _WORTH * self._solved

    def start(self, rows: _Rows) -> None:
        """Solve rows from nothing; polished to the last digits they serve as neighbours."""
        self._asked[rows] = True
        single = []
        for index in rows.tolist():
            row = self._cold(index)
            self.given[index] = row
            if not isinstance(row, str) and np.isnan(row[5]):
                single.append((index, row[0], 1.0 / row[2]))
        if not single:
            return
        places, T, rho = (np.array(values) for values in zip(*single, strict=True))
        found = self._newton(places, T, rho, T, rho, _POLISH, _POLISH)
        for index in places[found].tolist():
            del self.given[index]

    def fill(self, rows: _Rows) -> None:
        """Solve rows from the solved ones on both sides, on into a gap as long as that helps."""
        while rows.size // _GAP < self._fill_once(rows) < rows.size and self.worth_while:
            rows = rows[np.isnan(self.table[rows, _T])]

    def _fill_once(self, rows: _Rows) -> int:
        unsolved = np.isnan(self.table[:, _T])
        solved = np.flatnonzero(~unsolved)
        rows = rows[unsolved[rows] & ~self._asked[rows]]
        if rows.size == 0 or solved.size == 0:
            return 0
        after = np.searchsorted(solved, rows)
        right = solved[np.minimum(after, solved.size - 1)]
        left = solved[np.maximum(after - 1, 0)]
        guess, near = self._between(rows, left, right)
        T, rho = self.table[near, _T], self.table[near, _RHO]
        found = self._newton(rows, guess[:, 0], guess[:, 1], T, rho, _LEAP_T, _LEAP_DENSITY)
        return int(found.sum())

    def _between(self, rows: _Rows, left: _Rows, right: _Rows) -> tuple[_Array, _Rows]:
        """T and density foreseen from two neighbours, and the nearer of the two."""
        p, y, table = self._p, self._y, self.table
        per_p, per_y = np.ptp(p) or 1.0, np.ptp(y) or 1.0
        chord_p, chord_y = (p[right] - p[left]) / per_p, (y[right] - y[left]) / per_y
        off_p, off_y = (p[rows] - p[left]) / per_p, (y[rows] - y[left]) / per_y
        length = chord_p * chord_p + chord_y * chord_y
        share = (off_p * chord_p + off_y * chord_y) / np.where(length > 0.0, length, 1.0)
        share = np.clip(share, 0.0, 1.0)[:, None]
        ends = table[left, :2], table[right, :2]
        from_left = ends[0] + self._tangent(left, rows)
        from_right = ends[1] + self._tangent(right, rows)
        missed_right = ends[1] - (ends[0] + self._tangent(left, right))
        missed_left = ends[0] - (ends[1] + self._tangent(right, left))
        bend = (1.0 - share) * missed_left + share * missed_right
        guess = (1.0 - share) * from_left + share * (from_right + (1.0 - share) * bend)
        return guess, np.where(share[:, 0] < 0.5, left, right)

    def _tangent(self, start: _Rows, end: _Rows) -> _Array:
        return _step(
            self.table[start], self._p[end] - self._p[start], self._y[end] - self._y[start]
        )

    def _newton(
        self,
        rows: _Rows,
        T: _Array,
        rho: _Array,
        T_near: _Array,
        rho_near: _Array,
        leap_T: float,
        leap_rho: float,
    ) -> npt.NDArray[np.bool_]:
        """Newton steps from a guess; True where a row was found and entered."""
        found = np.zeros(rows.size, dtype=bool)
        active = np.arange(rows.size)
        T, rho = T.copy(), rho.copy()
        for _ in range(_STEPS):
            leap = (np.abs(T[active] - T_near[active]) > leap_T * T_near[active]) | (
                np.abs(rho[active] - rho_near[active]) > leap_rho * rho_near[active]
            )
            active = active[~leap]
            if active.size == 0:
                break
            here = self._equation(T[active], rho[active])
            self._evaluations += active.size
            stable = (here[:, 3] > 0.0) & (here[:, 5] > 0.0)
            active, here = active[stable], here[stable]
            places = rows[active]
            row = self._tangent_row(T[active], rho[active], here)
            y_here = here[:, 1] if self._name == "h" else here[:, 2]
            if self._name == "T":
                y_here = T[active]
            p_miss, y_miss = self._p[places] - here[:, 0], self._y[places] - y_here
            step = _step(row, p_miss, y_miss)
            T[active] += step[:, 0]
            rho[active] += step[:, 1]
            close = (np.abs(step) < _CLOSE * row[:, :2]).all(axis=1)
            self._enter(places[close], row[close], step[close], p_miss[close], y_miss[close])
            found[active[close]] = True
            self._solved += int(close.sum())
            active = active[~close]
            if active.size == 0:
                break
        return found

    def _tangent_row(self, T: _Array, rho: _Array, here: _Array) -> _Array:
        _, h, s, p_rho, p_T, c_v = here.T
        row = np.empty((T.size, 8))
        row[:, _T], row[:, _RHO], row[:, _H], row[:, _S] = T, rho, h, s
        row[:, _P_T], row[:, _P_RHO] = p_T, p_rho
        if self._name == "h":
            row[:, _Y_T], row[:, _Y_RHO] = c_v + p_T / rho, (p_rho - T * p_T / rho) / rho
        elif self._name == "s":
            row[:, _Y_T], row[:, _Y_RHO] = c_v / T, -p_T / (rho * rho)
        else:
            row[:, _Y_T], row[:, _Y_RHO] = 1.0, 0.0
        return row

    def _enter(
        self, places: _Rows, row: _Array, step: _Array, p_miss: _Array, y_miss: _Array
    ) -> None:
        T, rho = row[:, _T] + step[:, 0], row[:, _RHO] + step[:, 1]
        if self._name == "h":
            row[:, _S] += (y_miss - p_miss / rho) / T
            row[:, _H] = self._y[places]
        elif self._name == "s":
            row[:, _H] += T * y_miss + p_miss / rho
            row[:, _S] = self._y[places]
        else:
            rise = (row[:, _P_RHO] - T * row[:, _P_T] / rho) / rho * step[:, 1]
            row[:, _H] += rise
            row[:, _S] += (rise - p_miss / rho) / T
        row[:, _T], row[:, _RHO] = T, rho
        self.table[places] = row


def _step(row: _Array, dp: _Array, dy: _Array) -> _Array:
    """Changes of T and density along the tangent at `row` for changes of p and y."""
    p_T, p_rho, y_T, y_rho = row[:, _P_T:].T
    determinant = p_T * y_rho - p_rho * y_T
    step = np.stack((dp * y_rho - p_rho * dy, p_T * dy - y_T * dp), axis=1)
    step /= determinant[:, None]
    return step
