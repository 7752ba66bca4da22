"""Which unit a value is in, and which of several dimensions that makes it."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any, Final

import numpy as np
from pint.facets.plain import PlainQuantity

from lostwork._dimensions import Dimension
from lostwork._numbers import is_number
from lostwork._refusals import completed, refused, wrong_dimension
from lostwork._registries import Reading, application_book, book_of
from lostwork._units import split_number
from lostwork.errors import QuantityError

__all__ = ["DEEPEST", "choose", "read_quantity", "read_text"]

DEEPEST: Final = 32
"""Deepest nesting of lists that is followed."""


def read_text(text: str, dimensions: Sequence[Dimension], field: str) -> tuple[Reading, float]:
    """Read a text; the errors name the field and what it takes."""
    try:
        number, unit = split_number(text)
        return application_book().text(unit), number
    except QuantityError as error:
        raise completed(error, dimensions, field, text) from error.__cause__


def read_quantity(
    value: PlainQuantity[Any], dimensions: Sequence[Dimension], field: str
) -> Reading:
    """Read the units of a quantity; the errors name the field and what it takes."""
    try:
        return book_of(value).container(value._units)
    except QuantityError as error:
        raise completed(error, dimensions, field, value) from error.__cause__


def choose(
    value: Any, dimensions: Sequence[Dimension], field: str, barometer: float | None
) -> Dimension:
    """Give the first dimension that the unit of a value, or of its first element, has."""
    if type(value) is str:
        known = application_book().numbers
        for dimension in dimensions:
            if (value, dimension, barometer) in known:
                return dimension
    first = _first(value)
    if isinstance(first, list):
        if first:
            raise refused(QuantityError, dimensions, field, "a list", "It is nested too deeply")
        return dimensions[0]  # nothing in it, so of any dimension
    reading = _reading(first, dimensions, field)
    for dimension in dimensions:
        if dimension.signature == reading.signature:
            return dimension
    raise wrong_dimension(reading, dimensions, field, value)


def _first(value: Any) -> Any:
    for _ in range(DEEPEST):
        if isinstance(value, np.ndarray) and value.dtype.kind in "OUT":
            value = value.tolist()
        if isinstance(value, tuple):
            value = list(value)
        if not isinstance(value, list) or not value:
            break
        value = value[0]
    return value


def _reading(value: Any, dimensions: Sequence[Dimension], field: str) -> Reading:
    if isinstance(value, str):
        return read_text(value, dimensions, field)[0]
    if isinstance(value, PlainQuantity):
        return read_quantity(value, dimensions, field)
    if is_number(value):
        return application_book().text("")
    raise refused(QuantityError, dimensions, field, value)
