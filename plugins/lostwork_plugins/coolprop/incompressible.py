"""The backend "incompressible": brines, antifreeze and water as liquids of one density each T.

Density and heat capacity are fits in T and concentration; h and s follow from both, pressure
included: h = h0(T) + (v - T dv/dT) (p - p0), s = s0(T) - dv/dT (p - p0).
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import CoolProp
from CoolProp.CoolProp import AbstractState

from lostwork import Backend, Column, Columns, FluidSpec, Limits, Pair, PropertyModel
from lostwork_plugins.coolprop.refusal import NoModel
from lostwork_plugins.coolprop.rows import NaN, Row, columns_of
from lostwork_plugins.coolprop.solutions import Solution, solution_of
from lostwork_plugins.coolprop.threads import PerThread

__all__ = ["IncompressibleBackend", "IncompressibleModel"]

_HIGHEST_PRESSURE = 1e8
_LOWEST_PRESSURE = 1.0


class IncompressibleBackend(Backend):
    """Solutions in water that carry heat and cold.

    Melinder, Properties of Secondary Working Fluids for Indirect Systems (2010), in CoolProp.
    The concentration is that of the composition: ``lw.Fluid({"ethylene glycol": 0.3, "water": 0.7},
    backend="incompressible", basis="mass")``.  There are no options, no vapour and no ice: a state
    below the freezing point, or one that would boil, is refused.
    """

    def open(self, spec: FluidSpec, options: Mapping[str, Any]) -> PropertyModel:
        """Open the model of one solution at one concentration.

        Raises
        ------
        NoModel
            Not such a solution, a concentration outside the tables, or an option.
        """
        if options:
            raise NoModel(
                fluid=spec.name or "the solution",
                reason=f"there is no option {next(iter(options))!r}",
                advice="Give the concentration by the composition",
            )
        return IncompressibleModel(solution_of(spec), spec)


class IncompressibleModel(PropertyModel):
    """One solution at one concentration."""

    native_pairs = frozenset({("T", "p")})
    two_phase = False
    only_phase = "liquid"
    # Measured: 3e-11 along isobars and isotherms, by h and by s, for eight solutions.
    entropy_noise = 1e-9

    def __init__(self, solution: Solution, spec: FluidSpec) -> None:
        self._solution, self._spec = solution, spec
        self.molar_mass = spec.molar_mass
        self._raw = PerThread(self._made)
        raw = self._opened()
        lowest = raw.Tmin()
        if solution.concentration is not None:
            lowest = max(lowest, raw.trivial_keyed_output(CoolProp.iT_freeze))
        self.limits = Limits(
            T_min=lowest,
            T_max=raw.Tmax(),
            p_min=_LOWEST_PRESSURE,
            p_max=_HIGHEST_PRESSURE,
            source=f"{solution.key} (Melinder 2010) in CoolProp {CoolProp.__version__}",
        )
        self.notes = (
            "A liquid of one density at each temperature: neither vapour, freezing nor sound in it",
        )

    def columns(self, pair: Pair, x: Column, y: Column) -> Columns:
        """Give the columns at T and p."""
        raw = self._raw()
        low, high = self.limits.T_min, self.limits.T_max

        def row(T: float, p: float) -> Row:
            if not low <= T <= high:
                return f"T = {T:.6g} K is outside {low:.6g} (freezing) to {high:.6g} K"
            if not _LOWEST_PRESSURE <= p <= _HIGHEST_PRESSURE:
                return f"p = {p:.6g} Pa is outside {_LOWEST_PRESSURE:g} to {_HIGHEST_PRESSURE:g} Pa"
            try:
                raw.update(CoolProp.PT_INPUTS, p, T)
            except ValueError as error:
                return f"CoolProp did not solve it: {error}"
            return T, p, 1.0 / raw.rhomass(), raw.hmass(), raw.smass(), NaN

        return columns_of(row, x, y)

    def _made(self) -> Any:
        raw = AbstractState("INCOMP", self._solution.key)
        if self._solution.concentration is not None:
            raw.set_mass_fractions([self._solution.concentration])
        return raw

    def _opened(self) -> Any:
        """Open it once to see whether the tables hold the concentration."""
        raw = self._made()
        T = min(raw.Tmax() - 1.0, 300.0)
        try:
            raw.update(CoolProp.PT_INPUTS, 1e6, T)
        except ValueError as error:
            raise NoModel(
                fluid=f"a solution of {self._solution.concentration:.3g} by mass",
                reason=f"the tables do not reach it ({error})",
                advice="Give a lower concentration",
            ) from error
        return raw

    def __reduce__(self) -> tuple[Any, ...]:
        return IncompressibleModel, (self._solution, self._spec)
