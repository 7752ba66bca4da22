"""Choices that are quick on plain floats and go row by row on arrays.

A call of numpy on one float costs more than the arithmetic of a whole small balance.
"""

from __future__ import annotations

import math
from typing import Any

import numpy as np

from lostwork.properties.backend import Column

__all__ = ["anywhere", "larger", "ratio", "size", "smaller"]


def anywhere(condition: Any) -> bool:
    """Whether a comparison holds in any row."""
    return bool(condition.any()) if isinstance(condition, np.ndarray) else bool(condition)


def size(value: Column) -> Column:
    """Give the value without its sign."""
    return (
        -value
        if isinstance(value, float) and value < 0.0
        else np.abs(value)
        if isinstance(value, np.ndarray)
        else value
    )


def larger(a: Column, b: Column) -> Column:
    """Give the larger of the two, row by row; NaN where either is."""
    if isinstance(a, np.ndarray) or isinstance(b, np.ndarray):
        return np.maximum(a, b)
    return a if a >= b or math.isnan(a) else b


def smaller(a: Column, b: Column) -> Column:
    """Give the smaller of the two, row by row; NaN where either is."""
    return -larger(-a, -b)


def ratio(part: Column, whole: Column) -> Column:
    """Share of a part in its whole, row by row; nothing is no share of nothing: 0 where both are 0.

    A whole of zero has no parts: it is a sum of sizes.
    """
    if isinstance(part, np.ndarray) or isinstance(whole, np.ndarray):
        empty = np.equal(whole, 0.0)
        return np.where(empty, 0.0, part / np.where(empty, 1.0, whole))
    return part / whole if whole != 0.0 else 0.0
