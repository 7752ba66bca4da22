"""A charge led slowly from one state to another."""

from __future__ import annotations

from typing import ClassVar, Literal

import numpy as np

from lostwork import (
    Balance,
    Column,
    Content,
    Heat,
    Path,
    Pressure,
    Process,
    ProcessError,
    Purpose,
    Ratio,
    Solution,
    State,
    Temperature,
    Work,
)
from lostwork_plugins.closed.worth import given_by_expansion, taken_by_compression

__all__ = ["QuasiStaticPath", "state_of"]


def state_of(charge: Content, label: str) -> State:
    """State of a charge, which a process needs computed and not merely given."""
    if not isinstance(charge.state, State):
        raise ProcessError(
            process=label, reason="its charge has given properties; give a State of a Fluid"
        )
    return charge.state


class QuasiStaticPath(Process):
    """A charge that passes through states of equilibrium, one property held.

    Held: T, s (reversible and adiabatic), p, v, or "polytropic" (p v^n with `exponent`).  Exactly
    one of `p_end`, `T_end` and `volume_ratio` (volume after over volume before) ends it.

    Heat crosses at `heat_at` where that is given, and the difference from the charge's own
    temperature then generates entropy; otherwise it comes from bodies that keep pace with the
    charge, and the path is reversible.
    """

    trade_name: ClassVar[str] = "quasi-static-path"

    charge: Content
    held: Literal["T", "s", "p", "v", "polytropic"]
    exponent: Ratio | None = None
    p_end: Pressure | None = None
    T_end: Temperature | None = None
    volume_ratio: Ratio | None = None
    heat_at: Temperature | None = None

    def path(self) -> Path:
        """Give the path itself: states on the way, work and heat per kilogram."""
        state = state_of(self.charge, self.label)
        ends = {
            name: value
            for name, value in (
                ("p", self.p_end),
                ("T", self.T_end),
                ("v", None if self.volume_ratio is None else self.volume_ratio * state.v),
            )
            if value is not None
        }
        if len(ends) != 1:
            raise ProcessError(
                process=self.label, reason="give exactly one of p_end, T_end and volume_ratio"
            )
        return Path.quasi_static(state, held=self.held, until=ends, exponent=self.exponent)

    def solve(self) -> Solution:
        """End state, boundary work and heat."""
        path = self.path()
        mass = self.charge.mass_si
        q = mass * path.heat.magnitude
        change = mass * (path.end.si.s - path.start.si.s)
        after = Content.from_si(path.end, mass, name=self.stream_name("charge"))
        heat = _heat(q, change, path.start.si.T, None if self.heat_at is None else self.si.heat_at)
        return Solution(
            after={"charge": after},
            heat=heat,
            work=(Work.from_si(mass * path.work.magnitude, per_time=False, name="boundary"),),
            remainder="heat transfer",
        )

    def purpose(self, balance: Balance) -> Purpose | None:
        """Useful work from exergy where the charge grows, exergy from work where it shrinks."""
        grows = np.asarray(balance.books.entries.volume_change) > 0.0
        if np.all(grows):
            return given_by_expansion(balance)
        return taken_by_compression(balance) if not np.any(grows) else None


def _heat(q: Column, change: Column, T: Column, boundary: Column | None) -> tuple[Heat, ...]:
    if not np.any(np.asarray(q) != 0.0):
        return ()
    if boundary is not None:
        return (Heat.from_si(q, boundary, per_time=False, name="reservoir"),)
    with np.errstate(invalid="ignore", divide="ignore"):
        # Where no heat flows its temperature is nobody's; q / change would be 0 K or nothing.
        flows = (np.asarray(change) != 0.0) & (np.asarray(q) != 0.0)
        mean = np.where(flows, np.asarray(q) / change, T)
    return (
        Heat.from_si(
            q, mean if mean.shape else float(mean), per_time=False, name="bodies that keep pace"
        ),
    )
