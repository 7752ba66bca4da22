"""Where steps join: what leaves one and enters another, and whether both ends agree."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from types import MappingProxyType
from typing import Generic, TypeVar

import numpy as np

from lostwork.accounting.flows import Content, Stream
from lostwork.errors import AuditError
from lostwork.properties.backend import Column, R
from lostwork.properties.state import Matter, State

__all__ = ["Joints", "Link", "match"]

Item = TypeVar("Item", Stream, Content)

# Of a given state neither molar mass nor temperature need be known; those of air serve as a scale.
_TYPICAL_MOLAR_MASS = 0.029
_TYPICAL_TEMPERATURE = 300.0


@dataclass(frozen=True)
class Link:
    """A stream or a content that leaves one step and enters another."""

    name: str
    leaves: str
    enters: str
    mismatch: str
    """What differs between the two ends; empty where they agree."""
    hidden: Column = 0.0
    """Entropy that the difference between the two ends, if any, carries: W/K (or J/K)."""


@dataclass(frozen=True)
class Joints(Generic[Item]):
    """Links between steps, and what enters or leaves the whole."""

    links: tuple[Link, ...]
    entering: tuple[Item, ...]
    leaving: tuple[Item, ...]


def match(
    steps: list[tuple[str, Sequence[Item], Sequence[Item]]],
    agreement: float,
    joined: Mapping[str, str] = MappingProxyType({}),
) -> Joints[Item]:
    """Match what leaves one step with what enters another, by name or by identity.

    Parameters
    ----------
    steps
        Name, what enters, what leaves.
    agreement
        Fraction within which both ends of a link must agree.
    joined
        Names under which things leave, each with the name under which it enters.

    Raises
    ------
    AuditError
        One thing leaves, or enters, two steps; or nothing leaves, or enters, under a joined name.
    """
    entering = _by_key([(name, item) for name, ins, _ in steps for item in ins], "enters", {})
    leaving = _by_key([(name, item) for name, _, outs in steps for item in outs], "leaves", joined)
    for name in joined.values():
        for verb, found in (("leaves", leaving), ("enters", entering)):
            if name not in found:
                raise AuditError(reason=f"{name!r} is joined, and nothing {verb} a step by it")
    links = tuple(
        Link(
            name=item.name or item.state.label,
            leaves=leaving[key][0],
            enters=step,
            mismatch=_mismatch(leaving[key][1], item, agreement),
            hidden=_hidden(leaving[key][1], item),
        )
        for key, (step, item) in entering.items()
        if key in leaving
    )
    return Joints(
        links=links,
        entering=tuple(item for key, (_, item) in entering.items() if key not in leaving),
        leaving=tuple(item for key, (_, item) in leaving.items() if key not in entering),
    )


def _by_key(
    items: list[tuple[str, Item]], verb: str, joined: Mapping[str, str]
) -> dict[object, tuple[str, Item]]:
    found: dict[object, tuple[str, Item]] = {}
    for step, item in items:
        key: object = joined.get(item.name, item.name) or id(item)
        if key in found:
            name = item.name or item.state.label
            raise AuditError(
                reason=f"{name!r} {verb} both {found[key][0]!r} and {step!r}; divide it "
                "with a splitting step, or give each part a name of its own"
            )
        found[key] = (step, item)
    return found


def _mismatch(leaves: Item, enters: Item, agreement: float) -> str:
    """Say what differs between the two ends of a link, on a scale that no datum can move."""
    if leaves is enters:
        return ""
    a, b = leaves.state, enters.state
    if a.datum != b.datum:
        return f"datum is {a.datum} where it leaves and {b.datum} where it enters"
    entropy = R / _molar_mass(a)
    scales = (
        ("mass", "kg", leaves.mass_si, enters.mass_si, np.abs(leaves.mass_si)),
        ("h", "J/kg", a.si.h, b.si.h, entropy * _temperature(a)),
        ("s", "J/kg/K", a.si.s, b.si.s, entropy),
    )
    return "; ".join(
        _shown(name, unit, np.asarray(y) - x)
        for name, unit, x, y, scale in scales
        if np.any(np.abs(np.asarray(x) - y) > agreement * np.asarray(scale))
    )


def _hidden(leaves: Item, enters: Item) -> Column:
    if leaves is enters or leaves.state.datum != enters.state.datum:
        return 0.0
    carried: Column = np.abs(
        leaves.mass_si * leaves.state.si.s - enters.mass_si * enters.state.si.s
    )
    return carried


def _molar_mass(state: Matter) -> float:
    return state.fluid.molar_mass_si if isinstance(state, State) else _TYPICAL_MOLAR_MASS


def _temperature(state: Matter) -> Column:
    return state.si.T if isinstance(state, State) else _TYPICAL_TEMPERATURE


def _shown(name: str, unit: str, excess: Column) -> str:
    values = np.ravel(excess)
    largest = float(values[np.nanargmax(np.abs(values))])
    reach = "" if values.size == 1 else "up to "
    word = "more" if largest > 0.0 else "less"
    return f"{name} is {reach}{abs(largest):.4g} {unit} {word} where it enters than where it leaves"
