"""How the steps of a case hang together: types, references and the order in which to solve."""

from __future__ import annotations

import graphlib
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any

from lostwork.accounting.flows import Content, Stream
from lostwork.accounting.transfers import Heat, Work
from lostwork.cases.layout import Layout
from lostwork.cases.problems import Problems, nearest
from lostwork.cases.slots import Slot, process_class, slots
from lostwork.errors import CircularReference, LostworkError
from lostwork.plugins import plugins
from lostwork.processes.contract import Process

__all__ = ["Plan", "Reference", "Wiring", "references", "split_reference", "taken_by", "wire"]


@dataclass(frozen=True)
class Reference:
    """A name in a step: of a stream, of a charge, or of an outlet of another step."""

    owner: str
    part: str = ""

    def __str__(self) -> str:
        return f"{self.owner}.{self.part}" if self.part else self.owner


@dataclass(frozen=True)
class Plan:
    """One step before it is solved."""

    name: str
    trade_name: str
    process: type[Process]
    slots: Mapping[str, Slot]
    values: Mapping[str, Any]
    needs: tuple[str, ...]
    """Steps whose outlets it takes."""

    @property
    def table(self) -> str:
        """Its table in the case file."""
        return f"steps.{self.name}"


@dataclass(frozen=True)
class Wiring:
    """The steps in the order in which they can be solved, and the streams that none takes."""

    plans: tuple[Plan, ...]
    unused: tuple[str, ...]


def wire(layout: Layout, file: str) -> Wiring:
    """Check every step against its type, and find the order of the steps.

    Raises
    ------
    CircularReference
        Steps feed each other.
    CaseError
        Lists every type, field and reference that is wrong.
    """
    problems = Problems(file)
    plans = {}
    for name, table in layout.steps.items():
        plan = _plan(name, table, layout, problems)
        if plan is not None:
            plans[name] = plan
    problems.require_none()
    order = _order(plans, file)
    taken = {str(reference) for plan in plans.values() for _, reference in references(plan)}
    _check_loops(layout, taken, problems)
    problems.require_none()
    given = [*layout.streams, *layout.charges]
    return Wiring(
        plans=tuple(plans[name] for name in order),
        unused=tuple(name for name in given if name not in taken),
    )


def _check_loops(layout: Layout, taken: set[str], problems: Problems) -> None:
    """A stream that closes a loop enters a step, and what it closes enters none."""
    for name, table in layout.streams.items():
        if table.closes is None:
            continue
        reference = split_reference(table.closes)
        if reference.owner not in layout.steps:
            text = f"{table.closes!r} is no step; {nearest(table.closes, layout.steps)}"
        elif str(reference) in taken:
            text = f"{table.closes!r} enters a step already; expected an outlet that enters none"
        elif name not in taken:
            text = "this stream enters no step; expected one that takes what comes back"
        else:
            continue
        problems.add(f"streams.{name}", "closes", text)


def references(plan: Plan) -> Iterator[tuple[str, Reference]]:
    """Give every reference of a step with its field."""
    for field, value in plan.values.items():
        if plan.slots[field].is_reference:
            for text in _texts(value):
                yield field, split_reference(text)


def split_reference(text: str) -> Reference:
    """Divide "step.outlet" into the step and its outlet."""
    owner, _, part = text.strip().partition(".")
    return Reference(owner, part)


def _plan(name: str, table: dict[str, Any], layout: Layout, problems: Problems) -> Plan | None:
    place = f"steps.{name}"
    process = _process_of(place, table.get("type"), problems)
    if process is None:
        return None
    known = slots(process)
    values = {field: value for field, value in table.items() if field not in ("type", "note")}
    if "closing" in known and "closing" not in values and layout.case.closing is not None:
        values["closing"] = layout.case.closing
    trade_name = table["type"]
    before = len(problems)
    for field in values:
        if field == "name":
            problems.add(place, field, "the name of a step is that of its table; leave it out")
        elif field not in known:
            text = f"is no field of {trade_name}; {nearest(field, known)}"
            problems.add(place, field, text)
    for field, slot in known.items():
        if slot.needed and field not in values:
            listed = ", ".join(known)
            problems.add(place, field, f"is missing; expected {taken_by(slot)}. Fields: {listed}")
    for field, value in values.items():
        if field in known and _holds_nothing(value):
            text = f"holds an empty list; expected {taken_by(known[field])}"
            problems.add(place, field, text)
        elif field in known and known[field].is_reference:
            _check_references(place, known[field], value, layout, problems)
    if len(problems) > before:
        return None
    plan = Plan(name, trade_name, process, known, values, ())
    needs = {ref.owner: None for _, ref in references(plan) if ref.owner in layout.steps}
    return Plan(name, trade_name, process, known, values, tuple(needs))


def _process_of(place: str, trade_name: Any, problems: Problems) -> type[Process] | None:
    installed = plugins().processes
    if not isinstance(trade_name, str) or not trade_name:
        problems.add(
            place, "type", f"is missing or no text; expected one of {', '.join(installed)}"
        )
        return None
    try:
        return process_class(trade_name)
    except LostworkError as error:
        problems.wrap(place, error, field="type")
    return None


def _check_references(
    place: str, slot: Slot, value: Any, layout: Layout, problems: Problems
) -> None:
    texts = list(_texts(value))
    fits = isinstance(value, dict) if slot.by_name else isinstance(value, list) == slot.several
    if not fits or not texts or not all(isinstance(text, str) and text for text in texts):
        problems.add(place, slot.name, f"expected {taken_by(slot)}, got {value!r:.60}")
        return
    known = (
        *(layout.streams if Stream in slot.flows else ()),
        *(layout.charges if Content in slot.flows else ()),
        *layout.steps,
    )
    for text in texts:
        reference = split_reference(text)
        if reference.owner not in known or (reference.part and reference.owner not in layout.steps):
            problems.add(
                place,
                slot.name,
                f"{text!r} is {_neither(slot)}; {nearest(text, known)}",
            )


def taken_by(slot: Slot) -> str:
    """Say what a field takes, with an example."""
    if slot.is_reference:
        one = f"the name of {_defined_as(slot)}"
        return _of_one(slot, one)
    if Heat in slot.flows:
        text = 'a heat such as {amount = "-30 kW", at = "80 degC"}; amount may be "unknown"'
    elif Work in slot.flows:
        text = 'a work such as "150 kW", or "unknown"'
    elif slot.choices:
        text = f"one of {', '.join(slot.choices)}"
    elif slot.dimensions:
        text = " or ".join(_quantity_words(dimension) for dimension in slot.dimensions)
    else:
        text = " or ".join(slot.plain) or "a value"
    return _of_one(slot, text)


def _of_one(slot: Slot, one: str) -> str:
    if slot.by_name:
        return f"a table of names, each with {one}"
    return f"a list, each entry {one}" if slot.several else one


def _quantity_words(dimension: Any) -> str:
    return f"{dimension.name}, for example {dimension.example}"


def _defined_as(slot: Slot) -> str:
    words = []
    if Stream in slot.flows:
        words.append("a stream, or of a step whose outlet it is")
    if Content in slot.flows:
        words.append("a charge, or of a step whose content it is afterwards")
    return ", or of ".join(words)


def _holds_nothing(value: Any) -> bool:
    if not isinstance(value, list):
        return False
    return not value or any(_holds_nothing(entry) for entry in value)


def _neither(slot: Slot) -> str:
    kinds = [word for kind, word in ((Stream, "stream"), (Content, "charge")) if kind in slot.flows]
    return f"neither a {' nor a '.join([*kinds, 'step'])}"


def _texts(value: Any) -> Iterator[Any]:
    if isinstance(value, list):
        for entry in value:
            yield from _texts(entry)
    elif isinstance(value, dict):
        for entry in value.values():
            yield from _texts(entry)
    else:
        yield value


def _order(plans: Mapping[str, Plan], file: str) -> list[str]:
    sorter = graphlib.TopologicalSorter({name: plan.needs for name, plan in plans.items()})
    try:
        return list(sorter.static_order())
    except graphlib.CycleError as error:
        raise CircularReference(file=file, circle=tuple(error.args[1])) from error
