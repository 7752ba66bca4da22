"""One phase of a mixture: its density at T and p, its fugacities, and h and s rebuilt on the pures.

CoolProp scales the ideal part of a mixture by the critical points of its components and that of a
pure fluid by its reducing point, so its mixture entropy is off against the pures (helium by
87 J/kg/K).  Only the residual part is taken from the mixture:

    h = sum x h_ig(T) + h_residual
    s = sum x s_ig(T, p0) - R sum x ln x - R ln(rho R T / p0) + s_residual

R is the mean of the gas constants of the components' own equations, weighted by amount, and scales
the residual part and the pressure too, so that a mixture passes into its components without a step
(CoolProp takes 8.314462618 for every mixture and 8.31451 for pure nitrogen).

The departure function of carbon dioxide with water does not vanish with the density (CoolProp 8.0:
335 J/kg and 0.2 J/kg/K of an equal mixture at 400 K are left in a vacuum).  Where a mixture has
such a rest, it is taken off h, s and the fugacities; the pressure has none of it.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from CoolProp.CoolProp import (
    AbstractState,
    DmolarT_INPUTS,
    iDmolar,
    iP,
    iphase_gas,
    iT,
)

from lostwork import REFERENCE_PRESSURE
from lostwork_plugins.coolprop.cubic_estimate import CubicEstimate
from lostwork_plugins.coolprop.ideal import IdealPart

__all__ = ["GAS", "LIQUID", "Phase", "PhaseEquation"]

GAS = "gas"
LIQUID = "liquid"

_STEPS = 60
_SMALLEST_PHI = 1e-26
_CLOSE = 1e-13
# mol/m3; the virial terms are below 1e-12 here.
_VACUUM = 1e-9
_NO_REST = 1e-11
# Good roots lie within a few ten per cent of the cubic's (water: 20 %); of the bad ones most are
# 2.6 times off and more, and the rest have fugacities that no fluid has (carbon dioxide with
# nitrogen at 275 K, 20 bar: a factor e^345).
_ROOT_BAND = 1.6


@dataclass(frozen=True, slots=True)
class Phase:
    """One phase at T, p: composition, density (mol/m3), logarithms of the fugacity coefficients."""

    x: tuple[float, ...]
    rho: float
    ln_phi: tuple[float, ...]


class PhaseEquation:
    """Mixture equation of state of one overall composition, of one thread.

    Parameters
    ----------
    fluids
        CoolProp's names of the components.
    z
        Overall mole fractions, by which the gas constants are weighted.
    """

    def __init__(self, fluids: tuple[str, ...], z: tuple[float, ...]) -> None:
        self._state: Any = AbstractState("HEOS", "&".join(fluids))
        self._state.set_mole_fractions(list(z))
        self._state.specify_phase(iphase_gas)  # no search for a phase at a given density
        self._ideal = tuple(IdealPart(fluid) for fluid in fluids)
        self.molar_masses = tuple(part.molar_mass for part in self._ideal)
        self.R = sum(x * part.R for x, part in zip(z, self._ideal, strict=True))
        self._scale = self.R / float(self._state.gas_constant())
        pures = [AbstractState("HEOS", fluid) for fluid in fluids]
        self.critical_temperatures = tuple(float(pure.T_critical()) for pure in pures)
        self.cubic = CubicEstimate(
            self.critical_temperatures,
            [float(pure.p_critical()) for pure in pures],
            [float(pure.acentric_factor()) for pure in pures],
        )
        self._has_rest = self._rest_of_vacuum(z)
        self._ideal_at: tuple[float, tuple[tuple[float, float], ...]] = (math.nan, ())

    def phase(
        self, T: float, p: float, x: Sequence[float], kind: str, guess: float | None = None
    ) -> Phase | None:
        """Phase of a kind at T (K) and p (Pa), or ``None`` where the equation has no such root."""
        rho = self._density(T, p, x, kind, guess)
        if rho is None:
            return None
        state = self._state
        # The fugacity hardly feels the round-off of a liquid's density, but p does; so it is the
        # fugacity over the p that was asked for.
        rounding = math.log(state.p() * self._scale / p)
        coefficients = [float(state.fugacity_coefficient(i)) for i in range(len(x))]
        if not _SMALLEST_PHI < min(coefficients) <= max(coefficients) < 1 / _SMALLEST_PHI:
            return None
        ln_phi = tuple(math.log(phi) + rounding for phi in coefficients)
        if self._has_rest:
            state.update(DmolarT_INPUTS, _VACUUM, T)
            ln_phi = tuple(
                value - math.log(state.fugacity_coefficient(i)) for i, value in enumerate(ln_phi)
            )
        return Phase(tuple(x), rho, ln_phi)

    def molar_mass(self, x: Sequence[float]) -> float:
        """Molar mass of a composition, kg/mol."""
        return sum(xi * M for xi, M in zip(x, self.molar_masses, strict=True))

    def enthalpy_entropy(self, T: float, phase: Phase) -> tuple[float, float]:
        """Give h (J/mol) and s (J/mol/K) of a phase.

        Zero is each component as an ideal gas at 298.15 K and 1 bar.
        """
        state = self._state
        state.set_mole_fractions(list(phase.x))
        state.update(DmolarT_INPUTS, phase.rho, T)
        h_residual, s_residual = state.hmolar_residual(), state.smolar_residual()
        if self._has_rest:
            state.update(DmolarT_INPUTS, _VACUUM, T)
            h_residual -= state.hmolar_residual()
            s_residual -= state.smolar_residual()
        h, s = self._scale * h_residual, self._scale * s_residual
        for xi, (h_ig, s_ig) in zip(phase.x, self._ideal_parts(T), strict=True):
            h += xi * h_ig
            s += xi * s_ig
            if xi > 0.0:
                s -= self.R * xi * math.log(xi)
        s -= self.R * math.log(phase.rho * self.R * T / REFERENCE_PRESSURE)
        return h, s

    def state_and_slopes(
        self, T: float, rho: float, x: Sequence[float]
    ) -> tuple[float, float, float, float, float, float]:
        """Give p (Pa), h (J/mol), s (J/mol/K), (dp/drho)_T, (dp/dT)_rho and c_v (J/mol/K).

        At T (K) and density (mol/m3), whatever the phases there may be.  The slopes serve a search:
        c_v has the ideal part of the mixture equation.

        Raises
        ------
        ValueError, RuntimeError
            CoolProp has no such state.
        """
        h, s = self.enthalpy_entropy(T, Phase(tuple(x), rho, ()))
        state = self._state
        if self._has_rest:
            state.update(DmolarT_INPUTS, rho, T)
        scale = self._scale
        return (
            scale * float(state.p()),
            h,
            s,
            scale * float(state.first_partial_deriv(iP, iDmolar, iT)),
            scale * float(state.first_partial_deriv(iP, iT, iDmolar)),
            scale * float(state.cvmolar()),
        )

    def _rest_of_vacuum(self, z: Sequence[float]) -> bool:
        state = self._state
        state.set_mole_fractions(list(z))
        state.update(DmolarT_INPUTS, _VACUUM, 400.0)
        return abs(float(state.alphar())) > _NO_REST

    def _ideal_parts(self, T: float) -> tuple[tuple[float, float], ...]:
        if self._ideal_at[0] != T:
            self._ideal_at = (T, tuple(part.at(T) for part in self._ideal))
        return self._ideal_at[1]

    def _density(
        self, T: float, p: float, x: Sequence[float], kind: str, guess: float | None
    ) -> float | None:
        """Density root of a kind by Newton steps from the cubic's root, or from a guess near by."""
        roots = self.cubic.densities(T, p, x)
        alike = roots[0] if kind == GAS else roots[-1]
        low, high = alike / _ROOT_BAND, alike * _ROOT_BAND
        state = self._state
        state.set_mole_fractions(list(x))
        for first in (guess, 1.15 * alike if kind == LIQUID else 0.85 * alike):
            if first is None or not low <= first <= high:
                continue
            rho = _newton(state, T, p / self._scale, first, rising=kind == GAS)
            if rho is not None and low <= rho <= high and state.cvmolar() > 0.0:
                return rho
        return None


def _newton(state: Any, T: float, p: float, rho: float, *, rising: bool) -> float | None:
    """Density at which the equation gives p, by Newton steps from `rho`.

    A liquid is sought from its dense side and a gas from its thin side, and never across a
    spinodal, so that a spurious root between them is not met.
    """
    previous = math.inf
    stable = False
    for _ in range(_STEPS):
        try:
            state.update(DmolarT_INPUTS, rho, T)
            misfit = state.p() - p
            slope = state.first_partial_deriv(iP, iDmolar, iT)
        except (ValueError, RuntimeError):
            return None
        if slope <= 0.0:
            if stable:
                return None
            rho *= 0.8 if rising else 1.1
            continue
        stable = True
        step = -misfit / slope
        if abs(step) <= _CLOSE * rho or (abs(step) >= previous and abs(step) < 1e-11 * rho):
            return rho
        previous = abs(step)
        rho += min(max(step, -0.3 * rho), 0.5 * rho)
    return None
