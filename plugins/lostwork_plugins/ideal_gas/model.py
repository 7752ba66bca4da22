"""The model: from any determining pair to the state of an ideal gas.

p v = R T; h = h(T); s = s(T) - R ln(p/p0) - R sum x ln x.  Each pair fixes T by one inversion of a
function of T alone, then p; the properties given are handed back as they came.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from types import MappingProxyType
from typing import Any, Protocol, TypeAlias

import numpy as np
import numpy.typing as npt

from lostwork import (
    DETERMINING_PAIRS,
    REFERENCE_PRESSURE,
    REFERENCE_TEMPERATURE,
    Column,
    Columns,
    FluidSpec,
    Limits,
    Pair,
    PairRefused,
    PropertyModel,
)
from lostwork_plugins.ideal_gas.constant import exponential, logarithm

__all__ = ["IdealGasModel", "Recipe", "TemperatureRange"]

Vector: TypeAlias = npt.NDArray[np.float64]

_NATIVE = frozenset(pair for pair in DETERMINING_PAIRS if "quality" not in pair)

_UNITS = {"T": "K", "p": "Pa", "v": "m3/kg", "h": "J/kg", "s": "J/kg/K", "u": "J/kg"}

# A temperature that was solved for may miss the end of the range by its rounding.
_ROUND_OFF = 1e-12

# Measured: closed loops through every pair leave below 2e-14 of the gas constant on the zero of
# the model, and up to some 1e-13 after the shift to the common datum.
_NOISE_OVER_R = 1e-12


class HeatCapacity(Protocol):
    """Integrals of a heat capacity, per kilogram, and their inverses."""

    gas_constant: float

    def at_T(self, T: Column) -> tuple[Column, Column]:
        """Give h and s at the reference pressure."""

    def T_of_h(self, h: Column) -> Column:
        """Invert h(T)."""

    def T_of_u(self, u: Column) -> Column:
        """Invert h(T) - R T."""

    def T_of_s(self, s: Column) -> Column:
        """Invert s(T) at constant pressure."""

    def T_of_w(self, w: Column) -> Column:
        """Invert s(T) - R ln T."""


@dataclass(frozen=True)
class Recipe:
    """How a model was opened, and how it is opened again where it is unpickled."""

    reopen: Callable[[FluidSpec, Mapping[str, Any]], PropertyModel]
    spec: FluidSpec
    options: dict[str, Any]


@dataclass(frozen=True)
class TemperatureRange:
    """Range of the heat capacity, K, and which correlation ends it below and above."""

    T_min: float
    T_max: float
    below: str
    above: str


class IdealGasModel(PropertyModel):
    """A gas or a mixture of gases with p v = R T, without phases; immutable.

    Parameters
    ----------
    recipe
        What it was opened from.
    heat_capacity
        Integrals of cp, per kilogram of the fluid.
    molar_mass
        kg/mol.
    limits
        Range and source.
    range_
        The range again, with what bounds it.
    notes
        What the user should know.
    """

    native_pairs = _NATIVE
    two_phase = False

    def __init__(
        self,
        recipe: Recipe,
        *,
        heat_capacity: HeatCapacity,
        molar_mass: float,
        limits: Limits,
        range_: TemperatureRange,
        notes: tuple[str, ...],
    ) -> None:
        self.molar_mass = molar_mass
        self.limits = limits
        self.notes = notes
        self._recipe = recipe
        self._cp = heat_capacity
        self._R = heat_capacity.gas_constant
        self._range = range_
        self._mixing = -self._R * sum(x * math.log(x) for x in recipe.spec.mole_fractions if x > 0)
        # Joins the constants: s = s(T) - R ln p + this.
        self._s0 = self._mixing + self._R * math.log(REFERENCE_PRESSURE)
        self.entropy_noise = _NOISE_OVER_R * self._R

    def columns(self, pair: Pair, x: Column, y: Column) -> Columns:
        """State columns for two columns of `pair`; see the contract of a backend."""
        if pair not in _NATIVE:
            raise PairRefused(
                given=pair,
                reason="an ideal gas does not answer this pair",
                instead="Give two of T, p, v, h, s and u, not T or h with h or u",
            )
        if not isinstance(x, np.ndarray):
            return self._point(pair, x, float(y))
        with np.errstate(all="ignore"):
            return self._rows(pair, x, np.asarray(y, dtype=np.float64))

    def ideal_gas_limit(self) -> tuple[float, float] | None:
        """Zero of h and s, mixing entropy included; ``None`` if 298.15 K is outside the range."""
        if not self.limits.T_min <= REFERENCE_TEMPERATURE <= self.limits.T_max:
            return None
        h, s = self._cp.at_T(REFERENCE_TEMPERATURE)
        return float(h), float(s) + self._mixing

    def __reduce__(self) -> tuple[Any, ...]:
        return self._recipe.reopen, (self._recipe.spec, self._recipe.options)

    def _point(self, pair: Pair, x: float, y: float) -> Columns:
        limits = self.limits
        T = self._temperature(pair, x, y)
        if pair[0] != "T":
            T = float(_snapped(T, limits))
        if not limits.T_min <= T <= limits.T_max:
            return self._no_state(pair, x, y, float(T), math.nan)
        h, s = self._cp.at_T(T)
        p = self._pressure(pair, x, y, T, s)
        if not limits.p_min <= p <= limits.p_max:
            return self._no_state(pair, x, y, float(T), float(p))
        s += self._s0 - self._R * math.log(p)
        state = {"T": T, "p": p, "v": self._R * T / p, "h": h, "s": s, pair[0]: x, pair[1]: y}
        return Columns(state["T"], state["p"], state["v"], state["h"], state["s"], math.nan)

    def _no_state(self, pair: Pair, x: float, y: float, T: float, p: float) -> Columns:
        nan = math.nan
        return Columns(nan, nan, nan, nan, nan, nan, {0: self._reason(pair, x, y, T, p)})

    def _rows(self, pair: Pair, x: Vector, y: Vector) -> Columns:
        limits = self.limits
        T = np.asarray(self._temperature(pair, x, y))
        if pair[0] != "T":
            T = np.asarray(_snapped(T, limits))
        h, s = self._cp.at_T(T)
        p = np.asarray(self._pressure(pair, x, y, T, s))
        good = (limits.T_min <= T) & (limits.T_max >= T)
        good &= (p >= limits.p_min) & (p <= limits.p_max)
        log_p = np.log(p)
        log_p *= -self._R
        log_p += self._s0
        s += log_p
        v = self._R * T
        v /= p
        state = {"T": T, "p": p, "v": v, "h": h, "s": s, pair[0]: x.copy(), pair[1]: y.copy()}
        columns = [state[name] for name in ("T", "p", "v", "h", "s")]
        failed = {}
        if not good.all():
            failed = {
                int(row): self._reason(pair, *(float(value[row]) for value in (x, y, T, p)))
                for row in np.flatnonzero(~good)
            }
            columns = [np.where(good, column, np.nan) for column in columns]
        T, p, v, h, s = columns
        return Columns(T, p, v, h, s, np.full(x.shape, np.nan), MappingProxyType(failed))

    def _temperature(self, pair: Pair, x: Column, y: Column) -> Column:
        """Invert the one function of T that the pair fixes."""
        cp = self._cp
        match pair:
            case ("T", _):
                return x
            case ("p", "v"):
                return x * y / self._R
            case ("p", "s"):
                return cp.T_of_s(y - self._s0 + self._R * logarithm(x))
            case ("v", "s"):
                return cp.T_of_w(y - self._s0 + self._R * (math.log(self._R) - logarithm(x)))
            case ("h", _):
                return cp.T_of_h(x)
            case (_, "h"):
                return cp.T_of_h(y)
            case _:
                return cp.T_of_u(y)

    def _pressure(self, pair: Pair, x: Column, y: Column, T: Column, s: Column) -> Column:
        """Pressure from the pair, T and the entropy `s` at the reference pressure."""
        first, _ = pair
        if "p" in pair:
            return x if first == "p" else y
        if "v" in pair:
            v = x if first == "v" else y
            # Python floats raise where arrays give infinity.
            return self._R * T / v if isinstance(v, np.ndarray) or v else math.nan
        given = x if first == "s" else y
        return exponential((s + self._s0 - given) / self._R)

    def _reason(self, pair: Pair, x: float, y: float, T: float, p: float) -> str:
        """Say why a row has no state."""
        given = ", ".join(
            f"{name} = {value:.8g} {_UNITS[name]}" for name, value in zip(pair, (x, y), strict=True)
        )
        for name, value in zip(pair, (x, y), strict=True):
            if not math.isfinite(value):
                return f"{name} = {value} is not a finite number"
            if name in ("T", "p", "v") and value <= 0.0:
                return f"{name} = {value:.8g} {_UNITS[name]} is not above zero"
        ends = self._range
        if not ends.T_min <= T <= ends.T_max:
            needs = f"T = {T:.8g} K is" if "T" in pair else f"{given} needs a temperature"
            if ends.T_min > T:
                return f"{needs} below {ends.T_min:g} K, where {ends.below} begins"
            return f"{needs} above {ends.T_max:g} K, where {ends.above} ends"
        low, high = self.limits.p_min, self.limits.p_max
        subject = f"p = {p:.8g} Pa is" if "p" in pair else f"{given} gives p = {p:.8g} Pa,"
        return f"{subject} outside the {low:g} Pa to {high:g} Pa of this model"


def _snapped(T: Column, limits: Limits) -> Column:
    """Put a temperature that misses the end of the range by its rounding on that end."""
    low, high = limits.T_min, limits.T_max
    if isinstance(T, np.ndarray):
        T = np.where((low > T) & (low * (1.0 - _ROUND_OFF) < T), low, T)
        return np.where((high < T) & (high * (1.0 + _ROUND_OFF) > T), high, T)
    if low * (1.0 - _ROUND_OFF) < T < low:
        return low
    return high if high < T < high * (1.0 + _ROUND_OFF) else T
