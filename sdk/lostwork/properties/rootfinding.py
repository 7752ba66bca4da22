"""Bracketed root finding for whole columns at once.

One monotone unknown per row.  Rows are bracketed first by scanning a grid, because the ends of a
backend's range often have no state (solid, or beyond the pressure limit), then closed in with the
method of Chandrupatla (1997, Advances in Engineering Software 28, 145), which takes inverse
quadratic steps where they are safe and bisects elsewhere.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import TypeAlias

import numpy as np
import numpy.typing as npt

from lostwork.properties.backend import Column

__all__ = ["Bracket", "Rows", "bracketed_root", "find_brackets", "solve_brackets"]

Vector: TypeAlias = npt.NDArray[np.float64]
Rows: TypeAlias = npt.NDArray[np.intp]
Residual: TypeAlias = Callable[[Vector, Rows], Vector]
"""f(unknown, rows): residual of the given rows; NaN where there is no state."""

GRID = 24
MAX_ITERATIONS = 80
EDGE_HALVINGS = 40


@dataclass(frozen=True)
class Bracket:
    """Rows whose residual changes sign between `low` and `high`."""

    rows: Rows
    low: Vector
    high: Vector
    f_low: Vector
    f_high: Vector


def find_brackets(residual: Residual, low: Vector, high: Vector, grid: int = GRID) -> Bracket:
    """Scan from `low` to `high`, row by row, for the first pair of neighbours that change sign.

    Where none do, the edge between a point that has a state and one that has none is searched by
    halving, since the root may lie between the last good point and that edge.
    """
    count = low.size
    every = np.arange(count)
    fractions = np.linspace(0.0, 1.0, grid)
    points = low + fractions[:, None] * (high - low)
    values = residual(points.ravel(), np.tile(every, grid)).reshape(grid, count)
    with np.errstate(invalid="ignore"):
        change = np.sign(values[:-1]) * np.sign(values[1:]) <= 0.0
    found = change.any(axis=0)
    rows = every[found]
    at = change.argmax(axis=0)[found]
    scanned = Bracket(
        rows, points[at, rows], points[at + 1, rows], values[at, rows], values[at + 1, rows]
    )
    missing = every[~found]
    if missing.size == 0:
        return scanned
    return _joined(scanned, _search_edges(residual, points, values, missing))


def _search_edges(residual: Residual, points: Vector, values: Vector, rows: Rows) -> Bracket:
    """Walk from the last point with a state towards the first without, up and down the scale."""
    known = np.isfinite(values[:, rows])
    has_any = known.any(axis=0)
    rows, known = rows[has_any], known[:, has_any]
    grid = points.shape[0]
    brackets = []
    for last, step in ((grid - 1 - known[::-1].argmax(axis=0), 1), (known.argmax(axis=0), -1)):
        beyond = last + step
        inside = (beyond >= 0) & (beyond < grid)
        brackets.append(_halve_towards(residual, points, values, rows[inside], last[inside], step))
    upper, lower = brackets
    fresh = ~np.isin(lower.rows, upper.rows)
    kept = Bracket(
        lower.rows[fresh],
        lower.low[fresh],
        lower.high[fresh],
        lower.f_low[fresh],
        lower.f_high[fresh],
    )
    return _joined(upper, kept)


def _halve_towards(
    residual: Residual, points: Vector, values: Vector, rows: Rows, last: Rows, step: int
) -> Bracket:
    good, f_good = points[last, rows].copy(), values[last, rows].copy()
    bad = points[last + step, rows].copy()
    end, f_end = np.full(rows.size, np.nan), np.full(rows.size, np.nan)
    for _ in range(EDGE_HALVINGS):
        i = np.flatnonzero(np.isnan(f_end))
        if i.size == 0:
            break
        middle = 0.5 * (good[i] + bad[i])
        f_middle = residual(middle, rows[i])
        lost = np.isnan(f_middle)
        crossed = ~lost & (np.sign(f_middle) * np.sign(f_good[i]) <= 0.0)
        end[i[crossed]], f_end[i[crossed]] = middle[crossed], f_middle[crossed]
        onward = ~lost & ~crossed
        good[i[onward]], f_good[i[onward]] = middle[onward], f_middle[onward]
        bad[i[lost]] = middle[lost]
    hit = np.isfinite(f_end)
    return Bracket(rows[hit], good[hit], end[hit], f_good[hit], f_end[hit])


def _joined(first: Bracket, second: Bracket) -> Bracket:
    return Bracket(
        np.concatenate([first.rows, second.rows]),
        np.concatenate([first.low, second.low]),
        np.concatenate([first.high, second.high]),
        np.concatenate([first.f_low, second.f_low]),
        np.concatenate([first.f_high, second.f_high]),
    )


def solve_brackets(
    residual: Residual, bracket: Bracket, *, relative: float = 4e-16, absolute: float = 0.0
) -> Vector:
    """Close in on the root of every bracketed row; NaN where the state is lost on the way.

    Parameters
    ----------
    residual
        f(unknown, rows), continuous within each bracket.
    bracket
        From `find_brackets`.
    relative, absolute
        Width of the bracket at which a row is done, relative to the unknown and absolute.
    """
    rows = bracket.rows
    a, b = bracket.high.copy(), bracket.low.copy()
    fa, fb = bracket.f_high.copy(), bracket.f_low.copy()
    c, fc = a.copy(), fa.copy()
    t = np.full(rows.size, 0.5)
    root = np.where(np.abs(fa) < np.abs(fb), a, b)
    done = (fa == 0.0) | (fb == 0.0)
    for _ in range(MAX_ITERATIONS):
        open_rows = np.flatnonzero(~done)
        if open_rows.size == 0:
            break
        i = open_rows
        x = a[i] + t[i] * (b[i] - a[i])
        fx = residual(x, rows[i])
        lost = np.isnan(fx)
        same = np.sign(fx) == np.sign(fa[i])
        c[i] = np.where(same, a[i], b[i])
        fc[i] = np.where(same, fa[i], fb[i])
        b[i] = np.where(same, b[i], a[i])
        fb[i] = np.where(same, fb[i], fa[i])
        a[i], fa[i] = x, fx
        better = np.abs(fa[i]) < np.abs(fb[i])
        root[i] = np.where(lost, np.nan, np.where(better, a[i], b[i]))
        width = np.abs(b[i] - a[i])
        tolerance = 2.0 * relative * np.abs(root[i]) + absolute
        closed = lost | (fa[i] == 0.0) | (fb[i] == 0.0) | (width <= tolerance)
        t[i] = _next_fraction(a[i], fa[i], b[i], fb[i], c[i], fc[i], tolerance, width)
        done[i] = closed
    return root


def _next_fraction(
    a: Vector, fa: Vector, b: Vector, fb: Vector, c: Vector, fc: Vector, tol: Vector, width: Vector
) -> Vector:
    """Where between a and b to look next: inverse quadratic where that is safe, else the middle."""
    with np.errstate(all="ignore"):
        xi = (a - b) / (c - b)
        phi = (fa - fb) / (fc - fb)
        safe = (phi**2 < xi) & ((1.0 - phi) ** 2 < 1.0 - xi)
        inverse = (fa / (fb - fa)) * (fc / (fb - fc)) + ((c - a) / (b - a)) * (fa / (fc - fa)) * (
            fb / (fc - fb)
        )
        t = np.where(safe & np.isfinite(inverse), inverse, 0.5)
        margin = np.where(width > 0.0, np.minimum(0.5, tol / (2.0 * width)), 0.5)
    return np.clip(t, margin, 1.0 - margin)


def bracketed_root(
    residual: Callable[[Column], Column], low: Column, high: Column, *, relative: float = 1e-14
) -> Column:
    """Root of a monotone function between `low` and `high`, row by row.

    Parameters
    ----------
    residual
        f(x) of floats or of arrays, in the shape of `low` and `high` broadcast together.
    low, high
        Ends of the bracket, floats or arrays.
    relative
        Width of the bracket, relative to the root, at which a row is done.

    Returns
    -------
    float or array
        NaN where f does not change sign between the ends, or has no value.
    """
    shape = np.broadcast_shapes(np.shape(low), np.shape(high))
    a = np.array(np.broadcast_to(high, shape), dtype=np.float64).ravel()
    b = np.array(np.broadcast_to(low, shape), dtype=np.float64).ravel()

    def whole(x: Vector) -> Vector:
        value = residual(x.reshape(shape)) if shape else residual(float(x[0]))
        return np.array(np.broadcast_to(value, shape), dtype=np.float64).ravel()

    fa, fb = whole(a), whole(b)
    every = np.arange(a.size)
    crossed = np.sign(fa) * np.sign(fb) <= 0.0
    filled = np.where(crossed, a, np.nan)

    def of_rows(x: Vector, rows: Rows) -> Vector:
        trial = filled.copy()
        trial[rows] = x
        return whole(np.where(np.isnan(trial), a, trial))[rows]

    bracket = Bracket(every[crossed], b[crossed], a[crossed], fb[crossed], fa[crossed])
    root = np.full(a.size, np.nan)
    root[crossed] = solve_brackets(of_rows, bracket, relative=relative)
    return root.reshape(shape) if shape else float(root[0])
