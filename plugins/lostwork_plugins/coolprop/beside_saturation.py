"""The single phase at p and v that CoolProp takes for the saturated phase beside it.

At low pressure CoolProp 8 answers a liquid given by p and v with its boiling point, up to 10 K off
and without a complaint (propane, ethanol and toluene near their triple points, water at 20 mbar).
The quality gives that away: it is a little below 0, the lever extended to the density that was
given.
"""

from __future__ import annotations

from typing import Any

from CoolProp.CoolProp import (
    PQ_INPUTS,
    PT_INPUTS,
    iphase_gas,
    iphase_liquid,
)

from lostwork_plugins.coolprop.bounds import Bounds
from lostwork_plugins.coolprop.bracketing import root_between

__all__ = ["find_beside_line"]

_ON_LINE = 1e-12
_FIRST_STEP = 0.01
_LONGEST_STEP = 2.0
_GROWTH = 2.0


def find_beside_line(state: Any, p: float, v: float, edge: int, bounds: Bounds) -> None:
    """Find the single phase at p (Pa) and v (m3/kg) next to a saturation line.

    Parameters
    ----------
    state
        CoolProp's object; left in the state found, with its phase imposed.
    edge
        0 for a liquid, 1 for a vapour.
    bounds
        Range of the fluid, within which the search stays.

    Raises
    ------
    ValueError
        No temperature within the range has this density.
    """
    state.update(PQ_INPUTS, p, edge)
    T, at = float(state.T()), float(state.rhomass()) * v - 1.0
    if abs(at) <= _ON_LINE:
        return
    sense = 1.0 if edge else -1.0
    state.specify_phase(iphase_gas if edge else iphase_liquid)

    def excess(T: float) -> float:
        state.update(PT_INPUTS, p, T)
        return float(state.rhomass()) * v - 1.0

    limit = bounds.T_max if edge else bounds.T_min
    step = _FIRST_STEP
    while limit != T:
        beyond = T + sense * min(step, abs(limit - T))
        there = excess(beyond)
        if at * there <= 0.0:
            excess(root_between(excess, T, at, beyond, there))
            return
        T, at, step = beyond, there, min(step * _GROWTH, _LONGEST_STEP)
    raise ValueError(f"no single phase within the range has v = {v:.6g} m3/kg at p = {p:.6g} Pa")
