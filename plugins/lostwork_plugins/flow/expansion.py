"""Expansion through a machine that gives work."""

from __future__ import annotations

from typing import ClassVar

import numpy as np

import lostwork as lw
from lostwork_plugins.flow.machine import Machine
from lostwork_plugins.flow.pressures import lowered_pressure
from lostwork_plugins.flow.purposes import exergy_brought_by_heat, exergy_gain, measured_where
from lostwork_plugins.flow.rows import Refusals
from lostwork_plugins.flow.step import Alternatives, Inflow

__all__ = ["Expansion"]


class Expansion(Machine):
    """A turbine or an expander, of gas, vapour or liquid.

    w = -eta_s (h_1 - h_s), or along a polytropic path of constant small-stage efficiency, or from
    a measured outlet temperature (of a dry outlet: inside the two-phase region temperature and
    pressure do not tell the state).  Kinetic and potential energy of the stream are carried
    through, and efficiencies refer to static states.

    Raises
    ------
    ProcessError
        The outlet pressure is above the inlet pressure, or heat would flow uphill.

    Notes
    -----
    Steam under pressure and overspeed are hazards; the design follows local codes and is for
    licensed engineers.  Moran and Shapiro, Fundamentals of Engineering Thermodynamics, ch. 6;
    `turbomachine` for the polytropic path.
    """

    trade_name: ClassVar[str] = "expansion"
    sense: ClassVar[float] = -1.0

    pressure_drop: lw.PressureDrop | None = None
    """Inlet pressure less outlet pressure."""

    alternatives: ClassVar[tuple[Alternatives, ...]] = (
        Alternatives(("p_out", "pressure_ratio", "pressure_drop")),
        *Machine.alternatives,
    )

    def outlet_pressure(self, refusals: Refusals, feed: Inflow) -> lw.Column:
        """Give the lowered pressure, Pa."""
        return lowered_pressure(self, refusals, feed.p)

    def purpose(self, balance: lw.Balance) -> lw.Purpose | None:
        """Exergy given up by the stream, and brought by heat, for shaft work."""
        given = -np.asarray(
            exergy_gain(self.inflow(self.inlet), self.outlet, balance.surroundings.si.T)
        )
        spent = given + exergy_brought_by_heat(balance)
        return measured_where(
            spent > 0.0,
            expended=spent,
            recovered=-np.asarray(self.work_in),
            expended_name="exergy given up by the stream",
            recovered_name="shaft work",
        )
