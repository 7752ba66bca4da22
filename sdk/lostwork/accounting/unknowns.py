"""The unknowns of a balance: one rate from mass, one heat or work from energy."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace
from typing import TypeVar

import numpy as np

from lostwork._shapes import common_shape
from lostwork.accounting.arithmetic import anywhere, size
from lostwork.accounting.entries import Entries, summed
from lostwork.accounting.flows import Content, Stream
from lostwork.accounting.shapes import columns_of_balance
from lostwork.accounting.surroundings import SiSurroundings
from lostwork.accounting.transfers import Heat, Work
from lostwork.errors import IllPosed
from lostwork.properties.backend import Column

__all__ = ["collect", "solve_energy"]

Kind = TypeVar("Kind", Stream, Heat, Work, Content)

_ROUND_OFF = 1e-14


def collect(
    name: str,
    inflows: Sequence[Stream],
    outflows: Sequence[Stream],
    heat: Sequence[Heat],
    work: Sequence[Work],
    before: Sequence[Content],
    after: Sequence[Content],
    site: SiSurroundings,
) -> Entries:
    """Gather the entries of a step and find the one rate that the mass balance leaves open.

    Raises
    ------
    IllPosed
        Not lists of what they should hold, rates mixed with totals, nothing known, or more than one
        stream without a rate.
    ShapesDiffer
        Arrays of different lengths.
    """
    entries = Entries(
        inflows=_listed(name, "inflows", inflows, Stream),
        outflows=_listed(name, "outflows", outflows, Stream),
        heat=_listed(name, "heat", heat, Heat),
        work=_listed(name, "work", work, Work),
        before=_listed(name, "before", before, Content),
        after=_listed(name, "after", after, Content),
        per_time=_kind(name, (*inflows, *outflows, *heat, *work), bool(before or after)),
    )
    if 0 in common_shape(name, columns_of_balance(entries, site)):
        raise IllPosed(balance=name, reason="its arrays are empty; give one row or more")
    return _solve_rate(name, entries)


def _listed(name: str, field: str, items: Sequence[Kind], kind: type[Kind]) -> tuple[Kind, ...]:
    if isinstance(items, kind):
        raise IllPosed(balance=name, reason=f"{field} takes a list; put the {kind.__name__} in [ ]")
    try:
        listed = tuple(items)
    except TypeError as error:
        raise IllPosed(
            balance=name, reason=f"{field} takes a list of {kind.__name__}; got {items!r:.80}"
        ) from error
    for item in listed:
        if not isinstance(item, kind):
            raise IllPosed(
                balance=name,
                reason=f"{field} takes a list of {kind.__name__}; in it is {item!r:.80}",
            )
    return listed


def solve_energy(
    name: str, entries: Entries, residual: Callable[[Entries], Column]
) -> tuple[Entries, bool]:
    """Find the one unknown heat or work; tell whether there was one.

    Parameters
    ----------
    name
        Of the balance.
    entries
        With every rate known.
    residual
        Energy residual of entries whose heat and work are all known.

    Raises
    ------
    IllPosed
        More than one heat or work is unknown.
    """
    count = sum(q.si is None for q in entries.heat) + sum(w.si is None for w in entries.work)
    if count == 0:
        return entries, False
    if count > 1:
        raise IllPosed(balance=name, reason="more than one heat or work is unknown")
    needed = -residual(_with_unknown(entries, 0.0))
    return _with_unknown(entries, needed), True


def _with_unknown(entries: Entries, amount: Column) -> Entries:
    per_time = entries.per_time
    return replace(
        entries,
        heat=tuple(
            Heat.from_si(amount, q.T, per_time=per_time, name=q.name) if q.si is None else q
            for q in entries.heat
        ),
        work=tuple(
            Work.from_si(amount, per_time=per_time, name=w.name) if w.si is None else w
            for w in entries.work
        ),
    )


def _kind(name: str, items: Sequence[Stream | Heat | Work], contents: bool) -> bool:
    """Whether the balance is one of rates; refuse a mixture of rates and totals."""
    kinds = {item.per_time for item in items} - {None}
    if contents:
        kinds.add(False)
    if len(kinds) > 1:
        raise IllPosed(
            balance=name,
            reason="rates (kg/s, kW) and totals (kg, kJ) are mixed; a step with contents before "
            "and after takes totals, streams with mass= instead of rate=",
        )
    if not kinds:
        raise IllPosed(
            balance=name, reason="nothing is known: give a rate, a heat, a work or contents"
        )
    return bool(kinds.pop())


def _solve_rate(name: str, entries: Entries) -> Entries:
    """Find the one stream without a rate from the mass balance."""
    unknown = [s for s in (*entries.inflows, *entries.outflows) if s.si.mass is None]
    if not unknown:
        return entries
    if len(unknown) > 1:
        raise IllPosed(balance=name, reason="more than one stream has no rate")
    sought = unknown[0]
    needed = (
        summed(s.mass_si for s in entries.inflows if s is not sought)
        - summed(s.mass_si for s in entries.outflows if s is not sought)
        + summed(c.mass_si for c in entries.before)
        - summed(c.mass_si for c in entries.after)
    )
    if any(s is sought for s in entries.inflows):
        needed = -needed
    needed = _without_round_off(needed, summed(size(mass) for mass in _known_masses(entries)))
    if anywhere(needed < 0.0):
        unit = "kg/s" if entries.per_time else "kg"
        raise IllPosed(
            balance=name,
            reason=f"the stream without a rate, {sought.name or sought.state.label}, would have to "
            f"flow backwards ({needed} {unit})",
        )
    found = sought.with_mass(needed, per_time=entries.per_time)
    return replace(
        entries,
        inflows=tuple(found if s is sought else s for s in entries.inflows),
        outflows=tuple(found if s is sought else s for s in entries.outflows),
    )


def _known_masses(entries: Entries) -> list[Column]:
    streams = [s.si.mass for s in (*entries.inflows, *entries.outflows) if s.si.mass is not None]
    return [*streams, *(c.mass_si for c in (*entries.before, *entries.after))]


def _without_round_off(needed: Column, scale: Column) -> Column:
    """Give zero for what is left over by the rounding of the sum alone."""
    if isinstance(needed, np.ndarray):
        return np.where(size(needed) <= _ROUND_OFF * scale, 0.0, needed)
    return 0.0 if abs(needed) <= _ROUND_OFF * scale else needed
