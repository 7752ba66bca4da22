"""Bare numbers and arrays become SI floats, and are checked for what is physically possible."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
from numpy.typing import NDArray

from lostwork._dimensions import Dimension
from lostwork._refusals import impossible, refused
from lostwork.errors import NotFinite, QuantityError

__all__ = ["Numbers", "is_number", "possible", "to_numbers"]

Numbers = float | NDArray[np.float64]


def possible(si: float, dimension: Dimension) -> bool:
    """Tell whether a number is finite and not below the least value of its dimension."""
    low = dimension.minimum
    if low is None:
        return -math.inf < si < math.inf
    return low < si < math.inf or (si == low and not dimension.strict)


def is_number(value: Any) -> bool:
    """Tell whether a value is a real number or an array of them (truth values are not)."""
    if isinstance(value, np.ndarray):
        return value.dtype.kind in "fiu"
    if isinstance(value, bool | np.bool_ | str | bytes | complex | np.complexfloating):
        return False
    return hasattr(value, "__float__") and not hasattr(value, "__len__")


def to_numbers(
    magnitude: Any, scale: float, offset: float, dimension: Dimension, field: str, value: Any
) -> Numbers:
    """Scale and shift a magnitude to SI; refuse what is not real, finite and possible.

    `value` is what the caller gave, for the message.
    """
    if isinstance(magnitude, np.ma.MaskedArray):
        magnitude = np.ma.filled(magnitude.astype(np.float64), np.nan)
    numbers = np.asarray(magnitude)
    if numbers.dtype.kind == "O":
        numbers = _plain_numbers(numbers, dimension, field, value)
    if numbers.dtype.kind not in "fiu":
        raise refused(QuantityError, (dimension,), field, value, "Only real numbers are taken")
    if numbers.ndim == 0:
        si = float(numbers) * scale + offset
        if not possible(si, dimension):
            raise impossible(si, dimension, field, value)
        return si
    return _scaled(numbers, scale, offset, dimension, field)


def _plain_numbers(
    objects: NDArray[Any], dimension: Dimension, field: str, value: Any
) -> NDArray[np.float64]:
    """Take over Decimal, Fraction and whole numbers beyond 64 bits."""
    flat = objects.ravel().tolist()
    if not all(is_number(number) for number in flat):
        raise refused(QuantityError, (dimension,), field, value, "Only real numbers are taken")
    try:
        numbers = [float(number) for number in flat]
    except OverflowError:
        raise refused(NotFinite, (dimension,), field, value) from None
    except (TypeError, ValueError) as cause:
        hint = "Only real numbers are taken"
        raise refused(QuantityError, (dimension,), field, value, hint) from cause
    return np.array(numbers, dtype=np.float64).reshape(objects.shape)


def _scaled(
    numbers: NDArray[Any], scale: float, offset: float, dimension: Dimension, field: str
) -> NDArray[np.float64]:
    si = np.empty(numbers.shape, dtype=np.float64)
    with np.errstate(over="ignore", invalid="ignore"):
        np.multiply(numbers, scale, out=si, casting="same_kind")
        if offset:
            si += offset
        # NaN and infinity show in the least or in the largest.
        if not si.size or (math.isfinite(si.max()) and possible(float(si.min()), dimension)):
            return si
    _find_fault(si, numbers, dimension, field)
    return si


def _find_fault(
    si: NDArray[np.float64], given: NDArray[Any], dimension: Dimension, field: str
) -> None:
    finite = np.isfinite(si)
    low = dimension.minimum
    if low is None:
        sound = finite
    else:
        with np.errstate(invalid="ignore"):
            sound = finite & ((si > low) if dimension.strict else (si >= low))
    faults = np.argwhere(~sound)
    first = tuple(int(i) for i in faults[0])
    where = f"{field}[{', '.join(map(str, first))}]"
    count = f"{len(faults)} of {si.size} values are refused" if len(faults) > 1 else ""
    raise impossible(float(si[first]), dimension, where, given[first], count)
