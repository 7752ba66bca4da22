"""The cubic equation of state: p = R T/(v - b) - a(T)/((v + d1 b)(v + d2 b)).

Mixing is van der Waals'.  Peng and Robinson (1976, Ind. Eng. Chem. Fundam. 15, 59) has
d1, d2 = 1 +- sqrt 2; Soave (1972, Chem. Eng. Sci. 27, 1197), on the equation of Redlich and Kwong,
has 1 and 0.  The square root of a of one component is linear in sqrt T, so a of a composition is a
quadratic in sqrt T with three constants.

Everything is molar and takes columns; residual quantities are those of the real fluid less the
ideal gas at the same T and p.  Given complex columns it answers complex ones, which is how the
phase equilibrium gets exact derivatives.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TypeAlias

import numpy as np
import numpy.typing as npt

from lostwork import R
from lostwork_plugins.cubic.parameters import Parameters

__all__ = ["FORMS", "Cubic", "Form", "Residual"]

Vector: TypeAlias = npt.NDArray[np.float64]
Values: TypeAlias = npt.NDArray[np.inexact]


@dataclass(frozen=True)
class Form:
    """What tells one cubic equation from another."""

    name: str
    d1: float
    d2: float
    omega_a: float
    omega_b: float
    Z_critical: float
    slope: tuple[float, float, float]
    """m = slope[0] + slope[1] omega + slope[2] omega^2 of the Soave alpha function."""


_S2 = math.sqrt(2.0)
_C3 = 2.0 ** (1.0 / 3.0) - 1.0
# The root of the critical conditions: eta_c = b/v_c.
_ETA = 1.0 / (1.0 + (4.0 - 2.0 * _S2) ** (1.0 / 3.0) + (4.0 + 2.0 * _S2) ** (1.0 / 3.0))

FORMS = {
    "PR": Form(
        "Peng-Robinson (1976)",
        1.0 + _S2,
        1.0 - _S2,
        (40.0 * _ETA + 8.0) / (49.0 - 37.0 * _ETA),
        _ETA / (3.0 + _ETA),
        1.0 / (3.0 + _ETA),
        (0.37464, 1.54226, -0.26992),
    ),
    "SRK": Form(
        "Soave-Redlich-Kwong (1972)",
        1.0,
        0.0,
        1.0 / (9.0 * _C3),
        _C3 / 3.0,
        1.0 / 3.0,
        (0.480, 1.574, -0.176),
    ),
}


@dataclass(frozen=True)
class Residual:
    """Compressibility factor and residual h (J/mol) and s (J/mol/K) of one phase, at T and p."""

    Z: Values
    h: Values
    s: Values


@dataclass(frozen=True)
class Attraction:
    """a, da/dT, d2a/dT2 and b of one composition at each T."""

    a: Values
    a1: Values
    a2: Values
    b: Values | float


class Cubic:
    """One cubic equation for a list of components."""

    def __init__(self, form: Form, of: Parameters) -> None:
        self.form = form
        m = form.slope[0] + form.slope[1] * of.omega + form.slope[2] * of.omega**2
        root_ac = np.sqrt(form.omega_a * (R * of.Tc) ** 2 / of.pc)
        self.b = form.omega_b * R * of.Tc / of.pc
        self._constant = root_ac * (1.0 + m)
        self._slope = root_ac * m / np.sqrt(of.Tc)
        self._affinity = 1.0 - of.kij
        # Above this T the root of alpha changes sign, and a would rise again with a kink.
        with np.errstate(divide="ignore"):
            self.kink = np.where(m > 0.0, of.Tc * (1.0 + 1.0 / m) ** 2, np.inf)
        self.alpha_slope = m

    def attraction(self, T: Values, x: Values) -> Attraction:
        """Mix a and b: T of shape (n,), x of shape (components,) or (n, components)."""
        root = np.sqrt(T)
        e, f = x * self._constant, x * self._slope
        ke, kf = e @ self._affinity, f @ self._affinity
        ee, ef, ff = (ke * e).sum(-1), (ke * f).sum(-1), (kf * f).sum(-1)
        a = ee - 2.0 * ef * root + ff * T
        return Attraction(a, ff - ef / root, 0.5 * ef / (root * T), x @ self.b)

    def pressure(self, T: Vector, v: Vector, of: Attraction) -> Values:
        """Pressure at T and molar volume, Pa."""
        d1, d2, b = self.form.d1, self.form.d2, of.b
        return np.asarray(R * T / (v - b) - of.a / ((v + d1 * b) * (v + d2 * b)))

    def coefficients(self, T: Values, p: Values, of: Attraction) -> tuple[Values, Values, Values]:
        """Coefficients c2, c1, c0 of Z^3 + c2 Z^2 + c1 Z + c0 = 0."""
        A, B = of.a * p / (R * T) ** 2, of.b * p / (R * T)
        u, w = self.form.d1 + self.form.d2, self.form.d1 * self.form.d2
        c2 = (u - 1.0) * B - 1.0
        c1 = A + w * B**2 - u * B - u * B**2
        c0 = -(A * B + w * B**2 + w * B**3)
        return c2, c1, c0

    def residual(self, T: Values, p: Values, Z: Values, of: Attraction) -> Residual:
        """Residual enthalpy and entropy of the phase with the root Z."""
        log, B = self._log(T, p, Z, of)
        width = self.form.d1 - self.form.d2
        h = R * T * (Z - 1.0) + (T * of.a1 - of.a) / (of.b * width) * log
        s = R * np.log(Z - B) + of.a1 / (of.b * width) * log
        return Residual(Z, np.asarray(h), np.asarray(s))

    def heat_capacity(self, T: Vector, p: Vector, Z: Vector, of: Attraction) -> Values:
        """Residual heat capacity at constant pressure, J/mol/K."""
        d1, d2, b = self.form.d1, self.form.d2, of.b
        log, _ = self._log(T, p, Z, of)
        v = Z * R * T / p
        outer = (v + d1 * b) * (v + d2 * b)
        p_T = R / (v - b) - of.a1 / outer
        p_v = -R * T / (v - b) ** 2 + of.a * (2.0 * v + (d1 + d2) * b) / outer**2
        return np.asarray(T * of.a2 * log / (b * (d1 - d2)) - R - T * p_T**2 / p_v)

    def fugacity(self, T: Values, p: Values, Z: Values, x: Values, of: Attraction) -> Values:
        """Logarithm of the fugacity coefficient of each component, shape (n, components)."""
        log, B = self._log(T, p, Z, of)
        e = self._constant - self._slope * np.sqrt(T)[:, None]
        pull = 2.0 * e * ((x * e) @ self._affinity) / of.a[:, None]
        share = self.b / np.asarray(of.b)[..., None]
        strength = (of.a / (of.b * R * T * (self.form.d1 - self.form.d2)) * log)[:, None]
        first = share * (Z - 1.0)[:, None] - np.log(Z - B)[:, None]
        return np.asarray(first - strength * (pull - share))

    def _log(self, T: Values, p: Values, Z: Values, of: Attraction) -> tuple[Values, Values]:
        """Logarithm of (v + d1 b)/(v + d2 b), exact for a thin gas, and B."""
        B = of.b * p / (R * T)
        d1, d2 = self.form.d1, self.form.d2
        return np.log1p((d1 - d2) * B / (Z + d2 * B)), B
