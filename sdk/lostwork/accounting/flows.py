"""Matter that crosses a boundary or stands inside it: Stream and Content."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, TypeAlias

import pint

from lostwork.accounting.arithmetic import anywhere
from lostwork.accounting.surroundings import Surroundings
from lostwork.errors import IllPosed
from lostwork.properties.backend import Column
from lostwork.properties.state import Matter, State
from lostwork.quantities import (
    AMOUNT,
    AMOUNT_RATE,
    LENGTH,
    MASS,
    MASS_RATE,
    VELOCITY,
    VOLUME,
    VOLUME_RATE,
    Dimension,
    quantity,
    to_si,
    to_si_any,
)

__all__ = ["GRAVITY", "Content", "Stream"]

Quantity: TypeAlias = "pint.Quantity[Any]"

GRAVITY = 9.80665
"""Standard acceleration of free fall, m/s2 (ISO 80000-3)."""


def _require_matter(state: Any, label: str) -> None:
    if not hasattr(state, "si") or not hasattr(state, "datum"):
        raise IllPosed(
            balance=label,
            reason=f"matter is a State or a GivenState, given first; got {state!r:.80}",
        )


def _mass_si(
    value: Any, state: Matter, dimensions: tuple[Dimension, Dimension, Dimension], field: str
) -> Column:
    """Mass (or mass rate) from a mass, an amount, or a volume at the state itself."""
    by_mass, by_amount, by_volume = dimensions
    number, dimension = to_si_any(value, (by_mass, by_amount, by_volume), field)
    if dimension is by_amount:
        if not isinstance(state, State):
            raise IllPosed(balance=field, reason="a given state has no molar mass; give a mass")
        number = number * state.fluid.molar_mass_si
    elif dimension is by_volume:
        number = number / state.si.v
    if anywhere(number < 0.0):
        raise IllPosed(
            balance=field,
            reason=f"{value} is negative; the direction is told by inflows and outflows",
        )
    return number


def _specific_mechanical(velocity: Any, elevation: Any) -> Column:
    kinetic: Column = 0.0
    if velocity is not None:
        w = to_si(velocity, VELOCITY, "velocity")
        kinetic = 0.5 * w * w
    if elevation is not None:
        kinetic = kinetic + GRAVITY * to_si(elevation, LENGTH, "elevation")
    return kinetic


@dataclass(frozen=True, slots=True)
class SiStream:
    """A stream in SI: kg/s (or kg), and kinetic and potential energy together, J/kg."""

    mass: Column | None
    mechanical: Column


class Stream:
    """Matter that crosses the boundary.

    Parameters
    ----------
    state
        A `State` or a `GivenState`.
    rate
        Flow by mass, by amount, or by volume at the state; for a step that runs steadily.
    mass
        Total that passes, by mass, amount or volume at the state; for a batch or a transient.
        With neither, the flow is the one unknown of the mass balance.
    velocity, elevation
        Optional; kinetic and potential energy then count.
    name
        Streams that leave one step and enter another are matched by name in an audit.
    """

    __slots__ = ("_si", "name", "per_time", "state")

    _si: SiStream
    state: Matter
    name: str
    per_time: bool | None

    def __init__(
        self,
        state: Matter,
        rate: Any = None,
        *,
        mass: Any = None,
        velocity: Any = None,
        elevation: Any = None,
        name: str = "",
    ) -> None:
        _require_matter(state, name or "stream")
        if rate is not None and mass is not None:
            raise IllPosed(balance=name or "stream", reason="give a rate or a mass, not both")
        number: Column | None = None
        if rate is not None:
            number = _mass_si(rate, state, (MASS_RATE, AMOUNT_RATE, VOLUME_RATE), "rate")
        elif mass is not None:
            number = _mass_si(mass, state, (MASS, AMOUNT, VOLUME), "mass")
        per_time = None if number is None else rate is not None
        self._fill(state, number, per_time, _specific_mechanical(velocity, elevation), name)

    @classmethod
    def from_si(
        cls,
        state: Matter,
        mass: Column | None,
        *,
        per_time: bool | None = True,
        mechanical: Column = 0.0,
        name: str = "",
    ) -> Stream:
        """Make a stream from SI numbers: kg/s (or kg), and kinetic plus potential energy, J/kg."""
        stream = object.__new__(cls)
        stream._fill(state, mass, per_time, mechanical, name)
        return stream

    def _fill(
        self,
        state: Matter,
        mass: Column | None,
        per_time: bool | None,
        mechanical: Column,
        name: str,
    ) -> None:
        put = object.__setattr__
        put(self, "state", state)
        put(self, "_si", SiStream(mass, mechanical))
        put(self, "per_time", per_time)
        put(self, "name", name)

    def __setattr__(self, name: str, value: object) -> None:
        raise AttributeError(f"a Stream cannot be changed: {name}")

    @property
    def si(self) -> SiStream:
        """Flow and mechanical energy in SI."""
        return self._si

    @property
    def rate(self) -> Quantity:
        """Mass flow, kg/s; or the mass that passes, kg."""
        return quantity(self._known_mass(), "kg/s" if self.per_time else "kg")

    @property
    def mass_si(self) -> Column:
        """Mass flow (kg/s) or mass (kg) as a plain number; an error while it is unknown."""
        mass = self._si.mass
        return self._known_mass() if mass is None else mass

    def exergy(self, site: Surroundings) -> Quantity:
        """Specific flow exergy with kinetic and potential parts, J/kg.

        (h - h0) - T0 (s - s0) + w^2/2 + g z, the dead state being the same fluid at T0, p0.
        """
        return quantity(self.exergy_si(site), "J/kg")

    def exergy_rate(self, site: Surroundings) -> Quantity:
        """Flow of exergy with the stream, W (or J for a total)."""
        return quantity(self._known_mass() * self.exergy_si(site), "W" if self.per_time else "J")

    def exergy_si(self, site: Surroundings) -> Column:
        """Specific flow exergy as a plain number, J/kg."""
        if not isinstance(self.state, State):
            raise IllPosed(
                balance=self.name or "stream",
                reason="a given state has no dead state, so it has no exergy of its own",
            )
        dead = site.dead_state(self.state.fluid)
        si = self.state.si
        return (si.h - dead.h) - dead.T * (si.s - dead.s) + self.si.mechanical

    def replaced(self, *, state: Matter | None = None, name: str | None = None) -> Stream:
        """Give the same flow with another state or another name."""
        return Stream.from_si(
            self.state if state is None else state,
            self.si.mass,
            per_time=self.per_time,
            mechanical=self.si.mechanical,
            name=self.name if name is None else name,
        )

    def with_mass(self, mass: Column, *, per_time: bool) -> Stream:
        """Give the same matter at another flow, kg/s or kg."""
        return Stream.from_si(
            self.state, mass, per_time=per_time, mechanical=self.si.mechanical, name=self.name
        )

    def _known_mass(self) -> Column:
        if self.si.mass is None:
            raise IllPosed(
                balance=self.name or "stream", reason="its rate is unknown until a balance finds it"
            )
        return self.si.mass

    def __reduce__(self) -> tuple[Any, ...]:
        return _restored_stream, (
            self.state,
            self.si.mass,
            self.per_time,
            self.si.mechanical,
            self.name,
        )

    def __repr__(self) -> str:
        unit = "kg/s" if self.per_time else "kg"
        flow = "unknown rate" if self.si.mass is None else f"{self.si.mass} {unit}"
        return f"Stream({self.name or self.state.label!r}, {flow}, {self.state!r})"


def _restored_stream(
    state: Matter, mass: Column | None, per_time: bool | None, mechanical: Column, name: str
) -> Stream:
    return Stream.from_si(state, mass, per_time=per_time, mechanical=mechanical, name=name)


class Content:
    """Matter that stands inside the boundary before or after.

    Parameters
    ----------
    state
        A `State`, or a `GivenState` with p and v.
    mass
        By mass, by amount, or by volume at the state.
    velocity, elevation
        Optional, of the whole content.
    name
        For messages.
    """

    __slots__ = ("mass_si", "mechanical", "name", "state")

    state: Matter
    mass_si: Column
    mechanical: Column
    name: str

    def __init__(
        self,
        state: Matter,
        mass: Any,
        *,
        velocity: Any = None,
        elevation: Any = None,
        name: str = "",
    ) -> None:
        _require_matter(state, name or "content")
        self._fill(
            state,
            _mass_si(mass, state, (MASS, AMOUNT, VOLUME), "mass"),
            _specific_mechanical(velocity, elevation),
            name,
        )

    @classmethod
    def from_si(
        cls, state: Matter, mass: Column, *, mechanical: Column = 0.0, name: str = ""
    ) -> Content:
        """Make a content from SI numbers: kg, and kinetic plus potential energy, J/kg."""
        content = object.__new__(cls)
        content._fill(state, mass, mechanical, name)
        return content

    def _fill(self, state: Matter, mass: Column, mechanical: Column, name: str) -> None:
        put = object.__setattr__
        put(self, "state", state)
        put(self, "mass_si", mass)
        put(self, "mechanical", mechanical)
        put(self, "name", name)

    def __setattr__(self, name: str, value: object) -> None:
        raise AttributeError(f"a Content cannot be changed: {name}")

    @property
    def mass(self) -> Quantity:
        """Mass, kg."""
        return quantity(self.mass_si, "kg")

    @property
    def volume(self) -> Quantity:
        """Volume, m3."""
        return quantity(self.mass_si * self.state.si.v, "m^3")

    def exergy(self, site: Surroundings) -> Quantity:
        """Exergy of the content, J: m [(u - u0) + p0 (v - v0) - T0 (s - s0) + w^2/2 + g z]."""
        if not isinstance(self.state, State):
            raise IllPosed(
                balance=self.name or "content",
                reason="a given state has no dead state, so it has no exergy of its own",
            )
        specific = self.state.exergy(site, closed=True).magnitude
        return quantity(self.mass_si * (specific + self.mechanical), "J")

    def __reduce__(self) -> tuple[Any, ...]:
        return _restored_content, (self.state, self.mass_si, self.mechanical, self.name)

    def __repr__(self) -> str:
        return f"Content({self.name or self.state.label!r}, {self.mass_si} kg, {self.state!r})"


def _restored_content(state: Matter, mass: Column, mechanical: Column, name: str) -> Content:
    return Content.from_si(state, mass, mechanical=mechanical, name=name)
