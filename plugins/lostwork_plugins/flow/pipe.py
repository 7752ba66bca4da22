"""A pipe: pressure drop and heat leak along a line."""

from __future__ import annotations

from typing import ClassVar

import numpy as np

import lostwork as lw
from lostwork_plugins.flow.entropy_split import (
    entropy_in_heat,
    entropy_of_drop,
    let_down,
    refuse_uphill_heat,
)
from lostwork_plugins.flow.pressures import lowered_pressure
from lostwork_plugins.flow.step import Alternatives, FlowStep

__all__ = ["Pipe"]


class Pipe(FlowStep):
    """A line with a pressure drop and a heat leak; one outlet, named "outlet".

    h_2 = h_1 + Q / m, sigma = m (s_2 - s_1) - Q / T_boundary.  Without heat_leak and T_out the line
    is insulated.  Kinetic and potential energy are carried through.  A line has no purpose of its
    own to measure.

    Raises
    ------
    ProcessError
        The pressure would rise, or the leak would go from the colder to the hotter.

    Notes
    -----
    The pressure drop is an input, and the step says nothing of the strength of the line or of what
    happens when it is shut in; that follows local codes and licensed practice.  Bejan, Entropy
    Generation Minimization, 1996, ch. 4.
    """

    trade_name: ClassVar[str] = "pipe"

    inlet: lw.Stream
    """The stream that enters."""
    p_out: lw.Pressure | None = None
    """Outlet pressure."""
    pressure_drop: lw.PressureDrop | None = None
    """Inlet less outlet pressure."""
    heat_leak: lw.Duty | None = None
    """Heat that leaks into the line; negative where it leaks out."""
    T_out: lw.Temperature | None = None
    """Outlet temperature; the leak is then a result."""
    heat_leak_at: lw.Temperature | None = None
    """Temperature of the boundary that the leak crosses, for example that of the air outside."""

    alternatives: ClassVar[tuple[Alternatives, ...]] = (
        Alternatives(("p_out", "pressure_drop"), least=0),
        Alternatives(("heat_leak", "T_out"), least=0),
    )
    together: ClassVar[tuple[tuple[tuple[str, ...], str], ...]] = (
        (("heat_leak", "T_out"), "heat_leak_at"),
    )

    def solve(self) -> lw.Solution:
        """Find the outlet and the leak."""
        refusals, feed = self.refusals, self.inflow(self.inlet)
        p_out = lowered_pressure(self, refusals, feed.p)
        fallen = let_down(refusals, feed, p_out)
        if self.heat_leak_at is None:
            return lw.Solution(
                outlets={"outlet": self.stream("outlet", fallen, feed)},
                mechanisms={"pressure drop": entropy_of_drop(feed, fallen)},
                remainder="pressure drop",
            )
        if self.T_out is not None:
            outlet = refusals.state(feed.fluid, ("T", "p"), self.si.T_out, p_out)
        else:
            leak = self.energy("heat_leak", feed.per_time)
            refusals.add(
                np.asarray(feed.mass) <= 0.0,
                "a heat_leak is given and nothing flows; give the inlet a rate above zero",
            )
            with np.errstate(divide="ignore", invalid="ignore"):
                h = feed.h + np.divide(leak, feed.mass)
            outlet = refusals.state(feed.fluid, ("p", "h"), p_out, h)
        boundary = self.si.heat_leak_at
        heat = feed.mass * (outlet.si.h - feed.h)
        refuse_uphill_heat(refusals, outlet.si.T, heat, boundary)
        outlet = refusals.mark(outlet)
        heat = feed.mass * (outlet.si.h - feed.h)
        return lw.Solution(
            outlets={"outlet": self.stream("outlet", outlet, feed)},
            heat=(lw.Heat.from_si(heat, boundary, per_time=feed.per_time, name="heat leak"),),
            mechanisms={
                "pressure drop": entropy_of_drop(feed, fallen),
                "heat transfer": entropy_in_heat(feed, fallen, outlet, heat, boundary),
            },
            remainder="heat transfer",
        )
