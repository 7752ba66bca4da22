"""The columns that a balance or a step brings together, each by a name a user would know it by."""

from __future__ import annotations

from collections.abc import Iterator

from lostwork.accounting.entries import Entries
from lostwork.accounting.flows import Content, Stream
from lostwork.accounting.surroundings import SiSurroundings
from lostwork.accounting.transfers import Heat, Work

__all__ = ["columns_of", "columns_of_balance"]

_FIELDS = (
    ("inflow", "inflows"),
    ("outflow", "outflows"),
    ("content before", "before"),
    ("content after", "after"),
    ("heat", "heat"),
    ("work", "work"),
)


def columns_of_balance(entries: Entries, site: SiSurroundings) -> Iterator[tuple[str, object]]:
    """Give every column of a balance with its name."""
    yield "T0", site.T
    yield "p0", site.p
    entry: Stream | Content | Heat | Work
    for what, field in _FIELDS:
        for place, entry in enumerate(getattr(entries, field), start=1):
            yield from columns_of(entry.name or f"{what} {place}", entry)


def columns_of(name: str, item: Stream | Content | Heat | Work) -> Iterator[tuple[str, object]]:
    """Give every column of one entry with its name."""
    if isinstance(item, Stream):
        yield name, item.state
        yield f"rate of {name}", item.si.mass
        yield f"velocity or elevation of {name}", item.si.mechanical
    elif isinstance(item, Content):
        yield name, item.state
        yield f"mass of {name}", item.mass_si
        yield f"velocity or elevation of {name}", item.mechanical
    else:
        yield name, item.si
        if isinstance(item, Heat):
            yield f"boundary temperature of {name}", item.T
