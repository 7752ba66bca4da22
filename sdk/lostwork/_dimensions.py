"""The dimensions that a value at the unit boundary may have.

A dimension knows its SI unit, how it reads in a sentence, an example for messages, and the least
value that is physically possible.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any, Final, Literal

from lostwork._units import parse_unit
from lostwork.errors import QuantityError

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
    "Signature",
    "signature_of",
]

Signature = tuple[tuple[str, float], ...]
"""Base dimensions with their exponents, sorted by name; () for a pure number."""

_M, _L, _T = "[mass]", "[length]", "[time]"
_SI: Final[dict[str, dict[str, int]]] = {
    "kg": {_M: 1},
    "m": {_L: 1},
    "s": {_T: 1},
    "K": {"[temperature]": 1},
    "mol": {"[substance]": 1},
    "A": {"[current]": 1},
    "cd": {"[luminosity]": 1},
    "N": {_M: 1, _L: 1, _T: -2},
    "Pa": {_M: 1, _L: -1, _T: -2},
    "J": {_M: 1, _L: 2, _T: -2},
    "W": {_M: 1, _L: 2, _T: -3},
}


def signature_of(exponents: dict[str, Any]) -> Signature:
    """Put base dimensions into the one order in which they are compared."""
    return tuple(sorted((name, float(power)) for name, power in exponents.items() if power))


def _signature_of_si(unit: str) -> Signature:
    total: dict[str, int] = {}
    for name, exponent in parse_unit(unit):
        if name not in _SI:
            raise QuantityError(
                field="unit of a dimension", value=repr(unit), expected=f"of {', '.join(_SI)} only"
            )
        for base, power in _SI[name].items():
            total[base] = total.get(base, 0) + power * exponent
    return signature_of(total)


@dataclass(frozen=True, eq=False)
class Dimension:
    """What a field expects; one object per meaning, compared by identity.

    `name` reads in a sentence ("an absolute pressure"); `unit` is a coherent SI unit; a value is
    at least `minimum`, and above it if `strict`.  `kind` tells an absolute value on a scale with
    a physical zero from a difference of two; `hint` is said where the minimum is not reached.
    """

    name: str
    unit: str
    example: str
    minimum: float | None = None
    strict: bool = False
    kind: Literal["plain", "absolute", "difference"] = "plain"
    hint: str = ""
    signature: Signature = field(init=False, repr=False)

    def __post_init__(self) -> None:
        object.__setattr__(self, "signature", _signature_of_si(self.unit))

    def __reduce__(self) -> str | tuple[Any, ...]:
        # The constants below are pickled and copied by name, so that they stay one object.
        for name in __all__:
            if globals()[name] is self:
                return name
        parts = (self.name, self.unit, self.example, self.minimum, self.strict, self.kind)
        return Dimension, (*parts, self.hint)


TEMPERATURE = Dimension(
    "a temperature",
    "K",
    '"25 degC"',
    minimum=0.0,
    strict=True,
    kind="absolute",
    hint="Absolute zero is 0 K, -273.15 degC, -459.67 degF, and is itself out of reach",
)
TEMPERATURE_DIFFERENCE = Dimension("a temperature difference", "K", '"10 K"', kind="difference")
PRESSURE = Dimension(
    "an absolute pressure",
    "Pa",
    '"8 bar"',
    minimum=0.0,
    strict=True,
    kind="absolute",
    hint="A vacuum is never exact: give the absolute pressure that remains, such as 1 Pa; "
    "a reading below the atmosphere is a gauge pressure",
)
PRESSURE_DIFFERENCE = Dimension("a pressure difference", "Pa", '"0.2 bar"', kind="difference")
SPECIFIC_VOLUME = Dimension("a specific volume", "m^3/kg", '"0.8 m^3/kg"', 0.0, strict=True)
DENSITY = Dimension("a density", "kg/m^3", '"1.2 kg/m^3"', 0.0, strict=True)
SPECIFIC_ENERGY = Dimension("a specific energy", "J/kg", '"250 kJ/kg"')
SPECIFIC_ENTROPY = Dimension("a specific entropy or heat capacity", "J/(kg*K)", '"1.1 kJ/(kg*K)"')
MOLAR_ENERGY = Dimension("a molar energy", "J/mol", '"12 kJ/mol"')
MOLAR_ENTROPY = Dimension("a molar entropy or heat capacity", "J/(mol*K)", '"29 J/(mol*K)"')
MOLAR_VOLUME = Dimension("a molar volume", "m^3/mol", '"0.024 m^3/mol"', 0.0, strict=True)
MOLAR_DENSITY = Dimension("a molar density", "mol/m^3", '"40 mol/m^3"', 0.0, strict=True)
MASS = Dimension("a mass", "kg", '"3 kg"', 0.0)
MASS_RATE = Dimension("a mass flow rate", "kg/s", '"2 kg/s"')
AMOUNT = Dimension("an amount of substance", "mol", '"5 kmol"', 0.0)
AMOUNT_RATE = Dimension("an amount flow rate", "mol/s", '"20 kmol/h"')
VOLUME = Dimension("a volume", "m^3", '"0.5 m^3"', 0.0, strict=True)
VOLUME_RATE = Dimension("a volume flow rate", "m^3/s", '"100 m^3/h"')
ENERGY = Dimension("an energy", "J", '"30 kJ"')
POWER = Dimension("a power", "W", '"30 kW"')
ENTROPY = Dimension("an entropy or heat capacity", "J/K", '"10 kJ/K"')
ENTROPY_RATE = Dimension("an entropy flow rate", "W/K", '"100 W/K"')
VELOCITY = Dimension("a velocity", "m/s", '"20 m/s"')
LENGTH = Dimension("a length", "m", '"2 m"')
AREA = Dimension("an area", "m^2", '"0.01 m^2"', 0.0)
TIME = Dimension("a time", "s", '"10 min"')
FRACTION = Dimension("a pure number", "", '0.85 or "85 %"')
CONDUCTANCE = Dimension("a thermal conductance", "W/K", '"500 W/K"', 0.0)
MOLAR_MASS = Dimension("a molar mass", "kg/mol", '"28 g/mol"', 0.0, strict=True)
