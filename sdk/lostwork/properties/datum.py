"""The datum of h and s, and the shift that brings a model onto the common one.

The common datum is the ideal gas at 298.15 K and 1 bar: its enthalpy is the enthalpy of formation
and its entropy the absolute entropy.  A component without formation data stands there at zero
instead, which serves as long as the component is neither made nor consumed; a balance checks that.
A model without an ideal-gas limit, and values handed in by a host program, keep a datum of their
own.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from lostwork.properties.backend import FluidSpec, PropertyModel, R
from lostwork.properties.formation import formation

__all__ = ["COMMON", "Datum", "Shift", "shift_to_common"]


@dataclass(frozen=True)
class Datum:
    """Where h and s of a state are counted from.

    `label` is empty for the common datum; otherwise it names the source whose zero is kept.
    """

    label: str = ""

    @property
    def is_common(self) -> bool:
        """Whether states of other backends and compositions may be compared."""
        return not self.label

    def __str__(self) -> str:
        return self.label or "ideal gas, 298.15 K, 1 bar"


COMMON = Datum()


@dataclass(frozen=True)
class Shift:
    """Datum of a model's states, and what is added to its own h (J/kg) and s (J/kg/K)."""

    datum: Datum
    h: float
    s: float


def shift_to_common(spec: FluidSpec, model: PropertyModel, label: str) -> Shift:
    """Shift that brings `model` onto the common datum, or none where it has no ideal-gas limit."""
    limit = model.ideal_gas_limit()
    if limit is None:
        return Shift(Datum(label), 0.0, 0.0)
    h_native, s_native = limit
    h_molar = s_molar = 0.0
    for component, x in zip(spec.components, spec.mole_fractions, strict=True):
        data = formation(component)
        if data is not None:
            h_molar += x * data.enthalpy
            s_molar += x * data.entropy
        s_molar -= R * x * math.log(x)
    M = spec.molar_mass
    return Shift(COMMON, h_molar / M - h_native, s_molar / M - s_native)
