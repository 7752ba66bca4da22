"""Saturation of a pure fluid by a cubic equation: one curve for all fluids, then Newton.

At equal fugacity the reduced pressure B = b p/(R T) depends on Q = a/(b R T) alone, whatever the
fluid and its alpha function.  ln B as a function of ln Q is smooth up to the critical point and is
kept as a Chebyshev series per equation; it starts Newton on the fugacities close enough for two or
three steps.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from typing import TypeAlias

import numpy as np
import numpy.typing as npt
from numpy.polynomial import Chebyshev

from lostwork import R
from lostwork_plugins.cubic.equation import FORMS, Attraction
from lostwork_plugins.cubic.phase import Substance
from lostwork_plugins.cubic.roots import outer_roots

__all__ = ["Saturated", "Saturation"]

Vector: TypeAlias = npt.NDArray[np.float64]

_ONE = np.ones(1)
_WIDEST = 14.0
_DEGREE = 64
_STEPS = 6
# Nearer to the critical point both roots are one number, and their difference is noise.
NEAREST = 1e-7


@dataclass(frozen=True)
class Saturated:
    """Saturation at T and p: the roots of liquid and vapour; NaN where not found."""

    T: Vector
    p: Vector
    liquid: Vector
    vapour: Vector


class Saturation:
    """Saturation line of one pure fluid up to its critical point (K, Pa)."""

    def __init__(self, substance: Substance, Tc: float, pc: float) -> None:
        self._substance = substance
        self.Tc, self.pc = Tc, pc
        self._curve = _curve(substance.cubic.form.name)
        self._slope = self._curve.deriv()

    def at_temperature(self, T: Vector) -> Saturated:
        """Saturation at temperatures below the critical one."""
        with np.errstate(invalid="ignore"):
            T = np.where(self.Tc * (1.0 - NEAREST) > T, T, np.nan)
        of = self._of(T)
        log_p = self._log_pressure(T, of)
        for _ in range(_STEPS):
            f, low, high, _ = self._mismatch(T, np.exp(log_p), of)
            step = f / (low - high)
            log_p = log_p - step
            if not np.any(np.abs(step) > 1e-15 * np.maximum(1.0, np.abs(log_p))):
                break
        p = np.exp(log_p)
        _, low, high, _ = self._mismatch(T, p, of)
        return Saturated(T, p, low, high)

    def at_pressure(self, p: Vector) -> Saturated:
        """Saturation at pressures below the critical one."""
        with np.errstate(invalid="ignore"):
            p = np.where((p < self.pc) & (p > 0.0), p, np.nan)
        log_p = np.log(p)
        inverse = np.full(p.size, 1.0 / self.Tc)
        # ln p falls almost in a line with 1/T, so Newton in 1/T meets no turn.
        for _ in range(_STEPS + 4):
            T = 1.0 / inverse
            of = self._of(T)
            d_log_Q = of.a1 / of.a - 1.0 / T
            d_log_p = self._slope(np.log(of.a / (of.b * R * T))) * d_log_Q + 1.0 / T
            step = (self._log_pressure(T, of) - log_p) / (-d_log_p * T**2)
            inverse = np.maximum(inverse - step, 1.0 / self.Tc)
            if not np.any(np.abs(step) > 1e-14 * inverse):
                break
        T = 1.0 / inverse
        for _ in range(_STEPS):
            of = self._of(T)
            f, low, high, latent = self._mismatch(T, p, of)
            step = f * R * T**2 / latent
            T = T - step
            if not np.any(np.abs(step) > 2e-16 * T):
                break
        with np.errstate(invalid="ignore"):
            T = np.where(self.Tc * (1.0 - NEAREST) > T, T, np.nan)
        _, low, high, _ = self._mismatch(T, p, self._of(T))
        return Saturated(T, np.where(np.isfinite(T), p, np.nan), low, high)

    def _of(self, T: Vector) -> Attraction:
        return self._substance.cubic.attraction(T, _ONE)

    def _log_pressure(self, T: Vector, of: Attraction) -> Vector:
        log_B = self._curve(np.log(of.a / (of.b * R * T)))
        return np.asarray(log_B + np.log(R * T / of.b), dtype=np.float64)

    def _mismatch(
        self, T: Vector, p: Vector, of: Attraction
    ) -> tuple[Vector, Vector, Vector, Vector]:
        """Log of the ratio of the fugacities, both roots, and the enthalpy of evaporation."""
        with np.errstate(invalid="ignore", divide="ignore", over="ignore"):
            low, high = self._substance.roots(T, p, of)
            # One root only: p has left the region between the spinodals.
            low, high = (np.where(high > low, Z, np.nan) for Z in (low, high))
            liquid = self._substance.cubic.residual(T, p, low, of)
            vapour = self._substance.cubic.residual(T, p, high, of)
            f = ((liquid.h - vapour.h) / T - (liquid.s - vapour.s)) / R
        return np.asarray(f, dtype=np.float64), low, high, np.real(vapour.h - liquid.h)


@cache
def _curve(equation: str) -> Chebyshev:
    """Series of ln B over ln Q from the critical point down to a fourteenth of its R T b/a."""
    form = next(one for one in FORMS.values() if one.name == equation)
    Q_critical = form.omega_a / form.omega_b
    domain = [np.log(Q_critical), np.log(_WIDEST * Q_critical)]
    return Chebyshev.interpolate(
        lambda log_Q: _equal_fugacity(equation, np.exp(log_Q)), _DEGREE, domain=domain
    )


def _equal_fugacity(equation: str, Q: Vector) -> Vector:
    """Solve ln B at equal fugacity by halving between a thin gas and the critical point."""
    form = next(one for one in FORMS.values() if one.name == equation)
    d1, d2 = form.d1, form.d2
    u, w = d1 + d2, d1 * d2
    # The latent heat is below 2 R T Q, so B is above exp(-2 Q) of the critical one.
    low, high = np.log(form.omega_b) - 2.0 * Q, np.full(Q.size, np.log(2.0 * form.omega_b))
    eta_critical = form.omega_b / form.Z_critical
    for _ in range(90):
        middle = 0.5 * (low + high)
        B = np.exp(middle)
        c2 = (u - 1.0) * B - 1.0
        c1 = Q * B + w * B**2 - u * B - u * B**2
        c0 = -(Q * B**2 + w * B**2 + w * B**3)
        liquid, vapour = outer_roots(c2, c1, c0, B)
        logs = [np.log1p((d1 - d2) * B / (Z + d2 * B)) for Z in (liquid, vapour)]
        drive = (liquid - vapour) - np.log((liquid - B) / (vapour - B))
        drive -= Q / (d1 - d2) * (logs[0] - logs[1])
        thin = np.where(vapour > liquid, drive > 0.0, vapour * eta_critical > B)
        low, high = np.where(thin, middle, low), np.where(thin, high, middle)
    return np.asarray(0.5 * (low + high), dtype=np.float64)
