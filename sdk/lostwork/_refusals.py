"""Refusals of a value: which error, with the field, the value, what was expected and a way out."""

from __future__ import annotations

import math
import re
from collections.abc import Sequence
from typing import Any, Final, TypeVar

from lostwork import _dimensions
from lostwork._dimensions import PRESSURE, TEMPERATURE, Dimension
from lostwork._registries import Kind, Reading
from lostwork._trade_units import MEANT
from lostwork._units import shortened
from lostwork.errors import (
    GaugePressure,
    MissingUnit,
    NotAbsolute,
    NotFinite,
    QuantityError,
    TemperatureKind,
    WrongDimension,
)

__all__ = ["completed", "impossible", "offset_of", "refused", "wrong_dimension"]

Refusal = TypeVar("Refusal", bound=QuantityError)

_STANDARD_BAROMETER: Final = 101325.0
_MASS_PER_AREA: Final = _dimensions.signature_of({"[mass]": 1, "[length]": -2})
_PRODUCT_AFTER_SLASH: Final = re.compile(r"/\s*[^\W\d][^/()]*[\s*·.][^\W\d]")


def refused(
    kind: type[Refusal], dimensions: Sequence[Dimension], field: str, value: Any, hint: str = ""
) -> Refusal:
    """Make the error of this kind for a field that takes any of these dimensions."""
    return kind(
        field=field,
        value=shortened(value),
        expected=" or ".join(dimension.name for dimension in dimensions),
        example=" or ".join(dimension.example for dimension in dimensions),
        hint=hint,
    )


def completed(
    error: QuantityError, dimensions: Sequence[Dimension], field: str, value: Any
) -> QuantityError:
    """Give an error that knows only its unit the field and what was expected there."""
    return refused(type(error), dimensions, field, value, error.hint)


def impossible(
    si: float, dimension: Dimension, field: str, value: Any, hint: str = ""
) -> QuantityError:
    """Make the error for a number that is not finite or below the least value."""
    if not math.isfinite(si):
        return refused(NotFinite, (dimension,), field, value, hint)
    hint = ". ".join(part for part in (hint, dimension.hint) if part)
    return refused(NotAbsolute, (dimension,), field, value, hint)


def wrong_dimension(
    reading: Reading, dimensions: Sequence[Dimension], field: str, value: Any
) -> QuantityError:
    """Make the error for a unit of another dimension, and say what may have been meant."""
    if not reading.names:
        return refused(MissingUnit, dimensions, field, value)
    hints = [MEANT[name] for name in reading.names if name in MEANT]
    if reading.signature == _MASS_PER_AREA and PRESSURE.signature in (
        dimension.signature for dimension in dimensions
    ):
        hints.append("Pressure is force per area; write kgf or lbf")
    if isinstance(value, str) and _PRODUCT_AFTER_SLASH.search(value):
        hints.append("A product after / needs parentheses, as in J/(kg*K)")
    if not hints:
        hints += [f"This is {name}" for name in _read_as(reading)]
    return refused(WrongDimension, dimensions, field, value, "; ".join(hints))


def _read_as(reading: Reading) -> list[str]:
    known = (getattr(_dimensions, name) for name in _dimensions.__all__)
    return [
        dimension.name
        for dimension in known
        if isinstance(dimension, Dimension) and dimension.signature == reading.signature
    ][:1]


def offset_of(
    reading: Reading,
    dimension: Dimension,
    field: str,
    value: Any,
    barometer: float | None,
    number: float | None = None,
) -> float:
    """Check that a unit suits a dimension; give what is added to the scaled number.

    Raises
    ------
    WrongDimension, MissingUnit
        The unit is of another dimension, or there is none.
    TemperatureKind, GaugePressure
        A difference was given for an absolute value or the other way round, or a gauge pressure
        without a barometer.
    """
    if reading.signature != dimension.signature:
        raise wrong_dimension(reading, (dimension,), field, value)
    if reading.kind is Kind.GAUGE:
        if dimension.kind == "difference":
            hint = "A pressure difference has no zero of its own; leave the mark of the gauge off"
            raise refused(GaugePressure, (dimension,), field, value, hint)
        if barometer is None:
            hint = _absolute_form(reading, number)
            raise refused(GaugePressure, (dimension,), field, value, hint)
        return barometer
    temperature = dimension.signature == TEMPERATURE.signature
    refusal = TemperatureKind if temperature else WrongDimension
    if reading.kind is Kind.POINT and dimension.kind == "difference":
        raise refused(refusal, (dimension,), field, value, _difference_form(reading, number))
    if reading.kind is Kind.DIFFERENCE and dimension.kind == "absolute":
        unit = reading.names[0].removeprefix("delta_")
        raise refused(refusal, (dimension,), field, value, f"For a temperature write {unit} or K")
    return reading.offset


def _absolute_form(reading: Reading, number: float | None) -> str:
    if number is None:
        return "Give the absolute pressure: the reading plus the barometer"
    base = reading.names[0]
    plain = re.sub(r"(?:[ _]?\(?(?:g|gauge)\)?)$", "", base)
    absolute = number + _STANDARD_BAROMETER / reading.scale
    return (
        f'Give the absolute pressure; at a standard barometer of 101325 Pa it is "{absolute:.6g} '
        f'{plain}", at yours it differs'
    )


def _difference_form(reading: Reading, number: float | None) -> str:
    unit = reading.names[0]
    if number is None or reading.signature != TEMPERATURE.signature:
        return f"For a difference write delta_{unit} or K"
    short = {"degree_Celsius": "degC", "degree_Fahrenheit": "degF", "°C": "degC", "°F": "degF"}
    unit = short.get(unit, unit)
    return f'For a difference write "{number:.6g} delta_{unit}" or "{number * reading.scale:.6g} K"'
