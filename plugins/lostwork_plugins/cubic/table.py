"""The columns of a call while they are being filled: what is good, what has failed and why."""

from __future__ import annotations

from collections.abc import Callable
from typing import TypeAlias

import numpy as np
import numpy.typing as npt

from lostwork import Column, Columns, Limits, Pair, PairRefused

__all__ = ["Table", "answer"]

Vector: TypeAlias = npt.NDArray[np.float64]
Rows: TypeAlias = npt.NDArray[np.intp]
Mask: TypeAlias = npt.NDArray[np.bool_]

_NAMES = ("T", "p", "v", "h", "s", "quality")


class Table:
    """Columns of n rows, all NaN to begin with; a row that is left so must have a reason."""

    def __init__(self, size: int) -> None:
        self._data = {name: np.full(size, np.nan) for name in _NAMES}
        self._reasons: dict[int, str] = {}
        self.open = np.ones(size, dtype=bool)

    @property
    def rows(self) -> Rows:
        """Rows that are neither filled nor failed."""
        return np.flatnonzero(self.open)

    def put(
        self,
        rows: Rows,
        T: Vector,
        p: Vector,
        v: Vector,
        h: Vector,
        s: Vector,
        quality: Vector | float = np.nan,
    ) -> None:
        """Fill rows; one whose numbers are not finite is left open."""
        values = [np.broadcast_to(c, rows.shape) for c in (T, p, v, h, s, quality)]
        good = np.isfinite(values[:5]).all(axis=0)
        for name, value in zip(_NAMES, values, strict=True):
            self._data[name][rows[good]] = value[good]
        self.open[rows[good]] = False

    def fail(self, rows: Rows, reason: str | Callable[[int], str]) -> None:
        """Fail rows that are still open; `reason` may be told from the place within `rows`."""
        for place, row in enumerate(rows.tolist()):
            if self.open[row]:
                self._reasons[row] = reason if isinstance(reason, str) else reason(place)
                self.open[row] = False

    def withdraw(self, rows: Rows, reason: Callable[[int], str]) -> None:
        """Take filled rows back, for the reason of each."""
        for name in _NAMES:
            self._data[name][rows] = np.nan
        self.open[rows] = True
        self.fail(rows, reason)

    def within(self, limits: Limits) -> None:
        """Withdraw filled rows whose T or p the limits exclude."""
        T, p = self._data["T"], self._data["p"]
        with np.errstate(invalid="ignore"):
            # A solver stops within round-off of the bound it was given.
            outside = (limits.T_max * (1 + 1e-12) < T) | (p > limits.p_max * (1 + 1e-12))
            outside |= (limits.T_min * (1 - 1e-12) > T) | (p <= limits.p_min)
        rows = np.flatnonzero(outside)
        at_T, at_p = T[rows].tolist(), p[rows].tolist()
        self.withdraw(rows, lambda place: _beyond(at_T[place], at_p[place], limits))

    def columns(self) -> Columns:
        """Give the columns; every row has numbers or a reason."""
        self.fail(self.rows, "the equation gave no state")
        return Columns(**self._data, failed=dict(sorted(self._reasons.items())))


def answer(
    native: frozenset[Pair],
    limits: Limits,
    fill: Callable[[Pair, Table, Vector, Vector], None],
    pair: Pair,
    x: Column,
    y: Column,
) -> Columns:
    """Answer a call of `PropertyModel.columns`: check it, let `fill` fill the table, give its form.

    `fill` sees whole columns and only treats the rows that are open.
    """
    if pair not in native:
        shown = ", ".join(f"{a} with {b}" for a, b in sorted(native))
        raise PairRefused(
            given=pair, reason="this model does not solve for it", instead=f"It solves {shown}"
        )
    scalar = not isinstance(x, np.ndarray) and not isinstance(y, np.ndarray)
    first, second = np.broadcast_arrays(
        *(np.atleast_1d(np.asarray(c, dtype=np.float64)) for c in (x, y))
    )
    table = Table(first.size)
    _check(table, pair, first, second, limits)
    if table.open.any():
        fill(pair, table, first, second)
    table.within(limits)
    columns = table.columns()
    if not scalar:
        return columns
    values = {name: float(getattr(columns, name)[0]) for name in _NAMES}
    return Columns(**values, failed=columns.failed)


def _check(table: Table, pair: Pair, x: Vector, y: Vector, limits: Limits) -> None:
    finite = np.isfinite(x) & np.isfinite(y)
    table.fail(np.flatnonzero(~finite), "NaN or infinity was given")
    for name, column in zip(pair, (x, y), strict=True):
        if name == "T":
            bad = (column < limits.T_min) | (column > limits.T_max)
        elif name == "p":
            bad = (column <= limits.p_min) | (column > limits.p_max)
        elif name == "quality":
            bad = (column < 0.0) | (column > 1.0)
        elif name == "v":
            bad = column <= 0.0
        else:
            continue
        rows = np.flatnonzero(bad & finite)
        reasons = [_outside(name, value, limits) for value in column[rows].tolist()]
        table.fail(rows, reasons.__getitem__)


def _outside(name: str, value: float, limits: Limits) -> str:
    if name == "T":
        return (
            f"T = {value:.6g} K is outside {limits.T_min:.6g} to {limits.T_max:.6g} K, the range "
            f"of this model ({limits.source})"
        )
    if name == "p":
        return f"p = {value:.6g} Pa is outside the range above 0 up to {limits.p_max:.6g} Pa"
    if name == "quality":
        return f"quality = {value:.6g} is outside 0 to 1"
    return f"v = {value:.6g} m3/kg is not positive"


def _beyond(T: float, p: float, limits: Limits) -> str:
    if not limits.T_min <= T <= limits.T_max:
        return _outside("T", T, limits)
    return _outside("p", p, limits)
