"""Whether the matter of a balance can be one set of books: datums, components, elements.

A kilogram of oxygen that leaves as a kilogram of nitrogen closes in mass and is nonsense all the
same, so compositions are compared component by component, and element by element where components
are made or consumed.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from lostwork.accounting.arithmetic import anywhere, larger, ratio, size
from lostwork.accounting.entries import Entry, summed
from lostwork.errors import DatumMismatch
from lostwork.properties.backend import Column
from lostwork.properties.components import Component
from lostwork.properties.datum import Datum
from lostwork.properties.formation import formation
from lostwork.properties.state import State

__all__ = ["Conservation", "check_datums", "conservation"]


_SAME_FRACTION = 1e-12


@dataclass(frozen=True)
class Conservation:
    """What became of the components: one composition, conserved, reacting, or not closing."""

    one_composition: bool
    reacting: bool
    residual: Column
    """Largest residual of a component (of an element, where components react), as a fraction."""
    worst: str
    """The component or element with the largest residual."""


def check_datums(entries: list[Entry], closing: float) -> None:
    """Refuse to subtract across datums.

    What is counted from a zero of its own may pass through beside the others, as a brine does on
    one side of an evaporator: as much leaves as enters, and the zero cancels.

    Raises
    ------
    DatumMismatch
        Two of the states count h and s from different zeros, and one turns into the other.
    """
    by_datum: dict[Datum, list[Entry]] = {}
    for state, mass in entries:
        by_datum.setdefault(state.datum, []).append((state, mass))
    if len(by_datum) < 2:
        return
    for group in by_datum.values():
        masses = [mass for _, mass in group]
        if anywhere(size(summed(masses)) > closing * _gross(masses)):
            first = group[0][0]
            second = next(state for state, _ in entries if state.datum != first.datum)
            raise DatumMismatch(
                first=first.label,
                second=second.label,
                reason=f"{first.datum} against {second.datum}",
            )


def conservation(entries: list[Entry], closing: float) -> Conservation:
    """Compare the components that enter with those that leave.

    Parameters
    ----------
    entries
        Every stream and content with its signed mass.
    closing
        Fraction of the largest flow within which a component counts as conserved.

    Raises
    ------
    DatumMismatch
        Components react, and one of them has no formation data.
    """
    states = [(state, mass) for state, mass in entries if isinstance(state, State)]
    if len(states) < len(entries) or _same_composition(states):
        return Conservation(True, reacting=False, residual=0.0, worst="")
    by_component: dict[Component, list[Column]] = {}
    for state, mass in states:
        spec = state.fluid.spec
        for component, fraction in zip(spec.components, spec.mass_fractions, strict=True):
            by_component.setdefault(component, []).append(mass * fraction)
    total = summed(size(mass) for _, mass in states)
    residual, worst = _largest({c.name: ratio(summed(m), total) for c, m in by_component.items()})
    if not anywhere(residual > closing):
        return Conservation(False, reacting=False, residual=residual, worst=worst)
    return _by_elements(by_component)


def _same_composition(states: list[tuple[State, Column]]) -> bool:
    first = states[0][0].fluid.spec if states else None
    return all(
        state.fluid.spec is first
        or (
            first is not None
            and state.fluid.spec.components == first.components
            and all(
                abs(x - y) <= _SAME_FRACTION
                for x, y in zip(state.fluid.spec.mole_fractions, first.mole_fractions, strict=True)
            )
        )
        for state, _ in states
    )


def _by_elements(by_component: dict[Component, list[Column]]) -> Conservation:
    atoms: dict[str, list[Column]] = {}
    gross: Column = 0.0
    for component, masses in by_component.items():
        for element, count in component.elements:
            amounts = [count * mass / component.molar_mass for mass in masses]
            atoms.setdefault(element, []).extend(amounts)
            gross = gross + summed(size(amount) for amount in amounts)
    residual, worst = _largest({element: ratio(summed(n), gross) for element, n in atoms.items()})
    unformed = [
        component.name
        for component, masses in by_component.items()
        if formation(component) is None and anywhere(size(summed(masses)) > 1e-9 * _gross(masses))
    ]
    if unformed:
        raise DatumMismatch(
            first=unformed[0],
            second="the components it reacts with",
            reason="it is made or consumed and no formation data are known for it",
        )
    return Conservation(False, reacting=True, residual=residual, worst=worst)


def _gross(masses: list[Column]) -> Column:
    return summed(size(mass) for mass in masses)


def _largest(residuals: dict[str, Column]) -> tuple[Column, str]:
    """Give the largest residual of each row, and the name that has the largest of all."""
    worst = max(residuals, key=lambda name: _largest_known(residuals[name]))
    largest: Column = 0.0
    for value in residuals.values():
        largest = larger(largest, size(value))
    return largest, worst


def _largest_known(value: Column) -> float:
    sizes = np.ravel(size(value))
    return float(np.max(sizes, where=np.isfinite(sizes), initial=0.0))
