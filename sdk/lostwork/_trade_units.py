"""Units of the trade that a unit registry lacks or reads as something else.

All of them live at our boundary only; no registry is told of them.  Standard volumes of gas are
amounts of substance, n = p V / (R T) of the ideal gas:

- ``scf`` (``scfm`` per minute, ``scfh``, ``scfd``, ``MMscfd``): one cubic foot at 60 degF and
  14.696 psi, the common practice in the United States; contracts may state another base.
- ``Nm3``: one cubic metre at 0 degC and 101 325 Pa (DIN 1343).
- ``Sm3``: one cubic metre at 15 degC and 101 325 Pa (ISO 13443).
"""

from __future__ import annotations

import difflib
import re
from typing import Final

__all__ = ["MEANT", "OURS", "nearest", "pressure_scale"]

_GAS_CONSTANT: Final = 8.31446261815324  # J/(mol K), exact since the SI of 2019
_FOOT: Final = 0.3048
_PSI: Final = 0.45359237 * 9.80665 / 0.0254**2
_SCF: Final = 14.696 * _PSI * _FOOT**3 / (_GAS_CONSTANT * (60.0 + 459.67) / 1.8)
_NORMAL: Final = 101325.0 / (_GAS_CONSTANT * 273.15)
_STANDARD: Final = 101325.0 / (_GAS_CONSTANT * 288.15)

_CUBIC_FEET_PER_MINUTE: Final = (1.0, (("foot", 3), ("minute", -1)))
_BTU: Final = (("british_thermal_unit", 1),)
_MOLE: Final = (("mole", 1),)
_REFRIGERATION: Final = (1.0, (("refrigeration_ton", 1),))

OURS: Final[dict[str, tuple[float, tuple[tuple[str, int], ...]]]] = {
    "%": (0.01, ()),
    "percent": (0.01, ()),
    "‰": (0.001, ()),
    "btu": (1.0, _BTU),
    "MMBtu": (1e6, _BTU),
    "MMBTU": (1e6, _BTU),
    "MMbtu": (1e6, _BTU),
    "mmbtu": (1e6, _BTU),
    "gpm": (1.0, (("gallon", 1), ("minute", -1))),
    "GPM": (1.0, (("gallon", 1), ("minute", -1))),
    "lbm": (1.0, (("pound", 1),)),
    "lbmol": (453.59237, _MOLE),
    "lbmole": (453.59237, _MOLE),
    "cfm": _CUBIC_FEET_PER_MINUTE,
    "CFM": _CUBIC_FEET_PER_MINUTE,
    "acfm": _CUBIC_FEET_PER_MINUTE,
    "ACFM": _CUBIC_FEET_PER_MINUTE,
    "scf": (_SCF, _MOLE),
    "SCF": (_SCF, _MOLE),
    "scfm": (_SCF, (("mole", 1), ("minute", -1))),
    "SCFM": (_SCF, (("mole", 1), ("minute", -1))),
    "scfh": (_SCF, (("mole", 1), ("hour", -1))),
    "SCFH": (_SCF, (("mole", 1), ("hour", -1))),
    "scfd": (_SCF, (("mole", 1), ("day", -1))),
    "SCFD": (_SCF, (("mole", 1), ("day", -1))),
    "MMscfd": (1e6 * _SCF, (("mole", 1), ("day", -1))),
    "MMSCFD": (1e6 * _SCF, (("mole", 1), ("day", -1))),
    "Nm3": (_NORMAL, _MOLE),
    "Sm3": (_STANDARD, _MOLE),
    "TR": _REFRIGERATION,
    "RT": _REFRIGERATION,
    "℃": (1.0, (("degC", 1),)),
    "°C": (1.0, (("degC", 1),)),
    "°F": (1.0, (("degF", 1),)),
    "°R": (1.0, (("degR", 1),)),
    "Celsius": (1.0, (("degC", 1),)),
    "Fahrenheit": (1.0, (("degF", 1),)),
    "Kelvin": (1.0, (("kelvin", 1),)),
    "Rankine": (1.0, (("degR", 1),)),
}
"""Name -> factor and the registry's own units it stands for."""

MEANT: Final[dict[str, str]] = {
    "C": "C is the coulomb; write degC",
    "F": "F is the farad; write degF",
    "k": "k is the Boltzmann constant; write K, or put the prefix before a unit",
    "R": "R is the gas constant; write degR",
    "c": "c is the speed of light",
    "T": "T is the tesla; write t for the metric ton",
    "MT": "MT is the megatesla; write t for the metric ton",
    "Nm": "Nm is read as another unit; write N*m",
    "ton": "ton is a mass, the short ton; write t for the metric ton, TR for refrigeration",
    "MBtu": "MBtu means a thousand to some and a million to others; write kBtu or MMBtu",
    "MBTU": "MBTU means a thousand to some and a million to others; write kBtu or MMBtu",
    "M": "M is mole per litre; write Mega in front of a unit, or mol",
    "h": "h is the hour",
    "G": "G is the gauss",
    "deg": "deg is the degree of arc; write degC or degF",
    "°": "° is the degree of arc; write degC or degF",
    "coulomb": "C is the coulomb; write degC",
    "farad": "F is the farad; write degF",
    "boltzmann_constant": "k is the Boltzmann constant; write K",
    "molar_gas_constant": "R is the gas constant; write degR",
    "centifermi": "cfm is the centifermi to this registry; write ft^3/min",
}
"""What a name is read as, for those that people mean otherwise."""

_COMMON: Final = (
    *("K", "degC", "degF", "degR", "delta_degC", "delta_degF"),
    *("Pa", "kPa", "MPa", "mbar", "bar", "bara", "psi", "psia", "atm", "mmHg", "inHg", "torr"),
    *("kg", "g", "lb", "t", "ton", "kg/s", "kg/h", "lb/h", "mol", "kmol", "lbmol", "kg/m^3"),
    *("m", "mm", "cm", "km", "ft", "inch", "m^2", "m^3", "liter", "ft^3", "gallon", "gpm", "cfm"),
    *("scfm", "Nm3", "Sm3", "s", "min", "h", "hour", "day", "m/s", "kcal", "cal"),
    *("J", "kJ", "MJ", "kWh", "Btu", "MMBtu", "W", "kW", "MW", "hp", "TR", "percent", "Wh"),
)

_PRESSURE_SCALE: Final = re.compile(
    r"(?P<base>[mµμ]?bar|psi|[khMG]?Pa|atm|at|inHg|mmHg|inH2O|mmH2O|kgf/cm\^?2)"
    r"(?:(?P<letter>[ag])|[ _]?\((?P<braced>a|g|abs|gauge)\)|[ _](?P<apart>a|g|abs|gauge))"
)


def pressure_scale(unit: str) -> tuple[str, bool] | None:
    """Part "bar(g)" into ("bar", True for gauge); None for any other unit."""
    found = _PRESSURE_SCALE.fullmatch(unit)
    if found is None:
        return None
    scale = found["letter"] or found["braced"] or found["apart"]
    return found["base"], scale.startswith("g")


def nearest(name: str) -> tuple[str, ...]:
    """Name the common units spelt most like this one."""
    same = [unit for unit in _COMMON if unit.lower() == name.lower()]
    close = difflib.get_close_matches(name, _COMMON, n=3, cutoff=0.6)
    return tuple(dict.fromkeys([*same, *close]))[:3]
