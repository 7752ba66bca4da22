"""The ideal-gas part of a fluid, taken from the very object that gives its states.

`smolar_idealgas` of CoolProp is at (T, rho), not at 1 bar, and the process-wide reference state may
be moved by anyone at any time.  So the limit is read off an object at a density where nothing of
the real gas is left, and its entropy is brought to 1 bar by the gas law:

    h_ig(T) = h(T, rho -> 0)        s_ig(T, p0) = s(T, rho) + R ln(rho R T / p0)
"""

from __future__ import annotations

import math
from typing import Any

from CoolProp.CoolProp import (
    AbstractState,
    DmolarT_INPUTS,
    iphase_gas,
)

from lostwork import REFERENCE_PRESSURE, REFERENCE_TEMPERATURE

__all__ = ["IdealPart", "ideal_gas"]

# mol/m3; the second virial term is below 1e-9 of RT here, and ln(rho) costs no digits.
_TRACE = 1e-9


def ideal_gas(state: Any, T: float) -> tuple[float, float]:
    """Give h (J/mol) and s (J/mol/K) as an ideal gas at T (K) and 1 bar, on the zero of `state`.

    Leaves `state` at a trace density, with no phase imposed.
    """
    state.specify_phase(iphase_gas)
    try:
        state.update(DmolarT_INPUTS, _TRACE, T)
        R = state.gas_constant()
        correction = R * math.log(_TRACE * R * T / REFERENCE_PRESSURE)
        return float(state.hmolar()), float(state.smolar() + correction)
    finally:
        state.unspecify_phase()


class IdealPart:
    """Ideal gas of one component of a mixture, zero at 298.15 K and 1 bar; for one thread."""

    __slots__ = ("R", "_h", "_s", "_state", "molar_mass")

    R: float
    """Gas constant of the component's own equation, J/mol/K."""
    molar_mass: float
    """kg/mol."""

    def __init__(self, fluid: str) -> None:
        self._state: Any = AbstractState("HEOS", fluid)
        self.R = float(self._state.gas_constant())
        self.molar_mass = float(self._state.molar_mass())
        self._h, self._s = ideal_gas(self._state, REFERENCE_TEMPERATURE)

    def at(self, T: float) -> tuple[float, float]:
        """Give h (J/mol) and s (J/mol/K) at T (K) and 1 bar."""
        h, s = ideal_gas(self._state, T)
        return h - self._h, s - self._s
