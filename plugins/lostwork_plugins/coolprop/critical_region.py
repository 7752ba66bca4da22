"""Density of a pure fluid at T and p near its critical point, where CoolProp's own search fails.

At one T the pressure rises with density outside the dome, so a bracketed search cannot go astray;
inside the dome the pressure does not move, and the search keeps to the side on which p lies.
"""

from __future__ import annotations

from typing import Any

from CoolProp.CoolProp import (
    QT_INPUTS,
    DmassT_INPUTS,
)

from lostwork import Critical
from lostwork_plugins.coolprop.bracketing import root_between

__all__ = ["density_at"]

_REGION = 0.1
_DENSEST = 3.0
_VERIFIED = 1e-9


def density_at(state: Any, T: float, p: float, critical: Critical) -> float | None:
    """Density (kg/m3) at T (K) and p (Pa), or ``None``; leaves `state` there.

    Only within 10 % of the critical temperature.  The pressure at the density found is compared
    with p (1e-9, relative).
    """
    if abs(T / critical.T - 1) > _REGION:
        return None
    low, high = 1e-6 / critical.v, _DENSEST / critical.v

    def excess(rho: float) -> float:
        state.update(DmassT_INPUTS, rho, T)
        return float(state.p()) - p

    try:
        if T < critical.T:
            quality = 0.0 if p > _saturation_pressure(state, T) else 1.0
            state.update(QT_INPUTS, quality, T)
            edge = float(state.rhomass())
            low, high = (edge, high) if quality == 0.0 else (low, edge)
        below, above = excess(low), excess(high)
        if below * above > 0.0:
            return None
        rho = root_between(excess, low, below, high, above, x_tolerance=1e-15)
        return rho if abs(excess(rho)) <= _VERIFIED * p else None
    except (ValueError, RuntimeError):
        return None


def _saturation_pressure(state: Any, T: float) -> float:
    state.update(QT_INPUTS, 1.0, T)
    return float(state.p())
