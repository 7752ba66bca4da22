"""From what a caller writes to a composition by amount: names, fractions, named mixtures."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from typing import Any, Literal

from lostwork.errors import CompositionError, UnknownComponent
from lostwork.properties.backend import FluidSpec
from lostwork.properties.components import Component, component
from lostwork.quantities import FRACTION, to_si

__all__ = ["NAMED_MIXTURES", "checked_spec", "fluid_spec"]

_CLOSING = 1e-6
_ROUND_OFF = 1e-12

NAMED_MIXTURES: dict[str, tuple[Literal["amount", "mass"], dict[str, float]]] = {
    # Lemmon, Jacobsen, Penoncello and Friend, J. Phys. Chem. Ref. Data 29 (2000) 331.
    "air": ("amount", {"nitrogen": 0.7812, "oxygen": 0.2096, "argon": 0.0092}),
    # ANSI/ASHRAE Standard 34, by mass.
    "r404a": ("mass", {"R125": 0.44, "R143a": 0.52, "R134a": 0.04}),
    "r407c": ("mass", {"R32": 0.23, "R125": 0.25, "R134a": 0.52}),
    "r410a": ("mass", {"R32": 0.50, "R125": 0.50}),
    "r507a": ("mass", {"R125": 0.50, "R143a": 0.50}),
}
"""Mixtures known by name, with their published composition."""

_OTHER_NAMES = {"dry air": "air", "r729": "air"}


def fluid_spec(
    fluid: str | Component | Mapping[str, Any],
    basis: Literal["amount", "mass"] = "amount",
    *,
    named: Callable[[str], Mapping[str, float] | None] | None = None,
) -> FluidSpec:
    """Resolve a fluid to its components and mole fractions.

    Components stand in the order of their CAS numbers, so that equal compositions are equal.

    Parameters
    ----------
    fluid
        A component, the name of a mixture, or a mapping of components to fractions (numbers, or
        texts such as "92 %").
    basis
        Whether the fractions of a mapping are by "amount" or by "mass".
    named
        A backend's own named mixtures, asked last.

    Raises
    ------
    UnknownComponent, AmbiguousComponent
        For a name.
    CompositionError
        For the fractions.
    """
    if basis not in ("amount", "mass"):
        raise CompositionError(composition=f"{fluid!r:.80}", reason=f"basis is {basis!r}")
    if isinstance(fluid, Mapping):
        return _of_fractions(fluid, basis, name=None)
    if isinstance(fluid, Component):
        return FluidSpec((fluid,), (1.0,), fluid.name)
    if not isinstance(fluid, str):
        raise CompositionError(
            composition=f"{fluid!r:.80}", reason="a fluid is a name or a mapping of fractions"
        )
    word = " ".join(fluid.lower().replace("r-", "r").split())
    word = _OTHER_NAMES.get(word, word)
    if word in NAMED_MIXTURES:
        mixture_basis, fractions = NAMED_MIXTURES[word]
        return _of_fractions(fractions, mixture_basis, name=word if word == "air" else word.upper())
    try:
        return FluidSpec((component(fluid),), (1.0,), fluid.strip())
    except UnknownComponent:
        own = named(fluid) if named is not None else None
        if own is None:
            raise
        return _of_fractions(own, "amount", name=fluid.strip())


def checked_spec(
    components: Sequence[Component], mole_fractions: Sequence[float], name: str | None = None
) -> FluidSpec:
    """Give a specification from mole fractions that were computed, zeros left out.

    Raises
    ------
    CompositionError
        Not one fraction for each component, a negative one, or a sum other than 1.
    """
    shown = f"{[c.name for c in components]!r:.100} in {list(mole_fractions)!r:.100}"
    if len(components) != len(mole_fractions):
        raise CompositionError(
            composition=shown,
            reason=f"{len(components)} components take as many fractions, not "
            f"{len(mole_fractions)}",
        )
    total = math.fsum(mole_fractions)
    if min(mole_fractions, default=0.0) < 0.0:
        raise CompositionError(composition=shown, reason="a fraction is negative")
    if not abs(total - 1.0) <= _CLOSING:
        raise CompositionError(composition=shown, reason=f"the fractions sum to {total:.9g}")
    kept = [(c, x) for c, x in zip(components, mole_fractions, strict=True) if x > 0.0]
    # What is off by round-off only stays as it is: a fluid that is reopened equals itself.
    exact = abs(total - 1.0) <= _ROUND_OFF
    return FluidSpec(
        tuple(c for c, _ in kept), tuple(x if exact else x / total for _, x in kept), name
    )


def _of_fractions(
    fractions: Mapping[str, Any], basis: Literal["amount", "mass"], name: str | None
) -> FluidSpec:
    shown = f"{dict(fractions)!r:.200}"
    parts: dict[Component, float] = {}
    for text, value in fractions.items():
        found = component(text)
        if found in parts:
            raise CompositionError(
                composition=shown, reason=f"{found.name} is given twice, the second time as {text}"
            )
        parts[found] = _fraction(value, found, shown)
    total = math.fsum(parts.values())
    if not parts or abs(total - 1.0) > _CLOSING:
        raise CompositionError(composition=shown, reason=f"the fractions sum to {total:.9g}")
    kept = sorted((c for c in parts if parts[c] > 0.0), key=lambda c: c.cas)
    amounts = [parts[c] / (c.molar_mass if basis == "mass" else 1.0) for c in kept]
    whole = math.fsum(amounts)
    return FluidSpec(tuple(kept), tuple(amount / whole for amount in amounts), name)


def _fraction(value: Any, part: Component, shown: str) -> float:
    number = to_si(value, FRACTION, f"fraction of {part.name}")
    if not isinstance(number, float):
        raise CompositionError(
            composition=shown, reason=f"the fraction of {part.name} is an array; one fluid has one"
        )
    if number < 0.0:
        raise CompositionError(
            composition=shown, reason=f"the fraction of {part.name} is negative ({number:g})"
        )
    return number
