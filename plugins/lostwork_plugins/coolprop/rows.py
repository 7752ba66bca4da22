"""Columns built row by row: a row is six numbers, or the reason why there is none."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import TypeAlias

import numpy as np

from lostwork import Column, Columns

__all__ = ["NaN", "Row", "RowSolver", "columns_of"]

Row: TypeAlias = "tuple[float, float, float, float, float, float] | str"
"""T (K), p (Pa), v (m3/kg), h (J/kg), s (J/kg/K), quality; or a reason."""

RowSolver: TypeAlias = Callable[[float, float], Row]

NaN = math.nan
_NO_ROW = (NaN, NaN, NaN, NaN, NaN, NaN)


def columns_of(solve: RowSolver, x: Column, y: Column) -> Columns:
    """Columns of `solve` over two floats, or over two one-dimensional arrays of one length."""
    if not isinstance(x, np.ndarray) and not isinstance(y, np.ndarray):
        row = solve(x, y)
        if isinstance(row, str):
            return Columns(*_NO_ROW, failed={0: row})
        return Columns(*row)
    x, y = np.broadcast_arrays(x, y)
    failed: dict[int, str] = {}
    rows = []
    for index, (a, b) in enumerate(zip(x.tolist(), y.tolist(), strict=True)):
        row = solve(a, b)
        if isinstance(row, str):
            failed[index] = row
            row = _NO_ROW
        rows.append(row)
    table = np.array(rows, dtype=np.float64).reshape(-1, 6)
    T, p, v, h, s, quality = (column.copy() for column in table.T)
    return Columns(T, p, v, h, s, quality, failed)
