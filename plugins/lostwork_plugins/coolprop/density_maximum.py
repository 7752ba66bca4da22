"""Cold water has two temperatures for one p and v, and two pressures for one T and s.

Liquid water and heavy water contract on heating up to a temperature of greatest density (277.13 K
and 284.3 K at 1 bar, less under pressure); there v turns with T, and s turns with p.  CoolProp
gives one of the two states without a word.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from CoolProp.CoolProp import (
    PQ_INPUTS,
    PT_INPUTS,
    QT_INPUTS,
)

from lostwork import Pair
from lostwork_plugins.coolprop.bracketing import root_between

__all__ = ["reason_if_two_states"]

_WARMEST: Mapping[str, float] = {"Water": 285.0, "HeavyWater": 297.0}
"""K, above which either fluid has left behind every temperature with a twin."""

_ROUNDING = 1e-12
_HIGHEST_BEND = 1e8


def reason_if_two_states(
    state: Any, fluid: str, pair: Pair, given: float, T_min: float
) -> str | None:
    """Say that another liquid has the same pair.

    Parameters
    ----------
    state
        CoolProp's object, in the state that it found; left elsewhere.
    fluid
        CoolProp's name.
    pair
        What was given; only (p, v) and (T, s) have twins.
    given
        The second of the pair in SI, on the zero of `state`.
    T_min
        K; no state below.
    """
    warmest = _WARMEST.get(fluid)
    if warmest is None or pair not in (("p", "v"), ("T", "s")) or state.T() > warmest:
        return None
    if pair == ("p", "v"):
        if not _volume_has_twin(state, given, T_min, warmest):
            return None
        return (
            f"v with p fits two temperatures of {fluid}, on either side of its greatest density; "
            "give T with p"
        )
    if not _entropy_has_twin(state, given):
        return None
    return f"s with T fits two pressures of {fluid} below its greatest density; give T with p"


def _volume_has_twin(state: Any, v: float, T_min: float, warmest: float) -> bool:
    if v * state.rhomass_critical() > 1.0:
        return False
    p, wet = float(state.p()), 0.0 <= state.Q() <= 1.0
    contracts = not wet and state.isobaric_expansion_coefficient() < 0.0
    far = T_min
    if contracts:
        state.update(PQ_INPUTS, p, 0.0)
        far = min(float(state.T()), warmest)
    state.update(PT_INPUTS, p, far * (1.0 - _ROUNDING) if contracts else far)
    return 1.0 / float(state.rhomass()) >= v * (1.0 - _ROUNDING)


def _entropy_has_twin(state: Any, s: float) -> bool:
    T = float(state.T())
    state.update(QT_INPUTS, 0.0, T)
    p, at_boiling = float(state.p()), float(state.smass())

    def expansion(p: float) -> float:
        state.update(PT_INPUTS, p, T)
        return float(state.isobaric_expansion_coefficient())

    low, high = 1.001 * p, _HIGHEST_BEND
    at_low, at_high = expansion(low), expansion(high)
    if at_low >= 0.0:
        return False
    expansion(root_between(expansion, low, at_low, high, at_high))
    return at_boiling - _ROUNDING * abs(s) <= s <= float(state.smass())
