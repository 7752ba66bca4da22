"""The unknowns of a balance: one rate from mass, one heat or work from energy."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace

import numpy as np

from lostwork.accounting.entries import Entries, summed
from lostwork.accounting.flows import Content, Stream
from lostwork.accounting.transfers import Heat, Work
from lostwork.errors import IllPosed
from lostwork.properties.backend import Column

__all__ = ["collect", "solve_energy"]


def collect(
    name: str,
    inflows: Sequence[Stream],
    outflows: Sequence[Stream],
    heat: Sequence[Heat],
    work: Sequence[Work],
    before: Sequence[Content],
    after: Sequence[Content],
) -> Entries:
    """Gather the entries of a step and find the one rate that the mass balance leaves open.

    Raises
    ------
    IllPosed
        Rates mixed with totals, nothing known, or more than one stream without a rate.
    """
    entries = Entries(
        inflows=tuple(inflows),
        outflows=tuple(outflows),
        heat=tuple(heat),
        work=tuple(work),
        before=tuple(before),
        after=tuple(after),
        per_time=_kind(name, (*inflows, *outflows, *heat, *work), bool(before or after)),
    )
    return _solve_rate(name, entries)


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
    if np.any(np.asarray(needed) < 0.0):
        raise IllPosed(
            balance=name,
            reason=f"the stream without a rate would have to flow backwards ({needed} kg)",
        )
    found = sought.with_mass(needed, per_time=entries.per_time)
    return replace(
        entries,
        inflows=tuple(found if s is sought else s for s in entries.inflows),
        outflows=tuple(found if s is sought else s for s in entries.outflows),
    )
