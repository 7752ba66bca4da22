"""From the tables of a case to fluids, streams, charges and solved steps."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass, field
from typing import Any, TypeAlias

import numpy as np

from lostwork.accounting.flows import Content, Stream
from lostwork.accounting.surroundings import Surroundings
from lostwork.cases.energies import heat_of, work_of
from lostwork.cases.layout import ChargeTable, FluidTable, Layout, StreamTable
from lostwork.cases.problems import Problems, nearest
from lostwork.cases.slots import Slot
from lostwork.cases.wiring import Plan, Reference, Wiring, split_reference
from lostwork.errors import LostworkError, OutOfLimits, PluginError, PropertyError
from lostwork.plugins import plugins
from lostwork.processes.contract import Process
from lostwork.properties.fluid import Fluid
from lostwork.properties.state import State
from lostwork.quantities import AMOUNT, MASS, PRESSURE, VOLUME, quantity, to_si

__all__ = ["Built", "Report", "build", "read_surroundings"]

Report: TypeAlias = Callable[[int, int, str], None]
"""Called with how many parts are done, how many there are, and what comes next."""

_AMOUNTS = {"mass": MASS, "amount": AMOUNT, "volume": VOLUME}


@dataclass(frozen=True)
class Built:
    """Everything a case describes, solved; `steps` in the order in which they were solved."""

    fluids: Mapping[str, Fluid] = field(default_factory=dict)
    streams: Mapping[str, Stream] = field(default_factory=dict)
    charges: Mapping[str, Content] = field(default_factory=dict)
    steps: Mapping[str, Process] = field(default_factory=dict)
    joined: Mapping[str, str] = field(default_factory=dict)
    """Names of outlets, each with the name of the stated stream that it closes a loop with."""


def read_surroundings(layout: Layout, file: str) -> Surroundings:
    """Read T0 and p0.

    Raises
    ------
    CaseError
        One of them cannot be read.
    """
    problems = Problems(file)
    table = layout.surroundings
    for name in ("T", "p"):
        # Each by itself, so that two mistakes are told at once.
        probe = {"T": "300 K", "p": "1 bar", name: getattr(table, name)}
        try:
            Surroundings(**probe)
        except LostworkError as error:
            problems.wrap("surroundings", error, field=name, renamed={"T0": "T", "p0": "p"})
    problems.require_none()
    return Surroundings(T=table.T, p=table.p)


def build(
    layout: Layout,
    wiring: Wiring,
    site: Surroundings,
    *,
    file: str,
    backend: str | None = None,
    report: Report | None = None,
) -> Built:
    """Open the fluids, fix the states and solve the steps in their order.

    Parameters
    ----------
    backend
        Replaces the backend of every fluid.
    report
        Told of every fluid and step before it is worked on.

    Raises
    ------
    CaseError
        Lists every fluid, stream, charge and step that cannot be made.  What depends on one of
        these is not tried.
    """
    return _Building(layout, wiring, site, file, backend, report).run()


class _Building:
    def __init__(
        self,
        layout: Layout,
        wiring: Wiring,
        site: Surroundings,
        file: str,
        backend: str | None,
        report: Report | None,
    ) -> None:
        self._layout, self._wiring = layout, wiring
        self._backend, self._report = backend, report
        self._problems = Problems(file)
        barometer = site.si.p
        # A sweep of p0 is no barometer; a gauge pressure is then refused as without one.
        self._barometer = None if isinstance(barometer, np.ndarray) else float(barometer)
        self._fluids: dict[str, Fluid] = {}
        self._streams: dict[str, Stream] = {}
        self._charges: dict[str, Content] = {}
        self._steps: dict[str, Process] = {}

    def run(self) -> Built:
        total = len(self._layout.fluids) + len(self._wiring.plans)
        done = 0
        for name, table in self._layout.fluids.items():
            self._tell(done, total, f"fluid {name}")
            self._open_fluid(name, table)
            done += 1
        for name, stream in self._layout.streams.items():
            self._make_stream(name, stream)
        for name, charge in self._layout.charges.items():
            self._make_charge(name, charge)
        for plan in self._wiring.plans:
            self._tell(done, total, f"step {plan.name}")
            self._solve_step(plan)
            done += 1
        joined = dict(self._loops())
        self._problems.require_none()
        return Built(self._fluids, self._streams, self._charges, self._steps, joined)

    def _tell(self, done: int, total: int, what: str) -> None:
        if self._report is not None:
            self._report(done, total, what)

    # --- matter ---

    def _open_fluid(self, name: str, table: FluidTable) -> None:
        place = f"fluids.{name}"
        backend = self._backend_of(table)
        if backend is None:
            known = ", ".join(plugins().backends)
            self._problems.add(
                place, "backend", f"is missing here and in [case]; expected one of {known}"
            )
            return
        try:
            self._fluids[name] = Fluid(
                table.components,
                backend=backend,
                basis=table.basis,
                **self._options(table, backend),
            )
        except PluginError as error:
            self._problems.wrap(place, error, field="backend")
        except PropertyError as error:
            blamed = "options" if "option" in str(error) and table.options else "components"
            self._problems.wrap(place, error, field=blamed)
        except LostworkError as error:
            self._problems.wrap(place, error, fields=FluidTable.model_fields)

    def _backend_of(self, table: FluidTable) -> str | None:
        stated = table.backend or self._layout.case.backend
        chosen = self._backend or stated
        if chosen is None or (self._backend is None and table.backend is not None):
            return chosen
        return table.instead_of.get(chosen, chosen)

    def _options(self, table: FluidTable, backend: str) -> dict[str, Any]:
        """Give the options of one backend; plain ones belong to the backend the file states."""
        stated = table.backend or self._layout.case.backend
        options = table.options
        plain = {name: value for name, value in options.items() if not isinstance(value, dict)}
        own = options.get(backend, {})
        return {**(plain if backend == stated else {}), **own}

    def _make_stream(self, name: str, table: StreamTable) -> None:
        place = f"streams.{name}"
        state = self._state(place, table)
        if state is None:
            return
        try:
            self._streams[name] = Stream(
                state,
                table.rate,
                mass=table.mass,
                velocity=table.velocity,
                elevation=table.elevation,
                name=name,
            )
        except LostworkError as error:
            self._problems.wrap(place, error, fields=StreamTable.model_fields, field="rate")

    def _make_charge(self, name: str, table: ChargeTable) -> None:
        place = f"charges.{name}"
        given = [word for word in _AMOUNTS if getattr(table, word) is not None]
        if len(given) != 1:
            self._problems.add(
                place,
                ", ".join(given) or "mass",
                f"expected one of {', '.join(_AMOUNTS)}, got {len(given)} of them",
            )
        state = self._state(place, table)
        if state is None or len(given) != 1:
            return
        word = given[0]
        try:
            dimension = _AMOUNTS[word]
            number = to_si(getattr(table, word), dimension, word)
            self._charges[name] = Content(
                state,
                quantity(number, dimension.unit),
                velocity=table.velocity,
                elevation=table.elevation,
                name=name,
            )
        except LostworkError as error:
            self._problems.wrap(place, error, fields=ChargeTable.model_fields, field=word)

    def _state(self, place: str, table: StreamTable | ChargeTable) -> State | None:
        if table.fluid not in self._layout.fluids:
            meant = nearest(table.fluid, self._layout.fluids)
            self._problems.add(place, "fluid", f"{table.fluid!r} is no table of [fluids]; {meant}")
            return None
        fluid = self._fluids.get(table.fluid)
        if fluid is None:
            return None
        given = table.properties
        try:
            if "p" in given:
                given["p"] = self._absolute(given["p"], "p")
            return fluid.state(zero=table.zero, **given)
        except OutOfLimits as error:
            self._problems.wrap(place, error, fields=given, field=" and ".join(given))
        except LostworkError as error:
            self._problems.wrap(place, error, field=" and ".join(given) or "T and p")
        return None

    def _absolute(self, value: Any, name: str) -> Any:
        """Read a pressure, by the barometer where it is above it."""
        return quantity(to_si(value, PRESSURE, name, barometer=self._barometer), PRESSURE.unit)

    # --- steps ---

    def _solve_step(self, plan: Plan) -> None:
        fields: dict[str, Any] = {}
        whole = True
        for name, value in plan.values.items():
            try:
                resolved = self._resolved(plan, plan.slots[name], value)
            except LostworkError as error:
                self._problems.wrap(plan.table, error, field=name)
                whole = False
                continue
            whole = whole and resolved is not None
            fields[name] = resolved
        if not whole:
            return
        try:
            step = plan.process(name=plan.name, **fields)
            _ = step.solution
        except LostworkError as error:
            by_use = sorted(plan.values, key=lambda name: plan.slots[name].is_reference)
            self._problems.wrap(plan.table, error, fields=by_use)
            return
        self._steps[plan.name] = step

    def _resolved(self, plan: Plan, slot: Slot, value: Any) -> Any:
        """Give what the process takes for a field; ``None`` where it hangs on what failed."""
        if slot.is_reference:
            return _each(value, lambda text: self._found(plan, slot, split_reference(text)))
        if slot.takes_heat:
            return _each(value, lambda entry: heat_of(entry, slot.name), tables=False)
        if slot.takes_work:
            return _each(value, lambda entry: work_of(entry, slot.name), tables=False)
        if slot.is_absolute_pressure:
            return self._absolute(value, slot.name)
        return value

    def _loops(self) -> Iterator[tuple[str, str]]:
        for name, table in self._layout.streams.items():
            reference = split_reference(table.closes or "")
            if reference.owner in self._steps:
                place = (f"streams.{name}", "closes")
                outlet = self._picked(place, reference, self._steps[reference.owner].outlets)
                if outlet is not None:
                    yield outlet.name, name

    def _found(self, plan: Plan, slot: Slot, reference: Reference) -> Any:
        owner = reference.owner
        if owner in self._layout.streams:
            return self._streams.get(owner)
        if owner in self._layout.charges:
            return self._charges.get(owner)
        step = self._steps.get(owner)
        if step is None:
            return None
        return self._picked((plan.table, slot.name), reference, self._offered(step, slot))

    def _picked(
        self, place: tuple[str, str], reference: Reference, offered: Mapping[str, Any]
    ) -> Any:
        """Give what a reference means of all that a step offers; ``None`` where it is not there."""
        if reference.part in offered:
            return offered[reference.part]
        if not reference.part and len(offered) == 1:
            return next(iter(offered.values()))
        full = [f"{reference.owner}.{part}" for part in offered]
        text = (
            f"{str(reference)!r} is no single outlet; expected one of {', '.join(full) or 'none'}"
            if not reference.part
            else f"{str(reference)!r} is not there; {nearest(str(reference), full)}"
        )
        self._problems.add(*place, text)
        return None

    @staticmethod
    def _offered(step: Process, slot: Slot) -> Mapping[str, Any]:
        offered: dict[str, Any] = {}
        if Stream in slot.flows:
            offered.update(step.outlets)
        if Content in slot.flows:
            offered.update(step.solution.after)
        return offered


def _each(value: Any, made: Callable[[Any], Any], *, tables: bool = True) -> Any:
    """Make every entry of a list (or of a table of names); ``None`` where one cannot be made."""
    if tables and isinstance(value, dict):
        named = {name: made(entry) for name, entry in value.items()}
        return None if any(entry is None for entry in named.values()) else named
    if not isinstance(value, list):
        return made(value)
    every = tuple(made(entry) for entry in value)
    return None if any(entry is None for entry in every) else every
