"""A pure fluid on its reference equation of state.

CoolProp solves every determining pair of a pure fluid but one without a wrong answer, as long as it
is asked inside the range of the equation; the rows it may not answer are refused here:

- outside the range, or solid;
- T and p on the saturation line, where they do not fix a state;
- p and v beside it, which CoolProp takes to be on it: these are solved here;
- what CoolProp itself cannot solve.  Near the critical point T and p are tried again by density.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from functools import partial
from typing import Any

import numpy as np
from CoolProp.CoolProp import (
    QT_INPUTS,
    AbstractState,
    iphase_twophase,
)

from lostwork import (
    REFERENCE_TEMPERATURE,
    Column,
    Columns,
    Critical,
    FluidSpec,
    Pair,
    PairRefused,
    PropertyModel,
)
from lostwork_plugins.coolprop.beside_saturation import find_beside_line
from lostwork_plugins.coolprop.bounds import Bounds, bounds_of, limits_of
from lostwork_plugins.coolprop.critical_region import density_at
from lostwork_plugins.coolprop.density_maximum import reason_if_two_states
from lostwork_plugins.coolprop.ideal import ideal_gas
from lostwork_plugins.coolprop.inputs import INPUTS
from lostwork_plugins.coolprop.pure_columns import LEAST_ROWS, WARM_PAIRS, pure_columns
from lostwork_plugins.coolprop.rows import NaN, Row, columns_of
from lostwork_plugins.coolprop.sources import source_of
from lostwork_plugins.coolprop.threads import PerThread

__all__ = ["PureModel"]

_ON_SATURATION = 1e-6
_LEAST_PRESSURE = 1.0
_BY_VOLUME = ("p", "v")
_SHIFTED_INPUTS = {"h": 0, "u": 0, "s": 1}

_NOISE = 5e-6
# Measured round trips through every pair; light molecules have the larger entropy per kilogram.
_NOISE_OF = {"Hydrogen": 3e-5, "ParaHydrogen": 3e-5, "OrthoHydrogen": 3e-5, "Helium": 5e-5}
_NOISE_NEAR_CRITICAL = 3e-4
_NOISE_NEAR_CRITICAL_HYDROGEN = 1e-3


class PureModel(PropertyModel):
    """States of one fluid of CoolProp, see `PropertyModel`.

    Parameters
    ----------
    fluid
        CoolProp's name.
    spec, options
        The recipe by which the model is opened again.
    """

    two_phase = True

    def __init__(self, fluid: str, spec: FluidSpec, options: Mapping[str, Any]) -> None:
        self.fluid = fluid
        self._recipe = (spec, dict(options))
        state = AbstractState("HEOS", fluid)
        self.molar_mass = float(state.molar_mass())
        self._bounds: Bounds = bounds_of(state, fluid)
        least = min(_LEAST_PRESSURE, 0.9 * float(state.p_triple()))
        self.limits = limits_of(self._bounds, least, source_of((fluid,)))
        self.native_pairs = frozenset(self._pairs())
        self.entropy_noise = _NOISE_OF.get(fluid, _NOISE)
        self._critical = Critical(
            float(state.T_critical()),
            float(state.p_critical()),
            1 / float(state.rhomass_critical()),
        )
        self._limit = self._limit_of(state)
        self._here = PerThread(self._open_here)

    def columns(self, pair: Pair, x: Column, y: Column) -> Columns:
        """State columns for two columns of `pair`."""
        if pair not in self.native_pairs:
            raise PairRefused(given=pair, reason=f"coolprop does not solve it for {self.fluid}")
        here = self._here()
        if pair in WARM_PAIRS and (isinstance(x, np.ndarray) or isinstance(y, np.ndarray)):
            x, y = np.broadcast_arrays(x, y)
            if x.size >= LEAST_ROWS:
                state, dh, ds = here
                cold = partial(self._row, here)
                return pure_columns(state, (dh, ds), self._bounds, self._critical, cold, pair, x, y)
        return columns_of(partial(self._row, here, pair), x, y)

    def ideal_gas_limit(self) -> tuple[float, float]:
        """Give h (J/kg) and s (J/kg/K) as an ideal gas at 298.15 K and 1 bar."""
        return self._limit

    def critical(self) -> Critical:
        """Give the critical point of the equation."""
        return self._critical

    def noise_at(self, T: Column, p: Column) -> Column:
        """Inconsistency of the entropy, larger in the neighbourhood of the critical point."""
        critical = self._critical
        near = (np.abs(np.divide(T, critical.T) - 1) < 0.02) & (
            np.abs(np.divide(p, critical.p) - 1) < 0.2
        )
        there = _NOISE_NEAR_CRITICAL_HYDROGEN if "Hydrogen" in self.fluid else _NOISE_NEAR_CRITICAL
        noise = np.where(near, there, self.entropy_noise)
        return noise if noise.ndim else float(noise)

    def __reduce__(self) -> tuple[Any, ...]:
        from lostwork_plugins.coolprop.backend import reopen  # noqa: PLC0415  (a circle)

        return reopen, self._recipe

    @staticmethod
    def _pairs() -> frozenset[Pair]:
        return frozenset(INPUTS)

    def _limit_of(self, state: Any) -> tuple[float, float]:
        h, s = ideal_gas(state, REFERENCE_TEMPERATURE)
        return h / self.molar_mass, s / self.molar_mass

    def _open_here(self) -> tuple[Any, float, float]:
        """Object of this thread, and what brings its zero onto that of the model.

        The reference state of CoolProp belongs to the process and may have been moved since.
        """
        state = AbstractState("HEOS", self.fluid)
        h, s = self._limit_of(state)
        return state, self._limit[0] - h, self._limit[1] - s

    def _row(self, here: tuple[Any, float, float], pair: Pair, x: float, y: float) -> Row:
        state, dh, ds = here
        reason = self._reason_against(state, pair, x, y)
        if reason is not None:
            return reason
        if dh or ds:
            x, y = self._unshifted(pair[0], x, dh, ds), self._unshifted(pair[1], y, dh, ds)
        code, ordered = INPUTS[pair]
        try:
            state.update(code, *ordered(x, y))
            row = self._beside_line(here, x, y) if pair == _BY_VOLUME else self._read(here)
            twins = reason_if_two_states(state, self.fluid, pair, y, self._bounds.T_min)
            if twins is not None:
                return twins
        except (ValueError, RuntimeError) as error:
            return self._second_try(here, pair, x, y, str(error))
        if isinstance(row, str):
            return row
        # T and p that were given come back as given, not as iterated.
        if pair[0] == "T":
            return (x, y, *row[2:]) if pair[1] == "p" else (x, *row[1:])
        return (row[0], x, *row[2:]) if pair[0] == "p" else row

    def _beside_line(self, here: tuple[Any, float, float], p: float, v: float) -> Row:
        """Read what CoolProp found for p and v, unless it lies off the line that it was put on."""
        state = here[0]
        quality = state.Q()
        if state.phase() != iphase_twophase or 0.0 <= quality <= 1.0:
            return self._read(here)
        try:
            find_beside_line(state, p, v, round(quality), self._bounds)
            return self._read(here)
        finally:
            state.unspecify_phase()

    def _read(self, here: tuple[Any, float, float]) -> Row:
        state, dh, ds = here
        T, p, rho, quality = state.T(), state.p(), state.rhomass(), state.Q()
        h, s = state.hmass() + dh, state.smass() + ds
        bounds = self._bounds
        if not bounds.T_min <= T <= bounds.T_max:
            reason = bounds.reason_against_T(T)
            if reason is not None:
                return reason
        if not 0.0 < p <= bounds.p_max:
            reason = bounds.reason_against_p(p)
            if reason is not None:
                return reason
        if not (math.isfinite(h) and math.isfinite(s) and 0.0 < rho < math.inf):
            return "CoolProp gave no finite state"
        wet = 0.0 <= quality <= 1.0 and T <= self._critical.T
        if bounds.T_melt_max > T and not wet and rho * self._critical.v > 1.0:
            reason = bounds.reason_if_solid(state, T, p)
            if reason is not None:
                return reason
        return T, p, 1.0 / rho, h, s, quality if wet else NaN

    def _reason_against(self, state: Any, pair: Pair, x: float, y: float) -> str | None:
        """Say what is wrong with the input alone."""
        if not (math.isfinite(x) and math.isfinite(y)):
            return "the given values are not finite numbers"
        first, second = pair
        if first == "T":
            reason = self._bounds.reason_against_T(x)
            if reason is None and second == "p":
                reason = self._bounds.reason_against_p(y) or self._on_saturation(state, x, y)
            if reason is not None:
                return reason
        elif first == "p":
            reason = self._bounds.reason_against_p(x)
            if reason is not None:
                return reason
        if second == "quality" and not 0.0 <= y <= 1.0:
            return f"quality = {y:.6g} is not within 0 and 1"
        if (first == "v" and x <= 0.0) or (second == "v" and y <= 0.0):
            return "the specific volume is not positive"
        return None

    def _on_saturation(self, state: Any, T: float, p: float) -> str | None:
        if T >= self._critical.T or p > self._critical.p * (1 + _ON_SATURATION):
            return None
        try:
            state.update(QT_INPUTS, 1.0, T)
        except (ValueError, RuntimeError):
            return None  # within a hair of the critical point, where no line is left to be on
        saturation = state.p()
        if abs(p - saturation) > _ON_SATURATION * saturation:
            return None
        return (
            f"T and p are on the saturation line (saturation pressure {saturation:.9g} Pa at "
            f"{T:.9g} K) and do not fix the state; give quality, or h, with one of them"
        )

    def _second_try(
        self, here: tuple[Any, float, float], pair: Pair, x: float, y: float, complaint: str
    ) -> Row:
        if pair != ("T", "p"):
            return f"CoolProp did not solve it: {complaint}"
        state = here[0]
        solid = self._bounds.reason_if_solid(state, x, y)
        if solid is not None:
            return solid
        rho = density_at(state, x, y, self._critical)
        if rho is None:
            return f"CoolProp did not solve it: {complaint}"
        row = self._read(here)
        return row if isinstance(row, str) else (x, y, *row[2:])

    @staticmethod
    def _unshifted(name: str, value: float, dh: float, ds: float) -> float:
        shifted = _SHIFTED_INPUTS.get(name)
        return value if shifted is None else value - (dh, ds)[shifted]
