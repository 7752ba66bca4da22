"""Types for the fields of a process: unit-checked quantities.

A field takes what the unit boundary takes (a quantity of any registry, "8 bar", an array with
units) and holds a quantity of the application registry in SI; `Process.si` gives plain numbers.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Annotated, Any

import numpy as np
import pint
from pydantic import BeforeValidator, ValidationInfo

from lostwork.errors import OutOfLimits
from lostwork.quantities import (
    AREA,
    CONDUCTANCE,
    ENERGY,
    FRACTION,
    LENGTH,
    MASS,
    MASS_RATE,
    POWER,
    PRESSURE,
    PRESSURE_DIFFERENCE,
    SPECIFIC_ENERGY,
    TEMPERATURE,
    TEMPERATURE_DIFFERENCE,
    TIME,
    VELOCITY,
    VOLUME,
    Dimension,
    quantity,
    to_si,
    to_si_any,
)

__all__ = [
    "Area",
    "Conductance",
    "Duty",
    "Efficiency",
    "Energy",
    "Fraction",
    "Length",
    "Mass",
    "MassRate",
    "Power",
    "Pressure",
    "PressureDrop",
    "Ratio",
    "SpecificEnergy",
    "Takes",
    "Temperature",
    "TemperatureDifference",
    "Time",
    "Velocity",
    "Volume",
]


@dataclass(frozen=True)
class Takes:
    """What a field takes, for documentation and for messages."""

    dimension: Dimension


def _reader(dimension: Dimension) -> Callable[[Any, ValidationInfo], pint.Quantity[Any]]:
    def read(value: Any, info: ValidationInfo) -> pint.Quantity[Any]:
        return quantity(to_si(value, dimension, info.field_name or "field"), dimension.unit)

    return read


def _bounded(
    low: float, high: float, words: str, *, open_low: bool = False
) -> Callable[[Any, ValidationInfo], pint.Quantity[Any]]:
    def read(value: Any, info: ValidationInfo) -> pint.Quantity[Any]:
        number = to_si(value, FRACTION, info.field_name or "field")
        array = np.asarray(number)
        below = array <= low if open_low else array < low
        if np.any(below | (array > high)):
            raise OutOfLimits(fluid=info.field_name or "field", reason=f"{words}; got {value}")
        return quantity(number, "")

    return read


def _duty(value: Any, info: ValidationInfo) -> pint.Quantity[Any]:
    number, dimension = to_si_any(value, (POWER, ENERGY), info.field_name or "field")
    return quantity(number, dimension.unit)


Quantity = pint.Quantity[Any]

Temperature = Annotated[Quantity, BeforeValidator(_reader(TEMPERATURE)), Takes(TEMPERATURE)]
TemperatureDifference = Annotated[
    Quantity, BeforeValidator(_reader(TEMPERATURE_DIFFERENCE)), Takes(TEMPERATURE_DIFFERENCE)
]
Pressure = Annotated[Quantity, BeforeValidator(_reader(PRESSURE)), Takes(PRESSURE)]
PressureDrop = Annotated[
    Quantity, BeforeValidator(_reader(PRESSURE_DIFFERENCE)), Takes(PRESSURE_DIFFERENCE)
]
Power = Annotated[Quantity, BeforeValidator(_reader(POWER)), Takes(POWER)]
Energy = Annotated[Quantity, BeforeValidator(_reader(ENERGY)), Takes(ENERGY)]
Duty = Annotated[Quantity, BeforeValidator(_duty), Takes(POWER)]
"""A power, or an energy for a batch."""
SpecificEnergy = Annotated[
    Quantity, BeforeValidator(_reader(SPECIFIC_ENERGY)), Takes(SPECIFIC_ENERGY)
]
Mass = Annotated[Quantity, BeforeValidator(_reader(MASS)), Takes(MASS)]
MassRate = Annotated[Quantity, BeforeValidator(_reader(MASS_RATE)), Takes(MASS_RATE)]
Volume = Annotated[Quantity, BeforeValidator(_reader(VOLUME)), Takes(VOLUME)]
Velocity = Annotated[Quantity, BeforeValidator(_reader(VELOCITY)), Takes(VELOCITY)]
Length = Annotated[Quantity, BeforeValidator(_reader(LENGTH)), Takes(LENGTH)]
Area = Annotated[Quantity, BeforeValidator(_reader(AREA)), Takes(AREA)]
Time = Annotated[Quantity, BeforeValidator(_reader(TIME)), Takes(TIME)]
Conductance = Annotated[Quantity, BeforeValidator(_reader(CONDUCTANCE)), Takes(CONDUCTANCE)]
Ratio = Annotated[Quantity, BeforeValidator(_reader(FRACTION)), Takes(FRACTION)]
"""Any pure number."""
Fraction = Annotated[
    Quantity, BeforeValidator(_bounded(0.0, 1.0, "a fraction from 0 to 1")), Takes(FRACTION)
]
Efficiency = Annotated[
    Quantity,
    BeforeValidator(_bounded(0.0, 1.0, "an efficiency above 0 and up to 1", open_low=True)),
    Takes(FRACTION),
]
