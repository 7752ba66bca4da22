"""One phase of a fluid: the cubic equation on top of the ideal gas, at given composition.

Zero of h and s: every component by itself as an ideal gas at 298.15 K and 1 bar.  Molar here;
columns of T and p of shape (n,), compositions of shape (components,) or (n, components).
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TypeAlias

import numpy as np
import numpy.typing as npt

from lostwork import REFERENCE_PRESSURE, R
from lostwork_plugins.cubic.equation import Attraction, Cubic
from lostwork_plugins.cubic.heat_capacity import IdealGas
from lostwork_plugins.cubic.roots import outer_roots, refined

__all__ = ["Molar", "Substance"]

Vector: TypeAlias = npt.NDArray[np.float64]
Values: TypeAlias = npt.NDArray[np.inexact]


@dataclass(frozen=True)
class Molar:
    """Molar volume (m3/mol), enthalpy (J/mol) and entropy (J/mol/K) of one phase."""

    v: Values
    h: Values
    s: Values


@dataclass(frozen=True)
class Substance:
    """The equation, the ideal gas and the molar masses (kg/mol) of a list of components."""

    cubic: Cubic
    ideal: IdealGas
    molar_mass: Vector

    def roots(self, T: Vector, p: Vector, of: Attraction) -> tuple[Vector, Vector]:
        """Root of the liquid and of the vapour; equal where the equation has one only."""
        c2, c1, c0 = self.cubic.coefficients(T, p, of)
        B = np.real(of.b * p / (R * T))
        return outer_roots(np.real(c2), np.real(c1), np.real(c0), B)

    def carried(self, T: Values, p: Values, Z: Vector, of: Attraction) -> Values:
        """Root at complex T, p and composition, from the root `Z` at their real parts."""
        return refined(Z, *self.cubic.coefficients(T, p, of))

    def stable_root(self, T: Vector, p: Vector, of: Attraction) -> tuple[Vector, Vector, Vector]:
        """Root of the least Gibbs energy, and both outer roots."""
        low, high = self.roots(T, p, of)
        liquid, vapour = (self.cubic.residual(T, p, Z, of) for Z in (low, high))
        lower = (liquid.h - T * liquid.s) < (vapour.h - T * vapour.s)
        return np.where(lower, low, high), low, high

    def molar(self, T: Values, p: Values, x: Values, Z: Values, of: Attraction) -> Molar:
        """Volume, enthalpy and entropy of the phase with the root `Z`."""
        residual = self.cubic.residual(T, p, Z, of)
        h = self._ideal_enthalpy(T, x) + residual.h
        s = self._ideal_entropy(T, p, x) + residual.s
        return Molar(Z * R * T / p, h, s)

    def named(
        self, name: str, T: Values, p: Values, x: Values, Z: Values, of: Attraction
    ) -> Values:
        """Molar "h" or "s" alone, which a solver asks for many times."""
        residual = self.cubic.residual(T, p, Z, of)
        if name == "h":
            return np.asarray(self._ideal_enthalpy(T, x) + residual.h)
        return np.asarray(self._ideal_entropy(T, p, x) + residual.s)

    def _ideal_enthalpy(self, T: Values, x: Values) -> Values:
        return np.asarray((x * self.ideal.enthalpy(T)).sum(-1))

    def _ideal_entropy(self, T: Values, p: Values, x: Values) -> Values:
        mixing = (x * np.log(np.where(x == 0.0, 1.0, x))).sum(-1)
        of_components = (x * self.ideal.entropy(T)).sum(-1)
        return np.asarray(of_components - R * (np.log(p / REFERENCE_PRESSURE) + mixing))

    def heat_capacity(self, T: Vector, p: Vector, x: Vector, Z: Vector, of: Attraction) -> Vector:
        """Heat capacity at constant pressure, J/mol/K."""
        ideal = (x * self.ideal.heat_capacity(T)).sum(-1)
        return np.asarray(ideal + self.cubic.heat_capacity(T, p, Z, of), dtype=np.float64)
