"""Heat exchange between two streams across a wall."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import Any, ClassVar, Literal

import numpy as np
import pint

import lostwork as lw
from lostwork_plugins.flow.entropy_split import entropy_of_drop, let_down
from lostwork_plugins.flow.pressures import lowered_pressure
from lostwork_plugins.flow.purposes import exergy_gain, one_gives_one_gains
from lostwork_plugins.flow.rows import Refusals
from lostwork_plugins.flow.step import Alternatives, FlowStep, Inflow
from lostwork_plugins.flow.temperature_profile import Side, duty_at_approach, least_difference

__all__ = ["HeatExchange"]

_CROSSING = 1e-6
"""Temperatures cross if they do so by more than this fraction of themselves."""


@dataclass(frozen=True)
class _Exchange:
    """Both sides, the duty of the cold one (W or J) and the ends."""

    hot: Inflow
    cold: Inflow
    duty: lw.Column
    loss: lw.Column
    hot_out: lw.State
    cold_out: lw.State
    hot_fallen: lw.State
    cold_fallen: lw.State
    approach: lw.Column


class HeatExchange(FlowStep):
    """A hot and a cold stream, in counterflow or parallel flow; outlets "hot" and "cold".

    duty = m_c (h_2 - h_1)_cold = m_h (h_1 - h_2)_hot - loss, and sigma is the sum of m (s_2 - s_1)
    of both and of loss / T_boundary.  The duty is stated directly, by the outlet of one side, by
    the smallest temperature difference anywhere inside, or by the effectiveness, which is duty
    over that at which one stream, at its outlet pressure, would reach the inlet temperature of the
    other.

    The overall sigma may be positive and the exchanger impossible all the same, so temperatures are
    followed along it, enthalpy and pressure of each stream running linearly with the duty passed:
    phase change and varying heat capacity are in the profile.

    Entropy generated is split as if both streams were let down to their outlet pressures first
    (pressure drop) and then exchanged heat (heat transfer, the loss of heat included).

    Raises
    ------
    ProcessError
        Temperatures would cross, at an end or inside; heat would run from cold to hot.

    Notes
    -----
    Kinetic and potential energies are carried through.  Below the temperature of the surroundings
    the cold stream gives exergy and the hot stream gains it; across it, where both lose, there is
    no purpose to measure.  Kays and London, Compact Heat Exchangers, 1984, ch. 2; Kotas, The Exergy
    Method of Thermal Plant Analysis, 1985, ch. 4.
    """

    trade_name: ClassVar[str] = "heat-exchange"

    hot: lw.Stream
    """The stream that is cooled."""
    cold: lw.Stream
    """The stream that is heated."""
    T_out_hot: lw.Temperature | None = None
    """Outlet temperature of the hot stream."""
    T_out_cold: lw.Temperature | None = None
    """Outlet temperature of the cold stream."""
    quality_out_hot: lw.Fraction | None = None
    """Mass fraction of vapour at the outlet of the hot stream (a condenser)."""
    quality_out_cold: lw.Fraction | None = None
    """Mass fraction of vapour at the outlet of the cold stream (an evaporator)."""
    duty: lw.Duty | None = None
    """Heat taken up by the cold stream."""
    effectiveness: lw.Fraction | None = None
    """Duty over the largest that the inlet temperatures allow."""
    minimum_approach: lw.TemperatureDifference | None = None
    """Smallest temperature difference along the exchanger."""
    p_out_hot: lw.Pressure | None = None
    """Outlet pressure of the hot stream; its inlet pressure unless given."""
    pressure_drop_hot: lw.PressureDrop | None = None
    """Inlet less outlet pressure of the hot stream."""
    p_out_cold: lw.Pressure | None = None
    """Outlet pressure of the cold stream; its inlet pressure unless given."""
    pressure_drop_cold: lw.PressureDrop | None = None
    """Inlet less outlet pressure of the cold stream."""
    arrangement: Literal["counter", "parallel"] = "counter"
    """Counterflow or parallel flow."""
    heat_loss: lw.Duty | None = None
    """Heat that the hot stream loses to the outside, negative for a gain."""
    heat_loss_at: lw.Temperature | None = None
    """Temperature of the boundary that the loss crosses."""

    alternatives: ClassVar[tuple[Alternatives, ...]] = (
        Alternatives(
            (
                "T_out_hot",
                "T_out_cold",
                "quality_out_hot",
                "quality_out_cold",
                "duty",
                "effectiveness",
                "minimum_approach",
            )
        ),
        Alternatives(("p_out_hot", "pressure_drop_hot"), least=0),
        Alternatives(("p_out_cold", "pressure_drop_cold"), least=0),
    )
    together: ClassVar[tuple[tuple[tuple[str, ...], str], ...]] = (
        (("heat_loss",), "heat_loss_at"),
    )

    def solve(self) -> lw.Solution:
        """Find both outlets."""
        found = self._exchange
        hot, cold = found.hot, found.cold
        drop = entropy_of_drop(hot, found.hot_fallen) + entropy_of_drop(cold, found.cold_fallen)
        transfer = hot.mass * (found.hot_out.si.s - found.hot_fallen.si.s) + cold.mass * (
            found.cold_out.si.s - found.cold_fallen.si.s
        )
        heat: tuple[lw.Heat, ...] = ()
        if self.heat_loss_at is not None:
            boundary = self.si.heat_loss_at
            heat = (lw.Heat.from_si(-found.loss, boundary, per_time=hot.per_time, name="loss"),)
            transfer = transfer + found.loss / boundary
        return lw.Solution(
            outlets={
                "hot": self.stream("hot", found.hot_out, hot),
                "cold": self.stream("cold", found.cold_out, cold),
            },
            heat=heat,
            mechanisms={"pressure drop": drop, "heat transfer": transfer},
            remainder="heat transfer",
        )

    @property
    def duty_reached(self) -> pint.Quantity[Any]:
        """Heat taken up by the cold stream, W (or J), whatever was given."""
        found = self._exchange
        return lw.quantity(found.duty, "W" if found.hot.per_time else "J")

    @property
    def approach_reached(self) -> pint.Quantity[Any]:
        """Smallest temperature difference along the exchanger, K."""
        return lw.quantity(self._exchange.approach, "K")

    def purpose(self, balance: lw.Balance) -> lw.Purpose | None:
        """Exergy given up by one stream for the exergy gained by the other."""
        T0 = balance.surroundings.si.T
        return one_gives_one_gains(
            exergy_gain(self._exchange.hot, self.outlets["hot"], T0),
            exergy_gain(self._exchange.cold, self.outlets["cold"], T0),
            "hot stream",
            "cold stream",
        )

    @cached_property
    def _exchange(self) -> _Exchange:
        refusals = self.refusals
        hot, cold = self.inflow(self.hot), self.inflow(self.cold)
        if hot.per_time is not cold.per_time:
            raise lw.ProcessError(
                process=self.label, reason="one stream has a rate and one a mass; give both rates"
            )
        refusals.add(
            (np.asarray(hot.mass) <= 0.0) | (np.asarray(cold.mass) <= 0.0),
            "one of the streams does not flow; give both a rate above zero",
        )
        with np.errstate(invalid="ignore"):
            refusals.add(
                hot.T < cold.T,
                "the hot stream enters at {hot:.6g} K, colder than the cold one at {cold:.6g} K; "
                "exchange hot and cold",
                hot=hot.T,
                cold=cold.T,
            )
        loss = self.energy("heat_loss", hot.per_time) if self.heat_loss is not None else 0.0
        hot_side = Side(hot, lowered_pressure(self, refusals, hot.p, "_hot"), loss, -1.0)
        cold_side = Side(cold, lowered_pressure(self, refusals, cold.p, "_cold"), 0.0, 1.0)
        duty = self._duty(refusals, hot_side, cold_side)
        with np.errstate(invalid="ignore"):
            refusals.add(
                duty < -_CROSSING * hot.mass * hot.p * hot.state.si.v,
                "the duty would be {duty:.6g}, from the cold to the hot stream; correct the outlet "
                "that is stated",
                duty=duty,
            )
        self._refuse_uphill_loss(refusals, hot, loss)
        approach = least_difference(refusals, hot_side, cold_side, duty, self.arrangement)
        with np.errstate(invalid="ignore"):
            refusals.add(
                approach < -_CROSSING * np.asarray(hot.T),
                "temperatures cross along the exchanger by {cross:.4g} K at a duty of {duty:.6g}; "
                "state a smaller duty, a larger flow or another pressure",
                cross=-np.asarray(approach),
                duty=duty,
            )
        return _Exchange(
            hot=hot,
            cold=cold,
            duty=duty,
            loss=loss,
            hot_out=hot_side.outlet(refusals, duty),
            cold_out=cold_side.outlet(refusals, duty),
            hot_fallen=let_down(refusals, hot, hot_side.p_out),
            cold_fallen=let_down(refusals, cold, cold_side.p_out),
            approach=approach,
        )

    def _duty(self, refusals: Refusals, hot: Side, cold: Side) -> lw.Column:
        """Heat taken up by the cold stream, W (or J)."""
        si = self.si
        if self.duty is not None:
            return self.energy("duty", hot.feed.per_time)
        for side, name in ((hot, "hot"), (cold, "cold")):
            if getattr(self, f"T_out_{name}") is not None:
                T_out = getattr(si, f"T_out_{name}")
                return side.duty_to(refusals.state(side.feed.fluid, ("T", "p"), T_out, side.p_out))
            if getattr(self, f"quality_out_{name}") is not None:
                quality = getattr(si, f"quality_out_{name}")
                pair = ("p", "quality")
                return side.duty_to(refusals.state(side.feed.fluid, pair, side.p_out, quality))
        largest = self._largest_duty(refusals, hot, cold)
        if self.effectiveness is not None:
            share: lw.Column = si.effectiveness * largest
            return share
        approach = si.minimum_approach
        with np.errstate(invalid="ignore"):
            refusals.add(
                approach > hot.feed.T - cold.feed.T,
                "minimum_approach is {approach:.6g} K, more than the inlets are apart "
                "({apart:.6g} K); state a smaller one",
                approach=approach,
                apart=np.asarray(hot.feed.T) - cold.feed.T,
            )
        return duty_at_approach(refusals, hot, cold, largest, approach, self.arrangement)

    def _largest_duty(self, refusals: Refusals, hot: Side, cold: Side) -> lw.Column:
        """Duty at which one stream reaches the inlet temperature of the other."""
        by_hot = hot.duty_to(refusals.state(hot.feed.fluid, ("T", "p"), cold.feed.T, hot.p_out))
        by_cold = cold.duty_to(refusals.state(cold.feed.fluid, ("T", "p"), hot.feed.T, cold.p_out))
        least: lw.Column = np.minimum(by_hot, by_cold)
        return least

    def _refuse_uphill_loss(self, refusals: Refusals, hot: Inflow, loss: lw.Column) -> None:
        if self.heat_loss_at is None:
            return
        boundary = self.si.heat_loss_at
        with np.errstate(invalid="ignore"):
            refusals.add(
                (np.asarray(loss) > 0.0) & (boundary > np.asarray(hot.T)),
                "heat_loss_at is {at:.6g} K, hotter than the hot stream at {hot:.6g} K; correct it "
                "or the sign of heat_loss",
                at=boundary,
                hot=hot.T,
            )
