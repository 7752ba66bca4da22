"""Rows of a mixture for each pair, from its phases; the workbench of one thread."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence

import numpy as np
import numpy.typing as npt
from CoolProp.CoolProp import (
    AbstractState,
)

from lostwork import Pair
from lostwork_plugins.coolprop.bounds import Bounds
from lostwork_plugins.coolprop.equilibrium import (
    Equilibrium,
    NoEquilibrium,
    TwoPhases,
    equilibrium,
    likeliest_phase,
)
from lostwork_plugins.coolprop.inverse import root_from
from lostwork_plugins.coolprop.phase import Phase, PhaseEquation
from lostwork_plugins.coolprop.phase_map import PhaseMap
from lostwork_plugins.coolprop.rows import NaN, Row
from lostwork_plugins.coolprop.saturation import saturated

__all__ = ["MixtureStates"]

_POSITION = {"h": 3, "s": 4}
# dh = T ds: 1e-7 J/kg is 3e-10 J/kg/K.
_TOLERANCE = {"h": 1e-7, "s": 1e-10}
_QUALITY_TOLERANCE = 1e-13
_ON_LINE = 1e-6

Numbers = tuple[float, float, float, float, float, float]


class MixtureStates:
    """States of one mixture in one thread.

    Parameters
    ----------
    fluids, z
        CoolProp's names and the mole fractions.
    bounds
        Range of the mixture.
    molar_mass
        kg/mol.
    """

    def __init__(
        self,
        fluids: tuple[str, ...],
        z: tuple[float, ...],
        bounds: Bounds,
        molar_mass: float,
    ) -> None:
        self._z = z
        self._bounds = bounds
        self.molar_mass = molar_mass
        self._equation = PhaseEquation(fluids, z)
        self.phase_map = PhaseMap(self._equation, z, bounds)
        self._native = AbstractState("HEOS", "&".join(fluids))
        self._native.set_mole_fractions(list(z))
        self._ratios: Sequence[float] | None = None
        self._last_T = 300.0

    def row(self, pair: Pair, x: float, y: float) -> Row:
        """Row of one state, or the reason why there is none."""
        reason = self._reason_against(pair, x, y)
        if reason is not None:
            return reason
        self._ratios = None
        try:
            if pair == ("T", "p"):
                return self._at(x, y)
            found = (
                self._at_quality(pair[0], x, y)
                if pair[1] == "quality"
                else self._at_pressure(x, pair[1], y)
            )
        except NoEquilibrium as failure:
            return str(failure)
        except (ValueError, RuntimeError, ArithmeticError) as error:
            return f"the equation gave no state: {error}"
        T, p = found[:2]
        return self._bounds.reason_against_T(T) or self._bounds.reason_against_p(p) or found

    def evaluated(
        self, T: npt.NDArray[np.float64], rho: npt.NDArray[np.float64]
    ) -> npt.NDArray[np.float64]:
        """Evaluate the feed as one phase at T (K) and density (kg/m3), see `Equation`."""
        equation, z, M = self._equation, self._z, self.molar_mass
        rows = []
        for T_row, rho_row in zip(T.tolist(), rho.tolist(), strict=True):
            try:
                rows.append(equation.state_and_slopes(T_row, rho_row / M, z))
            except (ValueError, RuntimeError):
                rows.append((NaN,) * 6)
        # Per mole into per kilogram; (dp/dT)_rho has no amount in it.
        return np.array(rows) / (1.0, M, M, M, 1.0, M)

    def single_phase_density(self, T: float, p: float) -> float | None:
        """Density (kg/m3) at T (K) and p (Pa), ``None`` where it is not surely one phase."""
        try:
            phases = equilibrium(self._equation, T, p, self._z)
        except (NoEquilibrium, ValueError, RuntimeError, ArithmeticError):
            return None
        return phases.rho * self.molar_mass if isinstance(phases, Phase) else None

    def split(self, T: float, p: float) -> TwoPhases | str:
        """Phases at T and p, or the reason why there are not two."""
        reason = self._reason_against(("T", "p"), T, p)
        if reason is not None:
            return reason
        try:
            phases = equilibrium(self._equation, T, p, self._z)
        except NoEquilibrium as failure:
            return str(failure)
        except (ValueError, RuntimeError, ArithmeticError) as error:
            return f"the equation gave no state: {error}"
        return phases if isinstance(phases, TwoPhases) else "the mixture is a single phase there"

    def _at(self, T: float, p: float) -> Numbers:
        phases = equilibrium(self._equation, T, p, self._z, self._ratios)
        self._ratios = phases.ln_K if isinstance(phases, TwoPhases) else None
        return self._numbers(T, p, phases)

    def _numbers(self, T: float, p: float, phases: Equilibrium) -> Numbers:
        if isinstance(phases, Phase):
            h, s = self._equation.enthalpy_entropy(T, phases)
            return (
                T,
                p,
                1 / (phases.rho * self.molar_mass),
                h / self.molar_mass,
                s / self.molar_mass,
                NaN,
            )
        beta = phases.vapour_fraction
        v = h = s = 0.0
        for share, phase in ((1 - beta, phases.liquid), (beta, phases.vapour)):
            if share == 0.0:
                continue
            phase_h, phase_s = self._equation.enthalpy_entropy(T, phase)
            v += share / phase.rho
            h += share * phase_h
            s += share * phase_s
        return (
            T,
            p,
            v / self.molar_mass,
            h / self.molar_mass,
            s / self.molar_mass,
            self._quality(phases),
        )

    def _quality(self, phases: TwoPhases) -> float:
        """Vapour fraction by mass."""
        beta = phases.vapour_fraction
        liquid = (1 - beta) * self._equation.molar_mass(phases.liquid.x)
        vapour = beta * self._equation.molar_mass(phases.vapour.x)
        return vapour / (liquid + vapour)

    def _at_pressure(self, p: float, name: str, target: float) -> Numbers:
        """State at p where `name` (h or s) has its target, as a single phase first."""
        starts = (self._last_T, 1.2 * max(self._equation.critical_temperatures))
        reason = NoEquilibrium("no state was found")
        for start in starts:
            for search in (
                self._single_at_pressure,
                self._any_at_pressure,
                self._past_gaps_at_pressure,
            ):
                try:
                    return search(p, name, target, start)
                except NoEquilibrium as failure:
                    reason = failure  # it splits, or the search met a T without an answer
        raise reason

    def _single_at_pressure(self, p: float, name: str, target: float, start: float) -> Numbers:
        position = _POSITION[name]

        def excess(T: float) -> float:
            phase = likeliest_phase(self._equation, T, p, self._z)
            return self._numbers(T, p, phase)[position] - target

        T = self._search_T(excess, name, start)
        numbers = self._at(T, p)
        if not math.isnan(numbers[5]):
            raise NoEquilibrium("the mixture splits there")
        return numbers

    def _any_at_pressure(self, p: float, name: str, target: float, start: float) -> Numbers:
        position = _POSITION[name]
        T = self._search_T(lambda T: self._at(T, p)[position] - target, name, start)
        return self._at(T, p)

    def _past_gaps_at_pressure(self, p: float, name: str, target: float, start: float) -> Numbers:
        """State found across temperatures at which the phases cannot be told.

        There the search is led by the single phase; the state itself has to be told.
        """
        position = _POSITION[name]

        def excess(T: float) -> float:
            try:
                return self._at(T, p)[position] - target
            except NoEquilibrium:
                phase = likeliest_phase(self._equation, T, p, self._z)
                return self._numbers(T, p, phase)[position] - target

        return self._at(self._search_T(excess, name, start), p)

    def _search_T(self, excess: Callable[[float], float], name: str, start: float) -> float:
        T = root_from(
            excess,
            start,
            self._bounds.T_min,
            self._bounds.T_max,
            rising=True,
            f_tolerance=_TOLERANCE[name],
            first_step=0.03 * start,
        )
        self._last_T = T
        return T

    def _at_quality(self, held: str, value: float, quality: float) -> Numbers:
        """State at T or p of a given vapour fraction by mass."""
        nearest, other = (0, 1) if quality < 0.5 else (1, 0)
        try:
            edge, (T, p, phases) = nearest, self._saturated(held, value, nearest)
        except NoEquilibrium:
            if quality == nearest:
                raise
            edge, (T, p, phases) = other, self._saturated(held, value, other)
        if quality == edge:
            return self._numbers(T, p, phases)
        self._ratios = phases.ln_K

        def excess(unknown: float) -> float:
            found = self._at(*self._place(held, value, unknown))[5]
            if math.isnan(found):  # still on the line it set out from, or across the dome already
                near = abs(unknown - start) <= _ON_LINE * abs(start)
                found = float(edge if near else 1 - edge)
            return found - quality

        bounds = self._bounds
        start, low, high = (
            (T, bounds.T_min, bounds.T_max)
            if held == "p"
            else (math.log(p), math.log(1e-3), math.log(bounds.p_max))
        )
        unknown = root_from(
            excess,
            start,
            low,
            high,
            rising=held == "p",
            f_tolerance=_QUALITY_TOLERANCE,
            first_step=0.003 * T if held == "p" else 0.03,
        )
        return self._at(*self._place(held, value, unknown))

    def _saturated(self, held: str, value: float, edge: int) -> tuple[float, float, TwoPhases]:
        return saturated(self._equation, self._native, self._z, held, value, edge, self._bounds)

    @staticmethod
    def _place(held: str, value: float, unknown: float) -> tuple[float, float]:
        return (value, math.exp(unknown)) if held == "T" else (unknown, value)

    def _reason_against(self, pair: Pair, x: float, y: float) -> str | None:
        if not (math.isfinite(x) and math.isfinite(y)):
            return "the given values are not finite numbers"
        values = dict(zip(pair, (x, y), strict=True))
        reason = None
        if "T" in values:
            reason = self._bounds.reason_against_T(values["T"])
        if reason is None and "p" in values:
            reason = self._bounds.reason_against_p(values["p"])
        quality = values.get("quality", 0.0)
        if reason is None and not 0.0 <= quality <= 1.0:
            reason = f"quality = {quality:.6g} is not within 0 and 1"
        return reason
