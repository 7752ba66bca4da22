"""Throttling: an adiabatic let-down without work."""

from __future__ import annotations

from typing import ClassVar

import numpy as np

import lostwork as lw
from lostwork_plugins.flow.entropy_split import entropy_of_drop, let_down
from lostwork_plugins.flow.pressures import lowered_pressure
from lostwork_plugins.flow.purposes import measured_where
from lostwork_plugins.flow.step import Alternatives, FlowStep

__all__ = ["Throttling"]


class Throttling(FlowStep):
    """A valve, an orifice, a capillary or a porous plug: h_2 = h_1, sigma = m (s_2 - s_1).

    Kinetic and potential energy of the stream are carried through.

    Raises
    ------
    ProcessError
        The outlet pressure is above the inlet pressure.

    Notes
    -----
    Above the temperature of the surroundings nothing is gained by throttling, and the step has no
    efficiency.  Below it, cold is made out of pressure; flow exergy is parted at (T0, p) into a
    thermal and a pressure component, and the efficiency is the rise of the one over the fall of
    the other (Kotas, The Exergy Method of Thermal Plant Analysis, 1985, ch. 3 and 4).

    Let-down can freeze, hydrate, embrittle and fling solids, and oxygen needs its own rules; this
    step sizes no valve and no relief device.  Follow local codes and licensed practice.
    """

    trade_name: ClassVar[str] = "throttling"

    inlet: lw.Stream
    """The stream that enters."""
    p_out: lw.Pressure | None = None
    """Outlet pressure."""
    pressure_ratio: lw.Ratio | None = None
    """Inlet over outlet pressure."""
    pressure_drop: lw.PressureDrop | None = None
    """Inlet less outlet pressure."""

    alternatives: ClassVar[tuple[Alternatives, ...]] = (
        Alternatives(("p_out", "pressure_ratio", "pressure_drop")),
    )

    def solve(self) -> lw.Solution:
        """Find the outlet at the inlet enthalpy."""
        refusals, feed = self.refusals, self.inflow(self.inlet)
        p_out = lowered_pressure(self, refusals, feed.p)
        outlet = let_down(refusals, feed, p_out)
        return lw.Solution(
            outlets={"outlet": self.stream("outlet", outlet, feed)},
            mechanisms={"pressure drop": entropy_of_drop(feed, outlet)},
            remainder="pressure drop",
        )

    def purpose(self, balance: lw.Balance) -> lw.Purpose | None:
        """Pressure exergy expended for thermal exergy, where the outlet is colder than T0."""
        feed, outlet = self.inflow(self.inlet), self.outlet.state
        T0 = balance.surroundings.si.T
        cold = np.asarray(outlet.si.T) < np.asarray(T0)
        if not cold.any():
            return None
        try:
            before = feed.fluid.state_si(("T", "p"), T0, feed.p).si
            after = feed.fluid.state_si(("T", "p"), T0, outlet.si.p).si
        except lw.PropertyError:
            # Without the fluid at T0 and the pressures of the step there are no components.
            return None
        spent = feed.mass * ((before.h - after.h) - T0 * (before.s - after.s))
        destroyed = T0 * feed.mass * (outlet.si.s - feed.s)
        gained = spent - destroyed
        with np.errstate(invalid="ignore"):
            measured = cold & np.asarray((gained > 0.0) & (spent > 0.0))
        return measured_where(
            measured,
            expended=spent,
            recovered=gained,
            expended_name="pressure exergy given up",
            recovered_name="thermal exergy gained below ambient",
        )
