"""Whether h, v and s of a model belong to one surface: dh = T ds + v dp along lines.

Along an isobar and an isotherm the entropy follows from h and v without any derivative:

    isobar      s2 - s1 = [h / T] + integral of h / T^2 dT
    isotherm    s2 - s1 = [h] / T - 1 / T integral of v p d(ln p)
    by h, s     s2 - s1 = integral of dh / T;   h2 - h1 = integral of T ds

What is left over does not close.  A line is parted where it enters or leaves the two phases, since
a kink between the end of a sum and its first node goes unseen.  The integrals are Gauss-Legendre
sums of two orders; a segment is halved where these differ by more than asked for.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import TypeAlias

import numpy as np
import numpy.typing as npt

from lostwork.properties.backend import Columns, Pair

__all__ = ["BY_ENTHALPY", "BY_ENTROPY", "ISOBAR", "ISOTHERM", "Closure", "Line", "close"]

Vector: TypeAlias = npt.NDArray[np.float64]
Solve: TypeAlias = Callable[[Pair, Vector, Vector], Columns]

_FINE, _FINE_WEIGHTS = (0.5 * part for part in np.polynomial.legendre.leggauss(12))
_COARSE, _COARSE_WEIGHTS = (0.5 * part for part in np.polynomial.legendre.leggauss(8))
_NODES = np.concatenate([[0.0, 1.0], 0.5 + _FINE, 0.5 + _COARSE])
_IN_ORDER = np.sort(_NODES)
_BISECTIONS = 24
_DEEPEST = 10
_MOST_SEGMENTS = 60
"""On average for each line, all halvings together."""


@dataclass(frozen=True)
class Line:
    """A kind of line: the pair that is solved, and what is kept along it."""

    name: str
    pair: Pair
    moves: int
    """Place in the pair of the property that changes along the line."""
    logarithmic: bool = False


ISOBAR = Line("isobar", ("T", "p"), moves=0)
ISOTHERM = Line("isotherm", ("T", "p"), moves=1, logarithmic=True)
BY_ENTHALPY = Line("isobar by h", ("p", "h"), moves=1)
BY_ENTROPY = Line("isobar by s", ("p", "s"), moves=1)


@dataclass(frozen=True)
class Closure:
    """What does not close along lines, one entry a line.

    Parameters
    ----------
    residual, truncation
        J/kg/K, with its sign; and what the sums may be wrong by.  NaN where `open` says why.
    T, p
        Where on the line it closes worst, K and Pa.
    wet
        Whether a row on the line is a mixture of phases.
    reasons
        Why a line could not be followed, by its index.
    """

    residual: Vector
    truncation: Vector
    T: Vector
    p: Vector
    wet: npt.NDArray[np.bool_]
    reasons: dict[int, str]


def close(
    line: Line, solve: Solve, fixed: Vector, start: Vector, end: Vector, tolerance: float
) -> Closure:
    """Follow lines from `start` to `end` at `fixed`, and give what does not close.

    Parameters
    ----------
    line
        Kind of line.
    solve
        Gives the columns of a pair.
    fixed, start, end
        What is kept, and where each line begins and ends: K, Pa, J/kg or J/kg/K.
    tolerance
        J/kg/K; a segment whose two sums differ by more is halved, as far as the budget goes.
    """
    low, high = (np.log(start), np.log(end)) if line.logarithmic else (start, end)
    lines = _Lines(fixed.size)
    segments = _parted(line, solve, fixed, low, high)
    for depth in range(_DEEPEST + 1):
        rows = _evaluated(line, solve, fixed[segments.of], segments)
        spent = lines.segments + segments.of.size >= _MOST_SEGMENTS * fixed.size
        last = depth == _DEEPEST or spent
        halved = (rows.truncation > tolerance) & (not last)
        lines.take(segments, rows, ~halved)
        segments = segments.halves(halved)
        if not segments.of.size:
            break
    return lines.closure()


@dataclass(frozen=True)
class _Segments:
    of: npt.NDArray[np.intp]
    low: Vector
    high: Vector

    def halves(self, which: npt.NDArray[np.bool_]) -> _Segments:
        of, low, high = self.of[which], self.low[which], self.high[which]
        middle = 0.5 * (low + high)
        return _Segments(
            np.concatenate([of, of]), np.concatenate([low, middle]), np.concatenate([middle, high])
        )


@dataclass(frozen=True)
class _Rows:
    residual: Vector
    truncation: Vector
    T: Vector
    p: Vector
    wet: npt.NDArray[np.bool_]
    reasons: dict[int, str]


def _parted(line: Line, solve: Solve, fixed: Vector, low: Vector, high: Vector) -> _Segments:
    """Part lines where they enter or leave the two phases."""
    if not fixed.size:
        return _Segments(np.arange(0), low, high)
    x = low[:, None] + (high - low)[:, None] * _IN_ORDER
    x[:, -1] = high
    every = np.repeat(np.arange(fixed.size), _IN_ORDER.size)
    wet = _is_wet(line, solve, fixed[every], x.ravel()).reshape(x.shape)
    of, node = np.nonzero(wet[:, 1:] != wet[:, :-1])
    before, behind, was_wet = x[of, node], x[of, node + 1], wet[of, node]
    for _ in range(_BISECTIONS if of.size else 0):
        middle = 0.5 * (before + behind)
        same = _is_wet(line, solve, fixed[of], middle) == was_wet
        before, behind = np.where(same, middle, before), np.where(same, behind, middle)
    owner = np.concatenate([np.arange(fixed.size), of])
    starts = np.concatenate([low, before])
    order = np.lexsort((starts, owner))
    owner, starts = owner[order], starts[order]
    last = np.append(owner[1:] != owner[:-1], True)
    return _Segments(owner, starts, np.where(last, high[owner], np.append(starts[1:], 0.0)))


def _is_wet(line: Line, solve: Solve, fixed: Vector, moving: Vector) -> npt.NDArray[np.bool_]:
    columns = solve(line.pair, *_given(line, fixed, moving))
    return np.isfinite(np.asarray(columns.quality, dtype=np.float64))


def _given(line: Line, fixed: Vector, moving: Vector) -> tuple[Vector, Vector]:
    value = np.exp(moving) if line.logarithmic else moving
    return (fixed, value) if line.moves == 1 else (value, fixed)


class _Lines:
    """Sums over the segments of each line."""

    def __init__(self, count: int) -> None:
        self.segments = 0
        self._residual, self._truncation = np.zeros(count), np.zeros(count)
        self._wet = np.zeros(count, dtype=bool)
        self._worst = np.full(count, -1.0)
        self._T, self._p = np.full(count, np.nan), np.full(count, np.nan)
        self._reasons: dict[int, str] = {}

    def take(self, segments: _Segments, rows: _Rows, done: npt.NDArray[np.bool_]) -> None:
        self.segments += int(segments.of.size)
        np.add.at(self._residual, segments.of[done], rows.residual[done])
        np.add.at(self._truncation, segments.of[done], rows.truncation[done])
        np.logical_or.at(self._wet, segments.of, rows.wet)
        for row in np.flatnonzero(done & (np.abs(rows.residual) > self._worst[segments.of])):
            owner, size = int(segments.of[row]), abs(float(rows.residual[row]))
            if size > self._worst[owner]:
                self._worst[owner], self._T[owner], self._p[owner] = size, rows.T[row], rows.p[row]
        for failed, reason in rows.reasons.items():
            self._reasons.setdefault(int(segments.of[failed]), reason)

    def closure(self) -> Closure:
        for row in self._reasons:
            self._residual[row] = self._truncation[row] = np.nan
        return Closure(self._residual, self._truncation, self._T, self._p, self._wet, self._reasons)


def _evaluated(line: Line, solve: Solve, fixed: Vector, segments: _Segments) -> _Rows:
    span = segments.high - segments.low
    moving = segments.low[:, None] + span[:, None] * _NODES
    # The ends of neighbouring segments must be one number, or their round-off would not cancel.
    moving[:, 1] = segments.high
    kept = np.broadcast_to(fixed[:, None], moving.shape)
    columns = solve(line.pair, *_given(line, kept.ravel(), moving.ravel()))
    shape = moving.shape
    T, p, v, h, s, quality = (
        np.asarray(column, dtype=np.float64).reshape(shape)
        for column in (columns.T, columns.p, columns.v, columns.h, columns.s, columns.quality)
    )
    h = h - h[:, :1]
    closed, integrand = _terms(line, T, p, v, h)
    change = (h if line is BY_ENTROPY else s)[:, :2] @ np.array([-1.0, 1.0])
    scale = 1.0 / T[:, 0] if line is BY_ENTROPY else np.ones(len(T))
    fine = span * (integrand[:, 2:14] @ _FINE_WEIGHTS)
    coarse = span * (integrand[:, 14:] @ _COARSE_WEIGHTS)
    residual = scale * (change - (closed[:, 1] - closed[:, 0]) - fine)
    truncation = np.abs(scale * (fine - coarse))
    failed = {row // shape[1]: reason for row, reason in reversed(list(columns.failed.items()))}
    wet: npt.NDArray[np.bool_] = np.any(np.isfinite(quality[:, 2:]), axis=1)
    middle = slice(2, 2 + _FINE.size)
    return _Rows(
        residual, np.nan_to_num(truncation), T[:, middle].mean(1), p[:, middle].mean(1), wet, failed
    )


def _terms(line: Line, T: Vector, p: Vector, v: Vector, h: Vector) -> tuple[Vector, Vector]:
    """Give the part in closed form, and the integrand, both of the entropy (or h, by s)."""
    if line is ISOBAR:
        return h / T, h / (T * T)
    if line is ISOTHERM:
        return h / T, -v * p / T
    if line is BY_ENTHALPY:
        return np.zeros_like(h), 1.0 / T
    return np.zeros_like(h), T
