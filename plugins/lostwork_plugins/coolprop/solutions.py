"""Aqueous solutions that serve as brines and antifreeze: which fluid of CoolProp each one is."""

from __future__ import annotations

from dataclasses import dataclass

from lostwork import FluidSpec, component
from lostwork_plugins.coolprop.refusal import NoModel

__all__ = ["Solution", "solution_of"]

_WATER = "7732-18-5"
_PURE = "Water"
_KEYS = {
    "107-21-1": "MEG",
    "57-55-6": "MPG",
    "64-17-5": "MEA",
    "67-56-1": "MMA",
    "56-81-5": "MGL",
    "7664-41-7": "MAM",
    "584-08-7": "MKC",
    "10043-52-4": "MCA",
    "7786-30-3": "MMG",
    "7647-14-5": "MNA",
    "127-08-2": "MKA",
    "590-29-4": "MKF",
    "7447-41-8": "MLI",
}
"""Keys of CoolProp for solutions in water (Melinder 2010), by CAS number of what is dissolved."""


@dataclass(frozen=True)
class Solution:
    """A fluid of CoolProp, and the mass fraction of what is dissolved in it; ``None`` for water."""

    key: str
    concentration: float | None


def solution_of(spec: FluidSpec) -> Solution:
    """Find the solution that a composition is.

    Raises
    ------
    NoModel
        It is no solution of one substance in water, or of one that is not tabulated.
    """
    by_cas = dict(zip((part.cas for part in spec.components), spec.mass_fractions, strict=True))
    shown = spec.name or " + ".join(part.name for part in spec.components)
    if set(by_cas) == {_WATER}:
        return Solution(_PURE, None)
    dissolved = [cas for cas in by_cas if cas != _WATER]
    if len(dissolved) != 1 or _WATER not in by_cas or dissolved[0] not in _KEYS:
        known = ", ".join(sorted(component(cas).name for cas in _KEYS))
        raise NoModel(
            fluid=shown,
            reason="it is no solution of one tabulated substance in water",
            advice=f"Give water with one of: {known}",
        )
    return Solution(_KEYS[dissolved[0]], by_cas[dissolved[0]])
