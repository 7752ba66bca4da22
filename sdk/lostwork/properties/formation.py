"""Formation data: enthalpy of formation and absolute entropy of the ideal gas at 298.15 K, 1 bar.

CODATA Key Values for Thermodynamics (Cox, Wagman and Medvedev 1989) where it lists the gas; the
`chemicals` library rounds its entropies further.  Otherwise tables in `chemicals`, both numbers
from one source where one has both.  Estimates by group contribution are not used, nor the TRC set,
whose enthalpies of formation are at 0 K.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

from lostwork.properties.components import Component

__all__ = ["Formation", "formation"]


@dataclass(frozen=True)
class Formation:
    """Enthalpy of formation (J/mol) and absolute entropy (J/mol/K) of the ideal gas, and source."""

    enthalpy: float
    entropy: float
    source: str


_CODATA = {
    "1333-74-0": (0.0, 130.680),
    "7782-44-7": (0.0, 205.152),
    "7727-37-9": (0.0, 191.609),
    "630-08-0": (-110.53, 197.660),
    "124-38-9": (-393.51, 213.785),
    "7732-18-5": (-241.826, 188.835),
    "7664-41-7": (-45.94, 192.77),
    "7440-59-7": (0.0, 126.153),
    "7440-01-9": (0.0, 146.328),
    "7440-37-1": (0.0, 154.846),
    "7439-90-9": (0.0, 164.085),
    "7440-63-3": (0.0, 169.685),
    "7783-06-4": (-20.6, 205.81),
    "7446-09-5": (-296.81, 248.223),
    "7647-01-0": (-92.31, 186.902),
    "7782-50-5": (0.0, 223.081),
    "7782-41-4": (0.0, 202.791),
    "7664-39-3": (-273.30, 173.779),
}
_CODATA_SOURCE = "CODATA Key Values (1989), from memory"

_BOTH = ("CRC", "JANAF", "WEBBOOK", "YAWS")
_ENTHALPY_ONLY = ("CRC", "JANAF", "WEBBOOK", "ATCT_G", "API_TDB_G", "YAWS")


@lru_cache(maxsize=4096)
def formation(component: Component) -> Formation | None:
    """Give the formation data of a component, or ``None`` where either number is missing."""
    known = _CODATA.get(component.cas)
    if known is not None:
        return Formation(1e3 * known[0], known[1], _CODATA_SOURCE)
    return _tabulated(component.cas)


def _tabulated(cas: str) -> Formation | None:
    from chemicals.reaction import S0g, S0g_methods, Hfg, Hfg_methods  # noqa: I001, PLC0415

    enthalpies, entropies = set(Hfg_methods(cas)), set(S0g_methods(cas))
    for source in _BOTH:
        if source in enthalpies and source in entropies:
            return _taken(cas, source, source, Hfg, S0g)
    first = next((source for source in _ENTHALPY_ONLY if source in enthalpies), None)
    second = next((source for source in _BOTH if source in entropies), None)
    if first is None or second is None:
        return None
    return _taken(cas, first, second, Hfg, S0g)


def _taken(
    cas: str, first: str, second: str, enthalpy: Callable[..., Any], entropy: Callable[..., Any]
) -> Formation:
    source = first if first == second else f"{first} (enthalpy), {second} (entropy)"
    return Formation(
        float(enthalpy(cas, method=first)),
        float(entropy(cas, method=second)),
        f"{source}, in the library chemicals",
    )
