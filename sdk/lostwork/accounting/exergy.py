"""The second route to the loss: the exergy balance.

    X_destroyed = sum(m b)_in - sum(m b)_out + sum(Q (1 - T0 / T_boundary))
                      + W + p0 (V_after - V_before) - (X_after - X_before)

It must equal T0 sigma (Gouy 1889, Stodola 1898).  Where fluids of several compositions meet, b
includes the Gibbs energy of each at its dead state, so that mixing and reaction count by both
routes.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from lostwork.accounting.books import Books
from lostwork.accounting.entries import Entry, known, summed
from lostwork.accounting.surroundings import Surroundings
from lostwork.errors import InternalDisagreement, PropertyError
from lostwork.properties.backend import Column
from lostwork.properties.fluid import Fluid
from lostwork.properties.state import DeadState, Matter, State

__all__ = ["Exergy", "exergy_route"]

_AGREEMENT = 1e-8


@dataclass(frozen=True)
class Exergy:
    """Exergy destroyed by the exergy balance, W (or J), and what its flows were counted from."""

    destroyed: Column
    basis: str


def exergy_route(books: Books, surroundings: Surroundings) -> Exergy:
    """Exergy destroyed by the exergy balance, checked against T0 sigma.

    The flows are counted from their dead states.  Where one of them has none (water against frozen
    surroundings, or given h and s), all are counted from the datum instead: in a balance that
    closes, the zero cancels.

    Raises
    ------
    InternalDisagreement
        The two routes differ by more than round-off.
    """
    T0, p0 = surroundings.si.T, surroundings.si.p
    entries = books.entries
    dead = _dead_states(entries.matter, surroundings)

    def flow(state: Matter) -> Column:
        zero = books.zero
        if dead is None or not isinstance(state, State):
            return zero.h(state) - T0 * zero.s(state)
        at_rest, si = dead[state.fluid], state.si
        thermomechanical = (si.h - at_rest.h) - T0 * (si.s - at_rest.s)
        composition = (at_rest.h - zero.h_zero(state)) - T0 * (at_rest.s - zero.s_zero(state))
        return thermomechanical + composition

    def charge(state: Matter) -> Column:
        value: Column = flow(state) - (state.si.p - p0) * state.si.v
        return value

    destroyed = (
        summed(s.mass_si * (flow(s.state) + s.si.mechanical) for s in entries.inflows)
        - summed(s.mass_si * (flow(s.state) + s.si.mechanical) for s in entries.outflows)
        + summed(c.mass_si * (charge(c.state) + c.mechanical) for c in entries.before)
        - summed(c.mass_si * (charge(c.state) + c.mechanical) for c in entries.after)
        + summed(known(q.si) * (1.0 - T0 / q.T) for q in entries.heat)
        + entries.work_total
        + p0 * entries.volume_change
    )
    _require_agreement(destroyed, books, T0)
    return Exergy(destroyed=destroyed, basis="datum" if dead is None else "dead state")


def _require_agreement(destroyed: Column, books: Books, T0: Column) -> None:
    by_entropy = T0 * books.sigma + books.energy_residual
    scale = books.energy_scale + np.abs(T0 * books.sigma)
    with np.errstate(invalid="ignore"):
        apart = np.abs(destroyed - by_entropy) > _AGREEMENT * scale
    if np.any(apart):
        raise InternalDisagreement(
            what="exergy destroyed", first=str(destroyed), second=f"T0 sigma = {by_entropy}"
        )


def _dead_states(matter: list[Entry], surroundings: Surroundings) -> dict[Fluid, DeadState] | None:
    """Dead state of every fluid in the balance; ``None`` where one has none."""
    dead: dict[Fluid, DeadState] = {}
    for state, _ in matter:
        if not isinstance(state, State):
            return None
        try:
            dead[state.fluid] = surroundings.dead_state(state.fluid)
        except PropertyError:
            return None
    return dead
