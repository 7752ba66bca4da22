"""Rows of an array step that cannot run: kept as NaN with a reason while the others are solved.

A single point that cannot run raises at once; so does an array in which no row can.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from typing import Any

import numpy as np
import numpy.typing as npt

import lostwork as lw

__all__ = ["Refusals", "choose", "point_or_array"]

_Mask = npt.NDArray[np.bool_]


class Refusals:
    """What a step refuses, row by row, and the states of the rows it does not refuse.

    Parameters
    ----------
    process
        Label of the step, for messages.
    """

    def __init__(self, process: str) -> None:
        self._process = process
        self._refused: list[tuple[_Mask, Callable[[int, tuple[int, ...]], str]]] = []

    def add(self, where: Any, reason: str, **values: lw.Column) -> None:
        """Refuse the rows where `where` holds.

        Parameters
        ----------
        where
            A truth value, or an array of them.
        reason
            Text with the names of `values` in braces, filled in for each row.
        **values
            Numbers that the reason quotes, floats or arrays.

        Raises
        ------
        ProcessError
            A single point is refused, or every row of an array.
        """
        mask = np.asarray(where, dtype=bool)

        def said(row: int, shape: tuple[int, ...]) -> str:
            at_row = {
                name: float(np.ravel(np.broadcast_to(value, shape))[row])
                for name, value in values.items()
            }
            return reason.format(**at_row)

        if mask.size and mask.all():
            raise lw.ProcessError(process=self._process, reason=said(0, mask.shape))
        if mask.any():
            self._refused.append((mask, said))

    def add_rows(self, reasons: Mapping[int, str], shape: tuple[int, ...]) -> None:
        """Refuse rows of `shape` by their flat index, each with a reason of its own."""
        mask = np.zeros(int(np.prod(shape)), dtype=bool)
        mask[list(reasons)] = True
        mask = mask.reshape(shape)

        def said(row: int, wider: tuple[int, ...]) -> str:
            places = np.broadcast_to(np.arange(mask.size).reshape(shape), wider)
            return reasons[int(np.ravel(places)[row])]

        if mask.size and mask.all():
            raise lw.ProcessError(process=self._process, reason=said(0, shape))
        if mask.any():
            self._refused.append((mask, said))

    def state(self, fluid: lw.Fluid, pair: lw.Pair, x: lw.Column, y: lw.Column) -> lw.State:
        """Give the states at `pair`; refused rows and rows without numbers are NaN, with reasons.

        Parameters
        ----------
        fluid
            The fluid.
        pair
            Two properties, as for `Fluid.state_si`.
        x, y
            Their values in SI, floats or arrays that broadcast.
        """
        masks = [mask for mask, _ in self._refused]
        shape = np.broadcast_shapes(np.shape(x), np.shape(y), *(mask.shape for mask in masks))
        if not shape:
            return fluid.state_si(pair, float(x), float(y))
        reasons = self._reasons(shape)
        flat_x = np.ravel(np.broadcast_to(x, shape)).astype(np.float64)
        flat_y = np.ravel(np.broadcast_to(y, shape)).astype(np.float64)
        alive = np.isfinite(flat_x) & np.isfinite(flat_y)
        alive[list(reasons)] = False
        for row in np.flatnonzero(~alive):
            reasons.setdefault(int(row), f"{self._process}: no state of this row upstream")
        return _scattered(fluid, pair, flat_x, flat_y, alive, shape, reasons)

    def mark(self, state: lw.State) -> lw.State:
        """Give `state` with the refused rows turned into NaN with their reasons."""
        shape = np.broadcast_shapes(state.shape, *(mask.shape for mask, _ in self._refused))
        reasons = self._reasons(shape)
        if not reasons:
            return state
        mask = np.zeros(int(np.prod(shape)), dtype=bool)
        mask[list(reasons)] = True
        columns = {}
        for name in _COLUMNS:
            column = np.broadcast_to(getattr(state.si, name), shape).astype(np.float64).ravel()
            column[mask] = np.nan
            columns[name] = _read_only(column.reshape(shape))
        return lw.State(
            state.fluid,
            type(state.si)(**columns),
            _spread(state, shape, range(mask.size)) | reasons,
        )

    def _reasons(self, shape: tuple[int, ...]) -> dict[int, str]:
        reasons: dict[int, str] = {}
        for mask, said in self._refused:
            for row in np.flatnonzero(np.broadcast_to(mask, shape)):
                reasons.setdefault(int(row), f"{self._process}: {said(int(row), shape)}")
        return reasons


def choose(where: Any, first: lw.State, second: lw.State) -> lw.State:
    """Give `first` in the rows where `where` holds, `second` elsewhere; both of one fluid."""
    mask = np.asarray(where, dtype=bool)
    if not mask.shape and not first.shape and not second.shape:
        return first if mask else second
    shape = np.broadcast_shapes(mask.shape, first.shape, second.shape)
    mask = np.broadcast_to(mask, shape)
    columns = {
        name: _read_only(np.where(mask, getattr(first.si, name), getattr(second.si, name)))
        for name in _COLUMNS
    }
    failed = _spread(first, shape, np.flatnonzero(mask)) | _spread(
        second, shape, np.flatnonzero(~mask)
    )
    return lw.State(first.fluid, type(first.si)(**columns), failed)


def point_or_array(value: Any) -> lw.Column:
    """Give a plain float for a single point, so that a small check stays quick."""
    array = np.asarray(value, dtype=np.float64)
    return array if array.shape else float(array)


_COLUMNS = ("T", "p", "v", "h", "s", "quality")


def _spread(state: lw.State, shape: tuple[int, ...], rows: Iterable[int]) -> dict[int, str]:
    """Reasons of `state` at the flat `rows` of a wider shape."""
    if not state.failed:
        return {}
    own = np.arange(int(np.prod(state.shape))).reshape(state.shape)
    places = np.ravel(np.broadcast_to(own, shape))
    return {
        int(row): state.failed[int(places[row])] for row in rows if int(places[row]) in state.failed
    }


def _scattered(
    fluid: lw.Fluid,
    pair: lw.Pair,
    x: npt.NDArray[np.float64],
    y: npt.NDArray[np.float64],
    alive: _Mask,
    shape: tuple[int, ...],
    reasons: dict[int, str],
) -> lw.State:
    """Solve the rows that are alive and put them in their places."""
    rows = np.flatnonzero(alive)
    solved = fluid.state_si(pair, x[rows], y[rows])
    columns = {}
    for name in _COLUMNS:
        column = np.full(x.size, np.nan)
        column[rows] = getattr(solved.si, name)
        columns[name] = _read_only(column.reshape(shape))
    failed = reasons | {int(rows[place]): reason for place, reason in solved.failed.items()}
    return lw.State(fluid, type(solved.si)(**columns), failed)


def _read_only(column: npt.NDArray[np.float64]) -> npt.NDArray[np.float64]:
    column.flags.writeable = False
    return column
