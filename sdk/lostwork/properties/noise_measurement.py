"""The measuring of noise: which lines are followed through a region, and what is made of them."""

from __future__ import annotations

import threading
from collections import OrderedDict
from collections.abc import Hashable, Iterator
from functools import partial
from typing import Any, TypeAlias

import numpy as np
import numpy.typing as npt

from lostwork.errors import OutOfLimits
from lostwork.properties.backend import Columns, Pair, PropertyModel
from lostwork.properties.closure import (
    BY_ENTHALPY,
    BY_ENTROPY,
    ISOBAR,
    ISOTHERM,
    Closure,
    Line,
    Solve,
    close,
)
from lostwork.properties.noise import Noise, NoiseResidual, Region
from lostwork.properties.pairs import solve_pair
from lostwork.quantities import quantity

__all__ = ["measured"]

Vector: TypeAlias = npt.NDArray[np.float64]

_LEAST_PRESSURE = 1e3
_FINER = 0.2
"""The sums are made finer than the stated noise by this factor."""
_FINEST = 1e-11
_NEAR_CRITICAL = 0.995
_STEP = 1e-5
"""Relative step in T from saturation into one phase; the error of the step is its cube."""


_KEPT: OrderedDict[Hashable, Noise] = OrderedDict()
_KEPT_LOCK = threading.Lock()
_MOST_KEPT = 64


def measured(
    identity: Hashable,
    name: str,
    model: PropertyModel,
    region: Region | None,
    cells: int,
    *,
    pure: bool,
) -> Noise:
    """Measure a model over a region, or give what was measured before.

    Parameters
    ----------
    identity
        What tells one fluid from another, for what is kept.
    name
        Of the fluid.
    model, pure
        The model, and whether it is of one component.
    region
        ``None`` for the whole range of the model, from 1 kPa up.
    cells
        Into how many cells the region is divided each way.

    Raises
    ------
    OutOfLimits
        Nothing could be followed anywhere in the region.
    """
    limits = model.limits
    if region is None:
        lowest = max(limits.p_min, _LEAST_PRESSURE)
        region = Region(
            T=(quantity(limits.T_min, "K"), quantity(limits.T_max, "K")),
            p=(quantity(lowest, "Pa"), quantity(limits.p_max, "Pa")),
        )
    key = (identity, region, cells)
    with _KEPT_LOCK:
        if key in _KEPT:
            return _KEPT[key]
    found = tuple(_Measurement(model, region, cells, pure).residuals())
    if not found:
        raise OutOfLimits(fluid=name, reason=f"no state could be followed in {region}")
    noise = Noise(name, region, found)
    with _KEPT_LOCK:
        _KEPT[key] = noise
        while len(_KEPT) > _MOST_KEPT:
            _KEPT.popitem(last=False)
    return noise


class _Measurement:
    def __init__(self, model: PropertyModel, region: Region, cells: int, pure: bool) -> None:
        self._model, self._pure, self._cells = model, pure, cells
        self._T = np.geomspace(*region.T, cells + 1)
        self._p = np.geomspace(*region.p, cells + 1)
        self._solve: Solve = partial(_solved, model, pure)
        self._tolerance = max(_FINER * model.entropy_noise, _FINEST)

    def residuals(self) -> Iterator[NoiseResidual]:
        isobars, isotherms = self._isobars(), self._isotherms()
        yield from self._told("by (T, p)", isobars, isotherms)
        yield from self._told("closed loops", self._loops(isobars, isotherms), split=False)
        for line in (BY_ENTHALPY, BY_ENTROPY):
            yield from self._told(f"by (p, {line.pair[1]})", self._across(line))
        if self._model.two_phase:
            if self._pure:
                yield from self._told("evaporation", self._evaporation(), split=False)
            yield from self._told("saturation to one phase", *self._joins(), split=False)

    # --- lines by T and p ---

    def _isobars(self) -> Closure:
        p = np.repeat(self._p, self._cells)
        low, high = (np.tile(T, self._cells + 1) for T in (self._T[:-1], self._T[1:]))
        return self._apart(close(ISOBAR, self._solve, p, low, high, self._tolerance), p, low, high)

    def _isotherms(self) -> Closure:
        T = np.repeat(self._T, self._cells)
        low, high = (np.tile(p, self._cells + 1) for p in (self._p[:-1], self._p[1:]))
        found = close(ISOTHERM, self._solve, T, low, high, self._tolerance)
        boiling = self._saturated("T", T, "p")
        return _without(found, (low <= boiling) & (boiling <= high))

    def _apart(self, found: Closure, p: Vector, low: Vector, high: Vector) -> Closure:
        boiling = self._saturated("p", p, "T")
        return _without(found, (low <= boiling) & (boiling <= high))

    def _saturated(self, given: str, at: Vector, sought: str) -> Vector:
        """Saturation of a pure fluid, which (T, p) cannot cross; NaN where there is none."""
        if not (self._pure and self._model.two_phase):
            return np.full(at.size, np.nan)
        columns = self._solve((given, "quality"), at, np.zeros(at.size))
        return np.asarray(getattr(columns, sought), dtype=np.float64)

    def _loops(self, isobars: Closure, isotherms: Closure) -> Closure:
        """Sum the residuals around each cell; s itself cancels, so h and v alone are tried."""
        n = self._cells

        def around(bars: Vector, therms: Vector, sign: float) -> Vector:
            bars, therms = bars.reshape(n + 1, n), therms.reshape(n + 1, n).T
            up, down = bars[:-1] + therms[:, 1:], bars[1:] + therms[:, :-1]
            return np.ravel(up + sign * down)

        T, p = np.meshgrid(0.5 * (self._T[:-1] + self._T[1:]), np.sqrt(self._p[:-1] * self._p[1:]))
        residual = around(isobars.residual, isotherms.residual, -1.0)
        open_rows = {int(row): "an edge is open" for row in np.flatnonzero(~np.isfinite(residual))}
        return Closure(
            residual,
            around(isobars.truncation, isotherms.truncation, 1.0),
            np.ravel(T),
            np.ravel(p),
            np.zeros(residual.size, dtype=bool),
            open_rows,
        )

    # --- lines by h and s, through the dome ---

    def _across(self, line: Line) -> Closure:
        T, p = np.tile(self._T, self._p.size), np.repeat(self._p, self._T.size)
        columns = self._solve(("T", "p"), T, p)
        values = np.asarray(columns.h if line is BY_ENTHALPY else columns.s).reshape(
            self._p.size, self._T.size
        )
        low, high = values[:, :-1].ravel(), values[:, 1:].ravel()
        known = np.isfinite(low) & np.isfinite(high)
        p = np.repeat(self._p, self._cells)[known]
        return close(line, self._solve, p, low[known], high[known], self._tolerance)

    # --- saturation ---

    def _evaporation(self) -> Closure:
        """S'' - s' against (h'' - h') / T."""
        critical = self._model.critical()
        high = self._T[-1] if critical is None else min(self._T[-1], _NEAR_CRITICAL * critical.T)
        if not self._T[0] < high:
            return _nothing()
        T = np.geomspace(self._T[0], high, 2 * self._cells)
        wet, dry = (self._solve(("T", "quality"), T, np.full(T.size, q)) for q in (0.0, 1.0))
        within = (wet.p >= self._p[0]) & (wet.p <= self._p[-1])
        residual = (dry.s - wet.s) - (dry.h - wet.h) / T
        return _points(np.where(within, residual, np.nan), T, np.asarray(wet.p), wet.failed)

    def _joins(self) -> Iterator[Closure]:
        """One small step along an isobar from saturation into one phase."""
        critical = self._model.critical()
        below = self._p if critical is None else self._p[self._p < _NEAR_CRITICAL * critical.p]
        for quality, step in ((0.0, -_STEP), (1.0, _STEP)):
            edge = self._solve(("p", "quality"), below, np.full(below.size, quality))
            T = np.asarray(edge.T, dtype=np.float64)
            beside = self._solve(("T", "p"), T * (1.0 + step), below)
            # A step that comes out in two phases has not left the dome.
            one_phase = ~np.isfinite(np.asarray(beside.quality, dtype=np.float64))
            residual = (beside.s - edge.s) - (beside.h - edge.h) / (T * (1.0 + 0.5 * step))
            kept = np.where(one_phase, residual, np.nan)
            yield _points(kept, T, below, {**beside.failed, **edge.failed})

    # --- telling ---

    def _told(self, kind: str, *found: Closure, split: bool = True) -> Iterator[NoiseResidual]:
        """Give the worst of what was followed, lines through two phases apart from the others."""
        residual, truncation, T, p = (
            np.concatenate([getattr(closure, name) for closure in found])
            for name in ("residual", "truncation", "T", "p")
        )
        wet = np.concatenate([closure.wet for closure in found])
        reason = next((r for closure in found for r in closure.reasons.values()), "")
        open_lines = int(np.count_nonzero(~np.isfinite(residual)))
        for phases, rows in (("one phase ", ~wet), ("two phases ", wet)) if split else (("", wet),):
            which = np.isfinite(residual) & (rows if split else True)
            if not which.any():
                continue
            excess = np.where(which, np.abs(residual) - truncation, -np.inf)
            row = int(np.argmax(excess))
            stated = float(self._model.noise_at(float(T[row]), float(p[row])))
            yield NoiseResidual(
                kind=f"{phases}{kind}",
                entropy=abs(float(residual[row])),
                truncation=float(truncation[row]),
                T=float(T[row]),
                p=float(p[row]),
                stated=stated,
                lines=int(np.count_nonzero(which)),
                left_out=open_lines,
                reason=reason if open_lines else "",
            )


def _solved(model: PropertyModel, pure: bool, pair: Pair, x: Vector, y: Vector) -> Columns:
    return solve_pair(model, pair, np.ascontiguousarray(x), np.ascontiguousarray(y), pure=pure)


def _without(found: Closure, which: npt.NDArray[np.bool_]) -> Closure:
    """Leave lines out that (T, p) cannot follow."""
    reasons = dict(found.reasons)
    for row in np.flatnonzero(which):
        reasons[int(row)] = "T and p cannot follow a pure fluid across saturation"
    residual, truncation = (
        np.where(which, np.nan, part) for part in (found.residual, found.truncation)
    )
    return Closure(residual, truncation, found.T, found.p, found.wet, reasons)


def _points(residual: Any, T: Vector, p: Vector, failed: Any) -> Closure:
    """Give residuals at points in the form of lines."""
    values = np.asarray(residual, dtype=np.float64)
    blank = np.zeros(values.size)
    reasons = {int(row): reason for row, reason in failed.items()}
    return Closure(values, blank, T, p, blank.astype(bool), reasons)


def _nothing() -> Closure:
    none = np.empty(0)
    return Closure(none, none, none, none, none.astype(bool), {})
