"""The options of the backend: which equation, whose interaction parameters."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from lostwork import Component, component
from lostwork_plugins.cubic.refusal import OptionRefused

__all__ = ["Options"]

_EQUATIONS = ("PR", "SRK")
_MISSING = ("note", "refuse")
_KNOWN = (
    'Options are eos ("PR" or "SRK"), interaction (a mapping of pairs to kij) and '
    'missing ("note" or "refuse")'
)
_PAIRS = 'Give {("methane", "ethane"): 0.003} or {"methane / ethane": 0.003}'


@dataclass(frozen=True)
class Options:
    """Checked options of one model.

    Parameters
    ----------
    eos
        "PR" (the default) or "SRK".
    interaction
        kij by pair of CAS numbers, in either order; it overrides the published one.
    missing
        What to do about a pair without a published kij: "note" (the default) takes 0 and says so in
        the notes of the model, "refuse" raises.
    """

    eos: str
    interaction: Mapping[frozenset[str], float]
    missing: str

    @classmethod
    def read(cls, given: Mapping[str, Any], components: tuple[Component, ...]) -> Options:
        """Check the options given by a caller against the components of the fluid.

        Raises
        ------
        OptionRefused
            An option that is not known, or a value that cannot be used.
        """
        for name in given:
            if name not in ("eos", "interaction", "missing"):
                raise OptionRefused(str(name), "there is no such option", _KNOWN)
        eos = given.get("eos", "PR")
        if eos not in _EQUATIONS:
            raise OptionRefused("eos", f"there is no equation {eos!r}", 'Give "PR" or "SRK"')
        missing = given.get("missing", "note")
        if missing not in _MISSING:
            raise OptionRefused("missing", f"{missing!r} says nothing", 'Give "note" or "refuse"')
        return cls(eos, _interaction(given.get("interaction", {}), components), missing)


def _interaction(given: Any, components: tuple[Component, ...]) -> Mapping[frozenset[str], float]:
    if not isinstance(given, Mapping):
        raise OptionRefused("interaction", f"{given!r} is no mapping", _PAIRS)
    read: dict[frozenset[str], float] = {}
    for names, value in given.items():
        pair = frozenset(_cas(name, components) for name in _two_names(names))
        if len(pair) != 2:
            raise OptionRefused("interaction", f"{names!r} names one component twice", _PAIRS)
        if pair in read:
            raise OptionRefused("interaction", f"{names!r} is given twice", _PAIRS)
        read[pair] = _kij(names, value)
    return read


def _two_names(names: Any) -> tuple[str, ...]:
    # A case file has only text for keys.
    parts = names.split("/") if isinstance(names, str) else names
    if not isinstance(parts, list | tuple | frozenset) or len(parts) != 2:
        raise OptionRefused("interaction", f"{names!r} is no pair of components", _PAIRS)
    return tuple(str(part).strip() for part in parts)


def _cas(name: str, components: tuple[Component, ...]) -> str:
    for part in components:
        if name.casefold() in (part.cas, part.name.casefold()):
            return str(part.cas)
    found = str(component(name).cas)
    if found not in {part.cas for part in components}:
        present = ", ".join(part.name for part in components)
        raise OptionRefused("interaction", f"{name!r} is not in the fluid", f"It has {present}")
    return found


def _kij(names: Any, value: Any) -> float:
    number = isinstance(value, int | float) and not isinstance(value, bool)
    if not number or not math.isfinite(value) or not -1.0 < value < 1.0:
        raise OptionRefused(
            "interaction", f"kij of {names!r} is {value!r}", "It is a number between -1 and 1"
        )
    return float(value)
