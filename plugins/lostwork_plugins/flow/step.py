"""What all steady-flow steps share: alternatives among their fields, and their streams in SI."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, ClassVar

from pydantic import ConfigDict

import lostwork as lw
from lostwork_plugins.flow.rows import Refusals

__all__ = ["Alternatives", "FlowStep", "Inflow"]


@dataclass(frozen=True)
class Alternatives:
    """Fields of which a certain number is to be given: one, unless said otherwise."""

    names: tuple[str, ...]
    least: int = 1
    most: int = 1

    def problem(self, given: set[str]) -> tuple[str, str] | None:
        """Say what is wrong with the fields that are given, if anything."""
        present = [name for name in self.names if name in given]
        if self.least <= len(present) <= self.most:
            return None
        listed = ", ".join(self.names)
        count = {(0, 1): "at most one", (1, 1): "exactly one", (2, 2): "exactly two"}
        wanted = count[(self.least, self.most)]
        found = ", ".join(present) if present else "none"
        return present[-1] if present else self.names[0], f"give {wanted} of {listed}; got {found}"


@dataclass(frozen=True)
class Inflow:
    """One stream that enters, in SI: K, Pa, J/kg, J/kg/K, kg/s (or kg)."""

    state: lw.State
    fluid: lw.Fluid
    T: lw.Column
    p: lw.Column
    h: lw.Column
    s: lw.Column
    mass: lw.Column
    mechanical: lw.Column
    per_time: bool


class FlowStep(lw.Process):
    """Base of the steady-flow steps.

    Raises
    ------
    FieldError
        Too few or too many of alternative fields, or a field without the one it needs.
    """

    model_config = ConfigDict(use_attribute_docstrings=True)

    alternatives: ClassVar[tuple[Alternatives, ...]] = ()
    together: ClassVar[tuple[tuple[tuple[str, ...], str], ...]] = ()
    """Fields of which any one needs another field, which means nothing without them."""

    def __init__(self, /, **fields: Any) -> None:
        super().__init__(**fields)
        given = self.given_fields
        problems = [choice.problem(given) for choice in self.alternatives]
        for needing, needed in self.together:
            present = [name for name in needing if name in given]
            if present and needed not in given:
                problems.append((needed, f"is needed with {present[0]}"))
            if needed in given and not present:
                problems.append((needed, f"means nothing without {' or '.join(needing)}"))
        found = tuple(problem for problem in problems if problem is not None)
        if found:
            raise lw.FieldError(process=self.label, problems=found)

    @property
    def given_fields(self) -> set[str]:
        """Names of the fields that were given a value."""
        values = {name: getattr(self, name) for name in type(self).model_fields}
        return {name for name, value in values.items() if value is not None and value is not False}

    @property
    def work_in(self) -> lw.Column:
        """All work that the step takes, W (or J); negative where it gives work."""
        return sum(work.si for work in self.solution.work if work.si is not None)

    @property
    def refusals(self) -> Refusals:
        """A fresh list of what this step refuses."""
        return Refusals(self.label)

    def inflow(self, stream: lw.Stream) -> Inflow:
        """Take a stream that enters apart into SI numbers.

        Raises
        ------
        ProcessError
            Its rate is not known, or its state is given without a fluid to compute with.
        """
        state = stream.state
        if not isinstance(state, lw.State):
            raise lw.ProcessError(
                process=self.label,
                reason=f"the stream {stream.name or state.label!r} has given properties and no "
                "fluid; use as-measured, or make its state with a Fluid",
            )
        if stream.si.mass is None:
            raise lw.ProcessError(
                process=self.label,
                reason=f"the rate of the stream {stream.name or state.label!r} is not known; give "
                "it a rate",
            )
        si = state.si
        return Inflow(
            state=state,
            fluid=state.fluid,
            T=si.T,
            p=si.p,
            h=si.h,
            s=si.s,
            mass=stream.mass_si,
            mechanical=stream.si.mechanical,
            per_time=bool(stream.per_time),
        )

    def energy(self, field: str, per_time: bool) -> lw.Column:
        """Give a duty field in W for streams with a rate, in J for a batch.

        Raises
        ------
        ProcessError
            The field is a power where an energy is needed, or the other way round.
        """
        value = getattr(self, field)
        is_power = value.is_compatible_with("W")
        if is_power is not per_time:
            wanted = "a power (the streams have rates)" if per_time else "an energy (for a batch)"
            raise lw.ProcessError(process=self.label, reason=f"{field} is to be {wanted}")
        number: lw.Column = value.magnitude
        return number

    def stream(
        self,
        outlet: str,
        state: lw.State,
        feed: Inflow,
        *,
        mass: lw.Column | None = None,
        mechanical: lw.Column | None = None,
    ) -> lw.Stream:
        """Make an outlet that carries the flow and the mechanical energy of `feed` on."""
        return lw.Stream.from_si(
            state,
            feed.mass if mass is None else mass,
            per_time=feed.per_time,
            mechanical=feed.mechanical if mechanical is None else mechanical,
            name=self.stream_name(outlet),
        )
