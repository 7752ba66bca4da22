"""The range of an equation, which CoolProp itself does not keep.

CoolProp answers for water at 10,000 K, for R134a at 600 K and for components below their triple
point; here such a state is refused, and so is a solid where a melting line is known.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from CoolProp.CoolProp import (
    iP,
    iT,
)

from lostwork import Limits

__all__ = ["Bounds", "bounds_of", "common_bounds", "limits_of"]

_ROUNDING = 1e-9
# A melting line that starts further than this above the triple point contradicts the equation
# (deuterium: 1 K), and would call liquid on the saturation line solid.
_LINE_MISFIT = 0.05


@dataclass(frozen=True)
class Bounds:
    """Range of one pure or pseudo-pure fluid: K and Pa.

    `T_melt_max` is the highest temperature of its melting line, 0 without a usable one.
    """

    fluid: str
    T_min: float
    T_max: float
    p_max: float
    T_melt_max: float = 0.0

    def reason_against_T(self, T: float) -> str | None:
        """Say why a temperature (K) is out of range."""
        if self.T_min * (1 - _ROUNDING) <= T <= self.T_max * (1 + _ROUNDING):
            return None
        return (
            f"T = {T:.6g} K is outside the equation of {self.fluid}, "
            f"{self.T_min:.6g} K to {self.T_max:.6g} K"
        )

    def reason_against_p(self, p: float) -> str | None:
        """Say why a pressure (Pa) is out of range."""
        if 0.0 < p <= self.p_max * (1 + _ROUNDING):
            return None
        return (
            f"p = {p:.6g} Pa is outside the equation of {self.fluid}, above 0 and up to "
            f"{self.p_max:.6g} Pa"
        )

    def reason_if_solid(self, state: Any, T: float, p: float) -> str | None:
        """Say that a dense state is on the solid side of the melting line, where one is known."""
        if self.T_melt_max < T:
            return None
        melting = _melting_temperature(state, p)
        if melting is None or melting * (1 - 1e-6) <= T:
            return None
        return f"{self.fluid} is solid at p = {p:.6g} Pa below its melting point {melting:.6g} K"


def bounds_of(state: Any, fluid: str) -> Bounds:
    """Read the range of a pure or pseudo-pure fluid from its CoolProp object."""
    T_min = max(float(state.Tmin()), float(state.Ttriple()))
    p_max = float(state.pmax())
    return Bounds(fluid, T_min, float(state.Tmax()), p_max, _highest_melting(state, T_min, p_max))


def common_bounds(name: str, parts: Sequence[Bounds]) -> Bounds:
    """Range that all components of a mixture share; no melting line is known for it."""
    return Bounds(
        name,
        max(part.T_min for part in parts),
        min(part.T_max for part in parts),
        min(part.p_max for part in parts),
    )


def limits_of(bounds: Bounds, p_min: float, source: str) -> Limits:
    """Range in the form of the contract."""
    return Limits(bounds.T_min, bounds.T_max, p_min, bounds.p_max, source)


def _highest_melting(state: Any, T_min: float, p_max: float) -> float:
    if not state.has_melting_line():
        return 0.0
    start = _melting_temperature(state, 2e6)
    triple = _melting_temperature(state, float(state.p_triple()) * 1.01)
    if triple is not None and triple > T_min + _LINE_MISFIT:
        return 0.0
    # Lines of several pieces need not rise to the end, nor be known up to p_max.
    found = [start, triple]
    for share in (1.0, 0.5, 0.2, 0.1, 0.05):
        found.append(_melting_temperature(state, p_max * share))
    return max((T for T in found if T is not None), default=0.0)


def _melting_temperature(state: Any, p: float) -> float | None:
    try:
        return float(state.melting_line(iT, iP, p))
    except (ValueError, RuntimeError):
        return None  # the line is not known at this pressure
