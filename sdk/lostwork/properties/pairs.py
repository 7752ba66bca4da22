"""Solving a state from any determining pair, on top of what a model solves itself.

Every reduction ends in one monotone unknown per row:

- at a given pressure (p with h, s, v or u) the unknown is T;
- at a given temperature (T with v or s) the unknown is ln p;
- (v, h), (v, s), (h, s), (s, u) and (v, u) look for ln p along lines of constant h or s, on which
  v falls with p, s falls at constant h (ds/dp = -v/T) and u rises at constant s (du/dp = -p dv/dp).

Inside the dome of a pure fluid T and p do not move, so the lever rule in `quality` takes over.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import TypeAlias

import numpy as np
import numpy.typing as npt

from lostwork.errors import PairRefused
from lostwork.properties.backend import (
    DETERMINING_PAIRS,
    Column,
    Columns,
    Pair,
    PropertyModel,
    R,
)
from lostwork.properties.rootfinding import Rows, find_brackets, solve_brackets

__all__ = ["ORDER", "ordered_pair", "solve_pair"]

Vector: TypeAlias = npt.NDArray[np.float64]

ORDER = ("T", "p", "v", "h", "s", "u", "quality")

_REFUSED: dict[Pair, tuple[str, str]] = {
    ("T", "h"): ("h at one T has several roots", "Give p with h, or T with p, v or s"),
    ("T", "u"): ("u at one T has several roots", "Give v with u, or T with p, v or s"),
    ("h", "u"): ("h and u do not separate the states of a gas", "Give p with h, or v with u"),
    ("v", "quality"): ("quality along v has several roots", "Give p or T with quality"),
    ("h", "quality"): ("quality along h has several roots", "Give p or T with quality"),
    ("s", "quality"): ("quality along s has several roots", "Give p or T with quality"),
    ("u", "quality"): ("quality along u has several roots", "Give p or T with quality"),
}

_MISSING = {"gas": "liquid"}
_GIVE_TWO = "Give two of T, p, v (or rho), h, s, u, quality"

# A sign change is a root only if the residual there is gone; at a jump it is not.
_ROOT_FRACTION = 1e-8
_ROUND_OFF = 1e-12
_LEAST_PRESSURE = 1e-3


def ordered_pair(names: tuple[str, ...]) -> Pair:
    """Put two property names into the order of `DETERMINING_PAIRS`; refuse what fixes no state.

    Raises
    ------
    PairRefused
        No property of a state, not two different ones, or a pair with several roots (h with T).
    """
    unknown = tuple(name for name in names if name not in ORDER)
    if unknown:
        raise PairRefused(given=unknown, reason="this is no property of a state", instead=_GIVE_TWO)
    if len(set(names)) != 2 or len(names) != 2:
        raise PairRefused(
            given=tuple(names),
            reason="a pure fluid or a mixture of fixed composition takes exactly two properties",
            instead=_GIVE_TWO,
        )
    first, second = sorted(names, key=ORDER.index)
    pair = (first, second)
    if pair not in DETERMINING_PAIRS:
        reason, instead = _REFUSED[pair]
        raise PairRefused(given=pair, reason=reason, instead=instead)
    return pair


def solve_pair(model: PropertyModel, pair: Pair, x: Column, y: Column, *, pure: bool) -> Columns:
    """Columns of the states of `model` at `pair`, by the model itself or by the core.

    Parameters
    ----------
    model
        An open model.
    pair
        One of `DETERMINING_PAIRS`, in its order.
    x, y
        Two floats, or two one-dimensional arrays of one length; SI, on the zero of the model.
    pure
        One component: inside the dome T and p are not independent.

    Returns
    -------
    Columns
        In the form of the input; rows without a state are NaN and listed in `failed`.
    """
    if pair in model.native_pairs:
        return model.columns(pair, x, y)
    if "quality" in pair:
        raise PairRefused(
            given=pair,
            reason=f"this fluid is modelled without a {_MISSING.get(model.only_phase, 'vapour')}",
            instead="Give T with p",
        )
    if isinstance(x, np.ndarray):
        return _solve_columns(model, pair, x, np.asarray(y, dtype=np.float64), pure)
    columns = _solve_columns(model, pair, np.array([x]), np.array([y]), pure)
    values = {name: float(value_of(columns, name)[0]) for name in _Assembly.NAMES}
    return Columns(**values, failed=columns.failed)


def _solve_columns(model: PropertyModel, pair: Pair, x: Vector, y: Vector, pure: bool) -> Columns:
    if pair[0] in ("T", "p"):
        return _along_line(model, pair, x, y, pure)
    return _across_pressures(model, pair, x, y, pure)


def value_of(columns: Columns, name: str) -> Vector:
    """Give one property of `columns`, u included, as an array."""
    if name == "u":
        return np.asarray(columns.h - columns.p * columns.v, dtype=np.float64)
    return np.asarray(getattr(columns, name), dtype=np.float64)


def _along_line(model: PropertyModel, pair: Pair, x: Vector, y: Vector, pure: bool) -> Columns:
    """Solve T or p with another property: lever rule in the dome of a pure fluid, else (T, p)."""
    held, sought = pair
    limits = model.limits
    if held == "p":
        low = np.full(x.size, limits.T_min)
        high = np.full(x.size, limits.T_max)
    else:
        low = np.full(x.size, np.log(max(limits.p_min, _LEAST_PRESSURE)))
        high = np.full(x.size, np.log(limits.p_max))
    assembled = _Assembly(x.size)
    open_rows = np.ones(x.size, dtype=bool)
    if pure and model.two_phase:
        inside = _lever(model, pair, x, y, low, high, assembled)
        open_rows &= ~inside
    rows = np.flatnonzero(open_rows)

    def states(unknown: Vector, of: Rows) -> Columns:
        known = x[rows[of]]
        if held == "p":
            return model.columns(("T", "p"), unknown, known)
        return model.columns(("T", "p"), known, np.exp(unknown))

    _bracket_and_solve(model, states, sought, y[rows], low[rows], high[rows], rows, assembled)
    return assembled.columns(pair, x, y)


def _lever(
    model: PropertyModel,
    pair: Pair,
    x: Vector,
    y: Vector,
    low: Vector,
    high: Vector,
    assembled: _Assembly,
) -> npt.NDArray[np.bool_]:
    """Fill the rows inside the dome; narrow `low` and `high` of the others to their own side."""
    held, sought = pair
    critical = model.critical()
    below = np.ones(x.size, dtype=bool)
    if critical is not None:
        below = x < (critical.p if held == "p" else critical.T)
    inside = np.zeros(x.size, dtype=bool)
    rows = np.flatnonzero(below)
    if rows.size == 0:
        return inside
    line = (held, "quality")
    liquid = model.columns(line, x[rows], np.zeros(rows.size))
    vapour = model.columns(line, x[rows], np.ones(rows.size))
    at_liquid, at_vapour = value_of(liquid, sought), value_of(vapour, sought)
    with np.errstate(invalid="ignore", divide="ignore"):
        quality = (y[rows] - at_liquid) / (at_vapour - at_liquid)
    wet = (quality >= 0.0) & (quality <= 1.0)
    if wet.any():
        assembled.put(rows[wet], model.columns(line, x[rows[wet]], quality[wet]))
        inside[rows[wet]] = True
    edge = value_of(liquid, "T") if held == "p" else np.log(value_of(liquid, "p"))
    liquid_side, vapour_side = quality < 0.0, quality > 1.0
    if held == "p":
        high[rows[liquid_side]], low[rows[vapour_side]] = edge[liquid_side], edge[vapour_side]
    else:
        low[rows[liquid_side]], high[rows[vapour_side]] = edge[liquid_side], edge[vapour_side]
    return inside


def _across_pressures(
    model: PropertyModel, pair: Pair, x: Vector, y: Vector, pure: bool
) -> Columns:
    """Solve a pair without T and p by looking for ln p on lines of constant h or s."""
    first, second = pair

    def states(log_p: Vector, of: Rows) -> Columns:
        p = np.exp(log_p)
        if pair == ("v", "u"):
            return solve_pair(model, ("p", "h"), p, y[of] + p * x[of], pure=pure)
        if first == "v":
            return solve_pair(model, ("p", second), p, y[of], pure=pure)
        return solve_pair(model, ("p", first), p, x[of], pure=pure)

    sought, target = (first, x) if first == "v" else (second, y)
    low = np.full(x.size, np.log(max(model.limits.p_min, _LEAST_PRESSURE)))
    high = np.full(x.size, np.log(model.limits.p_max))
    assembled = _Assembly(x.size)
    _bracket_and_solve(model, states, sought, target, low, high, np.arange(x.size), assembled)
    return assembled.columns(pair, x, y)


def _bracket_and_solve(
    model: PropertyModel,
    states: Callable[[Vector, Rows], Columns],
    sought: str,
    target: Vector,
    low: Vector,
    high: Vector,
    rows: Rows,
    assembled: _Assembly,
) -> None:
    """Find the unknown of each row at which `sought` meets `target`, and put its state in place."""
    if rows.size == 0:
        return

    def residual(unknown: Vector, of: Rows) -> Vector:
        found = value_of(states(unknown, of), sought)
        with np.errstate(invalid="ignore", divide="ignore"):
            return np.log(found / target[of]) if sought == "v" else found - target[of]

    bracket = find_brackets(residual, low, high)
    root = solve_brackets(residual, bracket)
    alive = np.isfinite(root)
    solved = bracket.rows[alive]
    if solved.size == 0:
        return
    columns = states(root[alive], solved)
    left = np.abs(residual(root[alive], solved))
    scale = np.maximum(np.abs(bracket.f_low[alive]), np.abs(bracket.f_high[alive]))
    unseen = _unseen(model, sought, np.asarray(columns.T), target[solved])
    true_root = left <= np.maximum(_ROOT_FRACTION * scale, unseen)
    assembled.put(rows[solved[true_root]], columns, true_root)


def _unseen(model: PropertyModel, sought: str, T: Vector, target: Vector) -> Vector:
    """What is left of a residual however narrow the bracket: by rounding and the model's noise."""
    if sought == "v":
        return np.full(T.size, _ROUND_OFF)
    entropy = _ROUND_OFF * R / model.molar_mass + model.entropy_noise
    rounding = _ROUND_OFF * np.abs(target)
    return rounding + (entropy if sought == "s" else entropy * T)


class _Assembly:
    """Columns filled group by group; what is never filled has no state."""

    NAMES = ("T", "p", "v", "h", "s", "quality")

    def __init__(self, size: int) -> None:
        self._data = {name: np.full(size, np.nan) for name in self.NAMES}
        self._filled = np.zeros(size, dtype=bool)
        self._failed: dict[int, str] = {}

    def put(
        self, rows: Rows, columns: Columns, chosen: npt.NDArray[np.bool_] | None = None
    ) -> None:
        picked = np.flatnonzero(chosen) if chosen is not None else np.arange(rows.size)
        for name in self.NAMES:
            self._data[name][rows] = np.asarray(getattr(columns, name))[picked]
        self._filled[rows] = True
        for place, row in zip(picked, rows, strict=True):
            if int(place) in columns.failed:
                self._failed[int(row)] = columns.failed[int(place)]

    def columns(self, pair: Pair, x: Vector, y: Vector) -> Columns:
        for row in np.flatnonzero(~self._filled):
            self._failed[int(row)] = (
                f"no state within the limits of the model has {pair[0]} = {x[row]:.6g} and "
                f"{pair[1]} = {y[row]:.6g} (SI, on the zero of the backend)"
            )
        return Columns(**self._data, failed=self._failed)
