"""Everything that crosses the boundary of a step or stands inside it, in one place."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from functools import cached_property
from typing import TypeAlias

from lostwork.accounting.flows import Content, Stream
from lostwork.accounting.transfers import Heat, Work
from lostwork.errors import IllPosed
from lostwork.properties.backend import Column
from lostwork.properties.state import Matter

__all__ = ["Entries", "Entry", "known", "summed"]

Entry: TypeAlias = tuple[Matter, Column]
"""Matter and its signed mass: positive what comes in or stood inside before."""


@dataclass(frozen=True)
class Entries:
    """Streams, heat, work and contents of one step; rates when `per_time`, else totals."""

    inflows: tuple[Stream, ...]
    outflows: tuple[Stream, ...]
    heat: tuple[Heat, ...]
    work: tuple[Work, ...]
    before: tuple[Content, ...]
    after: tuple[Content, ...]
    per_time: bool

    @cached_property
    def matter(self) -> list[Entry]:
        """Every stream and content with its signed mass."""
        entries: list[Entry] = [(s.state, s.mass_si) for s in self.inflows]
        entries += [(c.state, c.mass_si) for c in self.before]
        entries += [(s.state, -s.mass_si) for s in self.outflows]
        entries += [(c.state, -c.mass_si) for c in self.after]
        return entries

    @cached_property
    def heat_total(self) -> Column:
        """All heat into the system, W (or J)."""
        return summed(known(q.si) for q in self.heat)

    @cached_property
    def work_total(self) -> Column:
        """All work into the system, W (or J)."""
        return summed(known(w.si) for w in self.work)

    @cached_property
    def volume_change(self) -> Column:
        """Growth of the volume that the contents take up, m3."""
        return summed(c.mass_si * c.state.si.v for c in self.after) - summed(
            c.mass_si * c.state.si.v for c in self.before
        )


def known(value: Column | None) -> Column:
    """Give an amount that must be known by now."""
    if value is None:
        raise IllPosed(balance="books", reason="a heat or a work is still unknown")
    return value


def summed(values: Iterable[Column]) -> Column:
    """Sum of floats and arrays; 0.0 for none."""
    total: Column = 0.0
    for value in values:
        total = total + value
    return total
