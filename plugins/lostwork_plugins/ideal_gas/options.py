"""The options of the backend: what the caller assumes of the gas instead of a correlation."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from lostwork import (
    FRACTION,
    MOLAR_ENTROPY,
    MOLAR_MASS,
    SPECIFIC_ENTROPY,
    Dimension,
    R,
    to_si,
    to_si_any,
)
from lostwork_plugins.ideal_gas.correlations import CORRELATIONS
from lostwork_plugins.ideal_gas.refusal import NoIdealGasModel

__all__ = ["Assumptions", "read_options"]

_KNOWN = ("correlation", "cp", "gamma", "molar_mass")
_EXCLUSIVE = ("correlation", "cp", "gamma")

# An override is there for the rounding of a textbook; more is a slip of the unit or of the gas.
_MOLAR_MASS_WITHIN = 0.05


@dataclass(frozen=True)
class Assumptions:
    """What the options say: molar mass (kg/mol), constant cp (J/kg/K) or none, correlation or none.

    `given` is the option cp or gamma in the caller's words.
    """

    molar_mass: float
    cp: float | None = None
    correlation: str | None = None
    given: str = ""
    own_molar_mass: bool = False


def read_options(fluid: str, molar_mass: float, options: Mapping[str, Any]) -> Assumptions:
    """Check the options and take them over in SI.

    Parameters
    ----------
    fluid
        Name, for messages.
    molar_mass
        That of the composition, kg/mol.
    options
        As given to `IdealGasBackend.open`.

    Raises
    ------
    NoIdealGasModel
        An option is unknown, contradicts another, or is no property of an ideal gas.
    QuantityError
        A value cannot be read.
    """
    unknown = [name for name in options if name not in _KNOWN]
    if unknown:
        raise NoIdealGasModel(
            fluid,
            f"there is no option {', '.join(repr(name) for name in unknown)}",
            f"Options are {', '.join(_KNOWN)}",
        )
    given = {name: value for name, value in options.items() if value is not None}
    rivals = [name for name in _EXCLUSIVE if name in given]
    if len(rivals) > 1:
        raise NoIdealGasModel(
            fluid,
            f"{' and '.join(rivals)} each fix the heat capacity",
            "Give one of them",
        )
    own = "molar_mass" in given
    mass = _molar_mass(fluid, molar_mass, given["molar_mass"]) if own else molar_mass
    if "cp" in given:
        cp = _heat_capacity(fluid, mass, given["cp"])
        return Assumptions(mass, cp=cp, given=f"cp = {given['cp']}", own_molar_mass=own)
    if "gamma" in given:
        cp = _from_gamma(fluid, mass, given["gamma"])
        return Assumptions(mass, cp=cp, given=f"gamma = {given['gamma']}", own_molar_mass=own)
    correlation = given.get("correlation")
    return Assumptions(mass, correlation=_correlation(fluid, correlation), own_molar_mass=own)


def _heat_capacity(fluid: str, molar_mass: float, value: Any) -> float:
    number, dimension = to_si_any(value, (SPECIFIC_ENTROPY, MOLAR_ENTROPY), "cp")
    cp = _one(fluid, number, "cp")
    if dimension is MOLAR_ENTROPY:
        cp /= molar_mass
    if not cp > R / molar_mass:
        raise NoIdealGasModel(
            fluid,
            f"cp = {value} is not above the gas constant {R / molar_mass:.6g} J/kg/K, "
            "so cv would not be positive",
        )
    return cp


def _from_gamma(fluid: str, molar_mass: float, value: Any) -> float:
    gamma = _single(fluid, value, FRACTION, "gamma")
    if not gamma > 1.0:
        raise NoIdealGasModel(fluid, f"gamma = {value} is not above 1")
    return R / molar_mass * gamma / (gamma - 1.0)


def _molar_mass(fluid: str, own: float, value: Any) -> float:
    mass = _single(fluid, value, MOLAR_MASS, "molar_mass")
    if abs(mass / own - 1.0) > _MOLAR_MASS_WITHIN:
        raise NoIdealGasModel(
            fluid,
            f"molar_mass = {value} is more than {_MOLAR_MASS_WITHIN:.0%} away from the "
            f"{own * 1e3:.6g} g/mol of the composition",
            "Give the composition that has this molar mass",
        )
    return mass


def _correlation(fluid: str, value: Any) -> str | None:
    if value is not None and value not in CORRELATIONS:
        raise NoIdealGasModel(
            fluid,
            f"there is no correlation {value!r}",
            f"Correlations are {', '.join(CORRELATIONS)}",
        )
    return None if value is None else str(value)


def _single(fluid: str, value: Any, dimension: Dimension, field: str) -> float:
    return _one(fluid, to_si(value, dimension, field), field)


def _one(fluid: str, number: Any, field: str) -> float:
    if not isinstance(number, float) or not math.isfinite(number):
        raise NoIdealGasModel(fluid, f"{field} must be one number, the same for every state")
    return number
