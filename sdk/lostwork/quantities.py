"""The unit boundary: the one place where values with units become SI floats, and back.

A value may be a pint quantity of any registry, a text ("8 bar", "25 degC", "0.24 BTU/(lb*degF)"),
or an array or a list of these.  A quantity is converted by its own registry and taken over as a
number; a name in a text is looked up in the application registry, and no text is ever evaluated.

Conventions
-----------
- "bar" and "psi" without a mark are absolute; "bara", "bar(a)", "psia" say so, "barg", "bar(g)",
  "psig" are above the barometer and taken only where one is given.
- "scf" and its rates, "Nm3" and "Sm3" are amounts of substance: a cubic foot at 60 degF and
  14.696 psi, a cubic metre at 0 degC (DIN 1343) or 15 degC (ISO 13443) and 101 325 Pa.
- In a compound unit degC and degF mean a difference: "kJ/(kg*degC)".
- A unit is a product of names with whole exponents, read from left to right: "kJ/kg/K" and
  "kJ/(kg K)" are one unit, "kJ/kg K" is another.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any, Final

import numpy as np
import pint
from numpy.typing import NDArray
from pint.facets.plain import PlainQuantity

from lostwork._dimensions import (
    AMOUNT,
    AMOUNT_RATE,
    AREA,
    CONDUCTANCE,
    DENSITY,
    ENERGY,
    ENTROPY,
    ENTROPY_RATE,
    FRACTION,
    LENGTH,
    MASS,
    MASS_RATE,
    MOLAR_DENSITY,
    MOLAR_ENERGY,
    MOLAR_ENTROPY,
    MOLAR_MASS,
    MOLAR_VOLUME,
    POWER,
    PRESSURE,
    PRESSURE_DIFFERENCE,
    SPECIFIC_ENERGY,
    SPECIFIC_ENTROPY,
    SPECIFIC_VOLUME,
    TEMPERATURE,
    TEMPERATURE_DIFFERENCE,
    TIME,
    VELOCITY,
    VOLUME,
    VOLUME_RATE,
    Dimension,
)
from lostwork._numbers import Numbers, is_number, possible, to_numbers
from lostwork._reading import DEEPEST, choose, read_quantity, read_text
from lostwork._refusals import impossible, offset_of, refused, wrong_dimension
from lostwork._registries import Kind, Reading, application_book, book_of
from lostwork._units import LONGEST, shortened
from lostwork.errors import GaugePressure, MissingUnit, NotAbsolute, QuantityError

__all__ = [
    "AMOUNT",
    "AMOUNT_RATE",
    "AREA",
    "CONDUCTANCE",
    "DENSITY",
    "ENERGY",
    "ENTROPY",
    "ENTROPY_RATE",
    "FRACTION",
    "LENGTH",
    "MASS",
    "MASS_RATE",
    "MOLAR_DENSITY",
    "MOLAR_ENERGY",
    "MOLAR_ENTROPY",
    "MOLAR_MASS",
    "MOLAR_VOLUME",
    "POWER",
    "PRESSURE",
    "PRESSURE_DIFFERENCE",
    "SPECIFIC_ENERGY",
    "SPECIFIC_ENTROPY",
    "SPECIFIC_VOLUME",
    "TEMPERATURE",
    "TEMPERATURE_DIFFERENCE",
    "TIME",
    "VELOCITY",
    "VOLUME",
    "VOLUME_RATE",
    "Dimension",
    "in_unit",
    "quantity",
    "to_si",
    "to_si_any",
]

_PLAIN: Final = Kind.PLAIN


def to_si(
    value: Any, dimension: Dimension, field: str, *, barometer: float | None = None
) -> Numbers:
    """Take a value over as SI numbers.

    Parameters
    ----------
    value : quantity of any registry, text, array or list of these
        What the caller gave; for a pure number also bare numbers, "0.85" and "85 %".
    dimension : Dimension
        What the field expects.
    field : str
        Name of the field, for messages.
    barometer : float, optional
        Absolute pressure of the surrounding air, Pa; without it a gauge pressure is refused.

    Returns
    -------
    float or float64 array of the shape given, in `dimension.unit`; an array is always a new one

    Raises
    ------
    QuantityError
        One of its children, named after the cause; carries field, value, expected and example.
    """
    if barometer is not None:
        barometer = _checked_barometer(barometer)
    if type(value) is str:
        number = application_book().numbers.get((value, dimension, barometer))
        if number is not None:
            return number
        return _from_text(value, dimension, field, barometer)
    if isinstance(value, PlainQuantity):
        return _from_quantity(value, dimension, field, barometer)
    if type(value) is float and not dimension.signature and possible(value, dimension):
        return value
    return _from_other(value, dimension, field, barometer, 0)


def to_si_any(
    value: Any, dimensions: Sequence[Dimension], field: str, *, barometer: float | None = None
) -> tuple[Numbers, Dimension]:
    """Take a value over in the first of several dimensions that its unit has.

    Parameters and errors are those of `to_si`; a list is of one dimension throughout.

    Returns
    -------
    the SI numbers, and the dimension they are of
    """
    if barometer is not None:
        barometer = _checked_barometer(barometer)
    chosen = choose(value, dimensions, field, barometer)
    return to_si(value, chosen, field, barometer=barometer), chosen


def quantity(magnitude: Any, unit: str) -> pint.Quantity[Any]:
    """Make a quantity of the application registry; an array is copied.

    Parameters
    ----------
    magnitude : float or array
        Numbers in `unit`.
    unit : str
        A unit as `to_si` reads it, "" for a pure number.

    Raises
    ------
    UnknownUnit
        The unit is not known.
    """
    book = application_book()
    reading = _unit(unit)
    if reading.kind is Kind.GAUGE:
        raise GaugePressure("unit", repr(unit), hint="A quantity keeps the absolute pressure")
    if type(magnitude) is not float:
        magnitude = np.array(magnitude, dtype=np.float64)
        if magnitude.ndim == 0:
            magnitude = float(magnitude)
    if reading.factor != 1.0:
        magnitude = magnitude * reading.factor
    return book.quantity(magnitude, reading.container)


def in_unit(magnitude_si: Any, dimension: Dimension, unit: str) -> Numbers:
    """Say SI numbers in another unit, as a report needs them.

    Parameters
    ----------
    magnitude_si : float or array
        Numbers in `dimension.unit`.
    dimension : Dimension
        What they mean: a temperature difference in "degC" takes no offset.
    unit : str
        The unit wanted.

    Returns
    -------
    float or float64 array, in `unit`

    Raises
    ------
    UnknownUnit, WrongDimension, TemperatureKind, GaugePressure
        The unit is not known, or does not suit the dimension.
    """
    reading = _unit(unit)
    if reading.kind is not Kind.POINT or dimension.kind != "difference":
        offset_of(reading, dimension, "unit", unit, None)
    elif reading.signature != dimension.signature:
        raise wrong_dimension(reading, (dimension,), "unit", unit)
    offset = 0.0 if dimension.kind == "difference" else reading.offset
    if type(magnitude_si) is float:
        return (magnitude_si - offset) / reading.scale
    numbers = np.asarray(magnitude_si, dtype=np.float64)
    told: NDArray[np.float64] = np.asarray((numbers - offset) / reading.scale)
    return float(told) if told.ndim == 0 else told


def _unit(unit: str) -> Reading:
    if not isinstance(unit, str):
        raise QuantityError("unit", shortened(unit), expected="the name of a unit")
    try:
        return application_book().text(unit)
    except QuantityError as error:
        error.field = "unit"
        raise


# --- the ways in ----------------------------------------------------------------------


def _from_text(text: str, dimension: Dimension, field: str, barometer: float | None) -> float:
    reading, number = read_text(text, (dimension,), field)
    offset = offset_of(reading, dimension, field, text, barometer, number)
    si = number * reading.scale + offset
    if not possible(si, dimension):
        raise impossible(si, dimension, field, text)
    if len(text) <= LONGEST:
        application_book().remember((text, dimension, barometer), si)
    return si


def _from_quantity(
    value: PlainQuantity[Any], dimension: Dimension, field: str, barometer: float | None
) -> Numbers:
    reading = book_of(value).containers.get(value._units)
    if reading is None:
        reading = read_quantity(value, (dimension,), field)
    magnitude = value._magnitude
    offset = reading.offset
    if reading.kind is not _PLAIN or reading.signature != dimension.signature:
        number = float(magnitude) if isinstance(magnitude, float | int) else None
        offset = offset_of(reading, dimension, field, value, barometer, number)
    if type(magnitude) is float:
        si = magnitude * reading.scale + offset
        if not possible(si, dimension):
            raise impossible(si, dimension, field, value)
        return si
    return to_numbers(magnitude, reading.scale, offset, dimension, field, value)


def _from_other(
    value: Any, dimension: Dimension, field: str, barometer: float | None, depth: int
) -> Numbers:
    if depth > DEEPEST:
        raise refused(QuantityError, (dimension,), field, "a list", "It is nested too deeply")
    if isinstance(value, str):
        return to_si(str(value), dimension, field, barometer=barometer)
    if hasattr(value, "__array__") and not isinstance(value, np.ndarray | np.generic):
        value = np.asarray(value)
    if isinstance(value, np.ndarray) and value.dtype.kind in "OUT":
        value = value.tolist()
        if not isinstance(value, list):
            return _from_part(value, dimension, field, barometer, depth + 1)
    if isinstance(value, list | tuple):
        return _from_list(value, dimension, field, barometer, depth)
    if not is_number(value):
        raise refused(QuantityError, (dimension,), field, value)
    if dimension.signature:
        raise refused(MissingUnit, (dimension,), field, value)
    return to_numbers(value, 1.0, 0.0, dimension, field, value)


def _from_list(
    values: Sequence[Any], dimension: Dimension, field: str, barometer: float | None, depth: int
) -> NDArray[np.float64]:
    parts = [
        _from_part(part, dimension, f"{field}[{index}]", barometer, depth + 1)
        for index, part in enumerate(values)
    ]
    if len({np.shape(part) for part in parts}) > 1:
        hint = "Its rows are of different lengths"
        raise refused(QuantityError, (dimension,), field, "a list", hint)
    return np.array(parts, dtype=np.float64)


def _from_part(
    value: Any, dimension: Dimension, field: str, barometer: float | None, depth: int
) -> Numbers:
    if isinstance(value, str | PlainQuantity):
        return to_si(value, dimension, field, barometer=barometer)
    return _from_other(value, dimension, field, barometer, depth)


def _checked_barometer(barometer: float) -> float:
    if not is_number(barometer) or not possible(float(barometer), PRESSURE):
        raise NotAbsolute(
            "barometer", shortened(barometer), "an absolute pressure in Pa", "101325.0"
        )
    return float(barometer)
