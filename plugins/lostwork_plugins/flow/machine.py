"""What compressors, pumps, turbines and expanders share.

Work of the fluid, with h_s the enthalpy at the outlet pressure and the inlet entropy:

    compression   w = (h_s - h_1) / eta_s         expansion   w = -eta_s (h_1 - h_s)

or, with a polytropic efficiency, from the path in `turbomachine`; or, with a measured outlet
temperature, from the energy balance, and the efficiency is then a result.  The outlet has
h_2 = h_1 + w - q, q being the heat lost by the casing.

Entropy generated is split as if the machine ran adiabatically and the heat were lost at the outlet
pressure afterwards:

    friction        m [s(p_2, h_1 + w) - s_1], and the lost shaft power over its temperature
    heat transfer   m [s_2 - s(p_2, h_1 + w)] + Q / T_boundary

Heat that leaves an expander where the fluid is still hot may cross a boundary hotter than the
outlet; the second term is then below zero and is taken off the first.
(Bejan, Advanced Engineering Thermodynamics, ch. 3; Moran and Shapiro, Fundamentals of Engineering
Thermodynamics, ch. 6.)
"""

from __future__ import annotations

from abc import abstractmethod
from dataclasses import dataclass
from functools import cached_property
from typing import Any, ClassVar

import numpy as np
import pint

import lostwork as lw
from lostwork_plugins.flow.rows import Refusals, point_or_array
from lostwork_plugins.flow.step import Alternatives, FlowStep, Inflow
from lostwork_plugins.flow.turbomachine import isentropic_enthalpy, polytropic_entropy

__all__ = ["Machine"]

_MOST_CORRECTIONS = 30
_STANDSTILL = 1e-11
_NO_WORK = 1e-6
"""Work below this share of p v is none."""


@dataclass(frozen=True)
class _Ends:
    """What happens to the fluid, J/kg and K, and where it ends; `work` is positive into it."""

    feed: Inflow
    p_out: lw.Column
    work: lw.Column
    heat_lost: lw.Column
    adiabatic: lw.State
    outlet: lw.State


class Machine(FlowStep):
    """Fields and physics of a machine with a shaft; one outlet, named "outlet"."""

    sense: ClassVar[float]
    """+1 where the shaft drives the fluid, -1 where the fluid drives the shaft."""

    inlet: lw.Stream
    """The stream that enters."""
    p_out: lw.Pressure | None = None
    """Outlet pressure."""
    pressure_ratio: lw.Ratio | None = None
    """Higher pressure over the lower one."""
    isentropic_efficiency: lw.Efficiency | None = None
    """Isentropic over actual work (compression), actual over isentropic (expansion)."""
    polytropic_efficiency: lw.Efficiency | None = None
    """Efficiency of every small stage."""
    T_out: lw.Temperature | None = None
    """Measured outlet temperature; the efficiency is then a result."""
    heat_loss: lw.Duty | None = None
    """Heat lost by the casing; negative where it is gained."""
    heat_loss_fraction: lw.Fraction | None = None
    """Heat lost by the casing, as a fraction of the work of the fluid."""
    heat_loss_at: lw.Temperature | None = None
    """Temperature of the boundary that the heat lost crosses."""
    mechanical_efficiency: lw.Efficiency | None = None
    """Power of the fluid over shaft power (or the other way round for a turbine)."""
    mechanical_loss_at: lw.Temperature | None = None
    """Temperature at which the lost shaft power leaves as heat."""

    alternatives: ClassVar[tuple[Alternatives, ...]] = (
        Alternatives(("isentropic_efficiency", "polytropic_efficiency", "T_out")),
        Alternatives(("heat_loss", "heat_loss_fraction"), least=0),
    )
    together: ClassVar[tuple[tuple[tuple[str, ...], str], ...]] = (
        (("heat_loss", "heat_loss_fraction"), "heat_loss_at"),
        (("mechanical_efficiency",), "mechanical_loss_at"),
    )

    @abstractmethod
    def outlet_pressure(self, refusals: Refusals, feed: Inflow) -> lw.Column:
        """Give the outlet pressure, Pa."""

    def refuse_inlet(self, refusals: Refusals, feed: Inflow) -> None:
        """Refuse a fluid that the machine cannot take."""

    def solve(self) -> lw.Solution:
        """Find the outlet, the shaft work and the heat lost."""
        ends = self._ends
        feed, outlet = ends.feed, self.stream("outlet", ends.outlet, ends.feed)
        shaft = feed.mass * ends.work
        heat = []
        friction = feed.mass * (ends.adiabatic.si.s - feed.s)
        transfer: lw.Column = 0.0
        if self.heat_loss_at is not None:
            lost = feed.mass * ends.heat_lost
            boundary = self.si.heat_loss_at
            heat.append(lw.Heat.from_si(-lost, boundary, per_time=feed.per_time, name="casing"))
            transfer = feed.mass * (ends.outlet.si.s - ends.adiabatic.si.s) + lost / boundary
            friction = friction + np.minimum(transfer, 0.0)
            transfer = np.maximum(transfer, 0.0)
        if self.mechanical_efficiency is not None:
            at, fluid_power = self.si.mechanical_loss_at, shaft
            shaft = fluid_power * self.si.mechanical_efficiency**-self.sense
            lost = shaft - fluid_power
            heat.append(lw.Heat.from_si(-lost, at, per_time=feed.per_time, name="bearings"))
            friction = friction + lost / at
        mechanisms: dict[str, lw.Column] = {"friction": point_or_array(friction)}
        if self.heat_loss_at is not None:
            mechanisms["heat transfer"] = point_or_array(transfer)
        return lw.Solution(
            outlets={"outlet": outlet},
            heat=tuple(heat),
            work=(lw.Work.from_si(shaft, per_time=feed.per_time, name="shaft"),),
            mechanisms=mechanisms,
            remainder="friction",
        )

    @property
    def shaft_power(self) -> pint.Quantity[Any]:
        """Power at the shaft, positive whichever way it goes, W (or J)."""
        return lw.quantity(self.sense * self.work_in, "W" if self._ends.feed.per_time else "J")

    @property
    def isentropic_efficiency_reached(self) -> pint.Quantity[Any]:
        """Isentropic efficiency that the ends amount to, whatever was given."""
        ends, refusals = self._ends, self.refusals
        ideal = isentropic_enthalpy(refusals, ends.feed, ends.p_out) - ends.feed.h
        with np.errstate(invalid="ignore", divide="ignore"):
            return lw.quantity((np.float64(1.0) * ideal / ends.work) ** self.sense, "")

    @property
    def polytropic_efficiency_reached(self) -> pint.Quantity[Any]:
        """Polytropic efficiency that the ends amount to; NaN where the pressure does not change."""
        ends, feed = self._ends, self._ends.feed
        first, last = feed.state.si, ends.adiabatic.si
        rise = np.asarray(last.s - first.s)
        with np.errstate(invalid="ignore", divide="ignore"):
            mean = 0.5 * (first.p * first.v / first.T + last.p * last.v / last.T)
            factor = rise / (mean * np.log(np.asarray(ends.p_out) / feed.p))
            for _ in range(_MOST_CORRECTIONS):
                # The entropy rises in proportion to the factor, but for the path it changes.
                end = polytropic_entropy(self.refusals, feed, ends.p_out, point_or_array(factor))
                made = np.asarray(end) - feed.s
                correction = np.where(made == 0.0, 1.0, rise / made)
                factor = factor * correction
                if not np.any(np.abs(correction - 1.0) > _STANDSTILL):
                    break
        efficiency = 1.0 / (1.0 + factor) if self.sense > 0.0 else 1.0 + factor
        return lw.quantity(point_or_array(efficiency), "")

    def _stage_factor(self, efficiency: lw.Column) -> lw.Column:
        return 1.0 / efficiency - 1.0 if self.sense > 0.0 else efficiency - 1.0

    @cached_property
    def _ends(self) -> _Ends:
        refusals, feed = self.refusals, self.inflow(self.inlet)
        self._refuse_still_feed(refusals, feed)
        self.refuse_inlet(refusals, feed)
        p_out = self.outlet_pressure(refusals, feed)
        if self.T_out is not None:
            return self._measured(refusals, feed, p_out)
        work = self._work(refusals, feed, p_out)
        lost = self._heat_lost(feed, work)
        adiabatic = refusals.state(feed.fluid, ("p", "h"), p_out, feed.h + work)
        outlet = adiabatic
        if self.heat_loss_at is not None:
            self._refuse_uphill_loss(refusals, feed, adiabatic, lost)
            outlet = refusals.state(feed.fluid, ("p", "h"), p_out, feed.h + work - lost)
        return _Ends(feed, p_out, work, lost, adiabatic, outlet)

    def _measured(self, refusals: Refusals, feed: Inflow, p_out: lw.Column) -> _Ends:
        outlet = refusals.state(feed.fluid, ("T", "p"), self.si.T_out, p_out)
        rise = outlet.si.h - feed.h
        if self.heat_loss_fraction is not None:
            # The loss is a fraction f of |w|, and w = rise + f |w|.
            work = rise / (1.0 - self.sense * self.si.heat_loss_fraction)
            lost = work - rise
        else:
            lost = self._heat_lost(feed, rise)
            work = rise + lost
        with np.errstate(invalid="ignore"):
            refusals.add(
                self.sense * np.asarray(work) < -_NO_WORK * feed.p * feed.state.si.v,
                "with the outlet at {T:.6g} K the shaft would turn the other way round "
                "({w:.6g} J/kg into the fluid); check T_out and heat_loss",
                T=self.si.T_out,
                w=work,
            )
        adiabatic = outlet
        if self.heat_loss_at is not None:
            adiabatic = refusals.state(feed.fluid, ("p", "h"), p_out, feed.h + work)
            self._refuse_uphill_loss(refusals, feed, adiabatic, lost)
        return _Ends(feed, p_out, work, lost, refusals.mark(adiabatic), refusals.mark(outlet))

    def _work(self, refusals: Refusals, feed: Inflow, p_out: lw.Column) -> lw.Column:
        """Work of the fluid, J/kg, positive into it."""
        if self.isentropic_efficiency is not None:
            ideal = isentropic_enthalpy(refusals, feed, p_out) - feed.h
            work: lw.Column = ideal * self.si.isentropic_efficiency**-self.sense
            return work
        factor = self._stage_factor(self.si.polytropic_efficiency)
        s_end = polytropic_entropy(refusals, feed, p_out, factor)
        end = refusals.state(feed.fluid, ("p", "s"), p_out, s_end)
        rise: lw.Column = end.si.h - feed.h
        return rise

    def _heat_lost(self, feed: Inflow, work: lw.Column) -> lw.Column:
        """Heat lost by the casing, J/kg."""
        if self.heat_loss is not None:
            return self.energy("heat_loss", feed.per_time) / feed.mass
        if self.heat_loss_fraction is not None:
            lost: lw.Column = self.si.heat_loss_fraction * self.sense * work
            return lost
        return 0.0

    def _refuse_still_feed(self, refusals: Refusals, feed: Inflow) -> None:
        if self.heat_loss is not None:
            refusals.add(
                np.asarray(feed.mass) <= 0.0,
                "heat_loss is given and nothing flows; give the inlet a rate above zero",
            )

    def _refuse_uphill_loss(
        self, refusals: Refusals, feed: Inflow, adiabatic: lw.State, lost: lw.Column
    ) -> None:
        boundary = self.si.heat_loss_at
        with np.errstate(invalid="ignore"):
            hottest = np.maximum(feed.T, adiabatic.si.T)
            coldest = np.minimum(feed.T, adiabatic.si.T)
            # A machine that does nothing loses nothing, but for the noise of its end states.
            noise = _NO_WORK * feed.p * feed.state.si.v
            uphill = ((lost > noise) & (boundary > hottest)) | (
                (lost < -noise) & (boundary < coldest)
            )
        refusals.add(
            uphill,
            "heat_loss_at is {at:.6g} K while the fluid runs from {low:.6g} to {high:.6g} K: heat "
            "would go from the colder to the hotter; correct heat_loss_at or the sign of heat_loss",
            at=boundary,
            low=coldest,
            high=hottest,
        )
