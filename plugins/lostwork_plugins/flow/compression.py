"""Compression of a gas, a vapour or a wet mixture by a machine."""

from __future__ import annotations

from typing import ClassVar

import lostwork as lw
from lostwork_plugins.flow.machine import Machine
from lostwork_plugins.flow.pressures import raised_pressure
from lostwork_plugins.flow.purposes import exergy_brought_by_heat, exergy_gain, measured_where
from lostwork_plugins.flow.rows import Refusals
from lostwork_plugins.flow.step import Alternatives, Inflow

__all__ = ["Compression", "Driven"]


class Driven(Machine):
    """A machine that shaft work drives to raise the pressure of a fluid."""

    sense: ClassVar[float] = 1.0

    pressure_rise: lw.PressureDrop | None = None
    """Outlet pressure less inlet pressure."""

    alternatives: ClassVar[tuple[Alternatives, ...]] = (
        Alternatives(("p_out", "pressure_ratio", "pressure_rise")),
        *Machine.alternatives,
    )

    def outlet_pressure(self, refusals: Refusals, feed: Inflow) -> lw.Column:
        """Give the raised pressure, Pa."""
        return raised_pressure(self, refusals, feed.p)

    def purpose(self, balance: lw.Balance) -> lw.Purpose | None:
        """Shaft work expended for the rise of the exergy of the stream.

        Heat lost above the temperature of the surroundings leaves unused; exergy that heat brings
        in is expended too.
        """
        gain = exergy_gain(self.inflow(self.inlet), self.outlet, balance.surroundings.si.T)
        return measured_where(
            gain > 0.0,
            expended=self.work_in + exergy_brought_by_heat(balance),
            recovered=gain,
            expended_name="shaft work",
            recovered_name="exergy gained by the stream",
        )


class Compression(Driven):
    """A compressor, blower or fan.

    w = (h_s - h_1) / eta_s, or along a polytropic path of constant small-stage efficiency, or from
    a measured outlet temperature.  A wet inlet is computed as it stands (wet compression); whether
    the machine survives liquid is for its maker to say.  Kinetic and potential energy of the
    stream are carried through, and efficiencies refer to static states.

    Raises
    ------
    ProcessError
        The outlet pressure is below the inlet pressure, or heat would flow uphill.

    Notes
    -----
    Compressed gas, hot discharge and oxygen service are hazards; the design follows local codes
    and is for licensed engineers.  Moran and Shapiro, Fundamentals of Engineering Thermodynamics,
    ch. 6; `turbomachine` for the polytropic path.
    """

    trade_name: ClassVar[str] = "compression"
