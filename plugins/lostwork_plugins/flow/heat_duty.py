"""Heating and cooling of one stream, by a reservoir or by electricity.

    Q = m (h_2 - h_1)        sigma = m (s_2 - s_1) - Q / T_reservoir

A reservoir keeps its temperature whatever it gives or takes: condensing steam, boiling refrigerant,
a large flow of cooling water, the surroundings.
"""

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
from lostwork_plugins.flow.purposes import exergy_gain, measured_where, one_gives_one_gains
from lostwork_plugins.flow.rows import Refusals
from lostwork_plugins.flow.step import Alternatives, FlowStep, Inflow

__all__ = ["Cooling", "Heating"]


class _HeatDuty(FlowStep):
    """One stream that takes up or gives off heat, with a pressure drop."""

    sense: ClassVar[float]
    """+1 where the stream takes heat up, -1 where it gives it off."""
    opposite: ClassVar[str]

    inlet: lw.Stream
    """The stream that enters."""
    T_out: lw.Temperature | None = None
    """Outlet temperature."""
    duty: lw.Duty | None = None
    """Heat taken up by a heater, given off to a cooler; positive for both."""
    quality_out: lw.Fraction | None = None
    """Mass fraction of vapour at the outlet."""
    p_out: lw.Pressure | None = None
    """Outlet pressure; the inlet pressure unless given."""
    pressure_drop: lw.PressureDrop | None = None
    """Inlet less outlet pressure."""

    alternatives: ClassVar[tuple[Alternatives, ...]] = (
        Alternatives(("T_out", "duty", "quality_out")),
        Alternatives(("p_out", "pressure_drop"), least=0),
    )

    def _outlet(self, refusals: Refusals, feed: Inflow, p_out: lw.Column) -> lw.State:
        if self.T_out is not None:
            outlet = refusals.state(feed.fluid, ("T", "p"), self.si.T_out, p_out)
        elif self.quality_out is not None:
            outlet = refusals.state(feed.fluid, ("p", "quality"), p_out, self.si.quality_out)
        else:
            duty = self.energy("duty", feed.per_time)
            refusals.add(
                np.asarray(feed.mass) <= 0.0,
                "a duty is given and nothing flows; give the inlet a rate above zero",
            )
            with np.errstate(divide="ignore", invalid="ignore"):
                h = feed.h + self.sense * np.divide(duty, feed.mass)
            outlet = refusals.state(feed.fluid, ("p", "h"), p_out, h)
        with np.errstate(invalid="ignore"):
            backwards = self.sense * (outlet.si.h - feed.h) < -1e-6 * feed.p * feed.state.si.v
        refusals.add(
            backwards,
            f"{self.trade_name} would change the enthalpy by {{rise:.6g}} J/kg, from {{T:.6g}} K "
            f"to {{end:.6g}} K; change the outlet, or take a {self.opposite} step",
            rise=outlet.si.h - feed.h,
            T=feed.T,
            end=outlet.si.T,
        )
        return outlet

    def _against_reservoir(self, boundary: lw.Column) -> lw.Solution:
        refusals, feed = self.refusals, self.inflow(self.inlet)
        p_out = lowered_pressure(self, refusals, feed.p)
        fallen = let_down(refusals, feed, p_out)
        outlet = self._outlet(refusals, feed, p_out)
        heat = feed.mass * (outlet.si.h - feed.h)
        refuse_uphill_heat(refusals, outlet.si.T, heat, boundary)
        outlet = refusals.mark(outlet)
        heat = feed.mass * (outlet.si.h - feed.h)
        return lw.Solution(
            outlets={"outlet": self.stream("outlet", outlet, feed)},
            heat=(lw.Heat.from_si(heat, boundary, per_time=feed.per_time, name="reservoir"),),
            mechanisms={
                "pressure drop": entropy_of_drop(feed, fallen),
                "heat transfer": entropy_in_heat(feed, fallen, outlet, heat, boundary),
            },
            remainder="heat transfer",
        )

    def _exchanged_exergy(self, balance: lw.Balance) -> lw.Purpose | None:
        """Stream and heat: whoever loses exergy gives it, whoever gains it is what it is for."""
        T0 = balance.surroundings.si.T
        gain = exergy_gain(self.inflow(self.inlet), self.outlet, T0)
        heat = self.solution.heat[0]
        to_reservoir = -np.asarray(heat.si) * (1.0 - T0 / np.asarray(heat.T))
        return one_gives_one_gains(to_reservoir, gain, "reservoir", "stream")


class Heating(_HeatDuty):
    """A stream heated by a reservoir at a stated temperature, or by electricity.

    Q = m (h_2 - h_1), sigma = m (s_2 - s_1) - Q / T_reservoir; electric heat carries no entropy.
    Below the temperature of the surroundings roles turn: a cold stream that is warmed gives
    exergy to what it cools.

    Raises
    ------
    ProcessError
        The stream would be cooled, or the reservoir is colder than the outlet.

    Notes
    -----
    A heated vessel or line that is shut in gains pressure; fired and electric heaters follow local
    codes and licensed practice.  Moran and Shapiro, Fundamentals of Engineering Thermodynamics,
    ch. 6 and 7.
    """

    trade_name: ClassVar[str] = "heating"
    sense: ClassVar[float] = 1.0
    opposite: ClassVar[str] = "cooling"

    at: lw.Temperature | None = None
    """Temperature of the reservoir."""
    electric: bool = False
    """Whether electricity heats the stream."""

    alternatives: ClassVar[tuple[Alternatives, ...]] = (
        *_HeatDuty.alternatives,
        Alternatives(("at", "electric")),
    )

    def solve(self) -> lw.Solution:
        """Find the outlet and the heat or the electricity taken."""
        if self.at is not None:
            return self._against_reservoir(self.si.at)
        refusals, feed = self.refusals, self.inflow(self.inlet)
        p_out = lowered_pressure(self, refusals, feed.p)
        fallen = let_down(refusals, feed, p_out)
        outlet = refusals.mark(self._outlet(refusals, feed, p_out))
        power = feed.mass * (outlet.si.h - feed.h)
        return lw.Solution(
            outlets={"outlet": self.stream("outlet", outlet, feed)},
            work=(lw.Work.from_si(power, per_time=feed.per_time, name="electricity"),),
            mechanisms={
                "pressure drop": entropy_of_drop(feed, fallen),
                "electric dissipation": feed.mass * (outlet.si.s - fallen.si.s),
            },
            remainder="electric dissipation",
        )

    def purpose(self, balance: lw.Balance) -> lw.Purpose | None:
        """Exergy of the heat, or electricity, for the rise of the exergy of the stream."""
        if self.at is not None:
            return self._exchanged_exergy(balance)
        gain = exergy_gain(self.inflow(self.inlet), self.outlet, balance.surroundings.si.T)
        with np.errstate(invalid="ignore"):
            rises = np.asarray(gain) > 0.0
        return measured_where(
            rises,
            expended=self.work_in,
            recovered=gain,
            expended_name="electricity",
            recovered_name="exergy gained by the stream",
        )


class Cooling(_HeatDuty):
    """A stream cooled against a reservoir at a stated temperature.

    Q = m (h_2 - h_1) < 0, sigma = m (s_2 - s_1) - Q / T_reservoir.  Against the surroundings the
    exergy of the stream is thrown away, and there is no purpose to measure; against a hotter
    reservoir heat is recovered; against a reservoir colder than the surroundings the stream gains
    exergy by growing cold.

    Raises
    ------
    ProcessError
        The stream would be heated, or the reservoir is hotter than the outlet.

    Notes
    -----
    Moran and Shapiro, Fundamentals of Engineering Thermodynamics, ch. 6 and 7.
    """

    trade_name: ClassVar[str] = "cooling"
    sense: ClassVar[float] = -1.0
    opposite: ClassVar[str] = "heating"

    at: lw.Temperature
    """Temperature of the reservoir."""

    def solve(self) -> lw.Solution:
        """Find the outlet and the heat given off."""
        return self._against_reservoir(self.si.at)

    def purpose(self, balance: lw.Balance) -> lw.Purpose | None:
        """Exergy of stream and heat, whichever gives and whichever gains."""
        return self._exchanged_exergy(balance)
