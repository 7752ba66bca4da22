"""What each field of a process type takes, read off its annotations.

A case needs to know which fields are streams, charges, heat or work, to be resolved from names and
tables, and which are absolute pressures, to which the barometer applies.
"""

from __future__ import annotations

import enum
import types
import typing
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any

from lostwork.accounting.flows import Content, Stream
from lostwork.accounting.transfers import Heat, Work
from lostwork.errors import PluginFailed
from lostwork.plugins import plugins
from lostwork.processes.contract import Process
from lostwork.processes.fields import Takes
from lostwork.quantities import PRESSURE, Dimension

__all__ = ["OWN_FIELDS", "Slot", "process_class", "slots"]

OWN_FIELDS = frozenset({"name", "type"})
"""What the case fills in itself, or reads itself."""

_FLOWS = (Stream, Content, Heat, Work)
_SEVERAL = (tuple, list, set, frozenset)


@dataclass(frozen=True)
class Slot:
    """One field of a process type.

    `flows` are the kinds of flow it takes, `dimensions` the quantities, `choices` the words.
    """

    name: str
    needed: bool
    flows: frozenset[type[Any]]
    several: bool
    by_name: bool
    dimensions: tuple[Dimension, ...]
    choices: tuple[str, ...]
    plain: tuple[str, ...]
    default: Any
    summary: str

    @property
    def is_reference(self) -> bool:
        """Whether it takes the name of a stream or of a charge."""
        return bool(self.flows & {Stream, Content})

    @property
    def takes_heat(self) -> bool:
        """Whether it takes heat."""
        return Heat in self.flows

    @property
    def takes_work(self) -> bool:
        """Whether it takes work."""
        return Work in self.flows

    @property
    def is_absolute_pressure(self) -> bool:
        """Whether it takes a pressure that a gauge may tell."""
        return PRESSURE in self.dimensions


def process_class(name: str) -> type[Process]:
    """Import the class of a process type.

    Raises
    ------
    PluginError
        There is none, it cannot be loaded, or it is no process type.
    """
    descriptor = plugins().process(name)
    found = descriptor.load()
    if not (isinstance(found, type) and issubclass(found, Process)):
        raise PluginFailed(
            plugin=descriptor.plugin or name,
            stage="load",
            reason=f"{descriptor.target} is no class of Process",
        )
    return found


def slots(process: type[Process]) -> dict[str, Slot]:
    """Give the fields of a process type that a case may set, by name."""
    return {
        name: _slot(name, info)
        for name, info in process.model_fields.items()
        if name not in OWN_FIELDS
    }


def _slot(name: str, info: Any) -> Slot:
    leaves = list(_leaves(info.annotation, tuple(info.metadata), several=False, by_name=False))
    flows = frozenset(leaf.kind for leaf in leaves if leaf.kind in _FLOWS)
    dimensions = [
        entry.dimension for leaf in leaves for entry in leaf.metadata if isinstance(entry, Takes)
    ]
    plain = [
        _PLAIN[leaf.kind] for leaf in leaves if isinstance(leaf.kind, type) and leaf.kind in _PLAIN
    ]
    return Slot(
        name=name,
        needed=info.is_required(),
        flows=flows,
        several=any(leaf.several for leaf in leaves),
        by_name=any(leaf.by_name for leaf in leaves),
        dimensions=tuple(dict.fromkeys(dimensions)),
        choices=tuple(choice for leaf in leaves for choice in _choices(leaf.kind)),
        plain=tuple(dict.fromkeys(plain)),
        default=None if info.is_required() else info.get_default(call_default_factory=True),
        summary=" ".join((info.description or "").split()),
    )


@dataclass(frozen=True)
class _Leaf:
    kind: Any
    metadata: tuple[Any, ...]
    several: bool
    by_name: bool


_PLAIN: dict[type[Any], str] = {
    str: "text",
    bool: "true or false",
    int: "a whole number",
    float: "a number",
}


def _leaves(
    annotation: Any, metadata: tuple[Any, ...], *, several: bool, by_name: bool
) -> Iterator[_Leaf]:
    """Go down an annotation to the single types it is made of, with what is said of each."""
    origin, inner = typing.get_origin(annotation), typing.get_args(annotation)
    if origin is typing.Annotated:
        first, *said = inner
        yield from _leaves(first, (*metadata, *said), several=several, by_name=by_name)
    elif origin in (typing.Union, types.UnionType):
        for part in inner:
            yield from _leaves(part, metadata, several=several, by_name=by_name)
    elif isinstance(origin, type) and issubclass(origin, Mapping) and len(inner) == 2:
        yield from _leaves(inner[1], metadata, several=several, by_name=True)
    elif origin in _SEVERAL or (isinstance(origin, type) and hasattr(origin, "__getitem__")):
        # A quantity is a generic type too, but holds no parts to go down to.
        if not _is_sequence(origin):
            yield _Leaf(origin, metadata, several, by_name)
            return
        for part in inner:
            if part is not Ellipsis:
                yield from _leaves(part, metadata, several=True, by_name=by_name)
    else:
        yield _Leaf(annotation, metadata, several, by_name)


def _is_sequence(origin: Any) -> bool:
    return origin in _SEVERAL or getattr(origin, "__module__", "") == "collections.abc"


def _choices(kind: Any) -> tuple[str, ...]:
    if typing.get_origin(kind) is typing.Literal:
        return tuple(str(choice) for choice in typing.get_args(kind))
    if isinstance(kind, type) and issubclass(kind, enum.Enum):
        return tuple(str(member.value) for member in kind)
    return ()
