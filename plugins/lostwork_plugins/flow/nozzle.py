"""Nozzles and diffusers: pressure into velocity and back.

    h_1 + e_1 = h_2 + e_2,  e being kinetic energy;   sigma = m (s_2 - s_1), all of it friction

Kinetic energy is the mechanical part of the stream; inlet and outlet are taken to be level, so an
inlet stream has no elevation of its own here.
"""

from __future__ import annotations

from abc import abstractmethod
from typing import Any, ClassVar

import numpy as np
import pint

import lostwork as lw
from lostwork_plugins.flow.pressures import lowered_pressure, raised_pressure
from lostwork_plugins.flow.purposes import exergy_gain, measured_where
from lostwork_plugins.flow.rows import Refusals
from lostwork_plugins.flow.step import Alternatives, FlowStep, Inflow
from lostwork_plugins.flow.turbomachine import isentropic_enthalpy

__all__ = ["Diffuser", "Nozzle"]

_SOUND_STEP = 1e-4


class _Duct(FlowStep):
    """A duct in which enthalpy and kinetic energy are exchanged, without heat and work."""

    sense: ClassVar[float]
    """+1 where pressure rises, -1 where it falls."""

    inlet: lw.Stream
    """The stream that enters, with its velocity."""
    p_out: lw.Pressure | None = None
    """Outlet pressure."""
    pressure_ratio: lw.Ratio | None = None
    """Higher pressure over the lower one."""
    velocity_out: lw.Velocity | None = None
    """Outlet velocity."""
    isentropic_efficiency: lw.Efficiency | None = None
    """Actual over isentropic fall of enthalpy (nozzle); isentropic over actual rise (diffuser)."""

    @abstractmethod
    def _pressure(self, refusals: Refusals, feed: Inflow) -> lw.Column:
        """Give the outlet pressure, Pa, where it is stated."""

    def solve(self) -> lw.Solution:
        """Find the outlet and its velocity."""
        refusals, feed = self.refusals, self.inflow(self.inlet)
        if self.velocity_out is not None:
            kinetic = 0.5 * self.si.velocity_out**2
            h_out = feed.h + feed.mechanical - kinetic
            self._refuse_wrong_way(refusals, feed, h_out)
            if self.isentropic_efficiency is not None:
                p_out = self._pressure_reached(refusals, feed, h_out)
            else:
                p_out = self._pressure(refusals, feed)
        else:
            p_out = self._pressure(refusals, feed)
            ideal = isentropic_enthalpy(refusals, feed, p_out) - feed.h
            h_out = feed.h + ideal * self.si.isentropic_efficiency**-self.sense
            kinetic = feed.mechanical + feed.h - h_out
            with np.errstate(invalid="ignore"):
                refusals.add(
                    kinetic < -1e-9 * feed.p * feed.state.si.v,
                    "the stream brings {has:.6g} J/kg of kinetic energy, and {needs:.6g} J/kg are "
                    "needed for this pressure; lower p_out or give the inlet a higher velocity",
                    has=feed.mechanical,
                    needs=h_out - feed.h,
                )
                kinetic = np.maximum(kinetic, 0.0)
        outlet = refusals.state(feed.fluid, ("p", "h"), p_out, h_out)
        stream = self.stream("outlet", outlet, feed, mechanical=kinetic)
        return lw.Solution(
            outlets={"outlet": stream},
            mechanisms={"friction": feed.mass * (outlet.si.s - feed.s)},
            remainder="friction",
        )

    @property
    def velocity_reached(self) -> pint.Quantity[Any]:
        """Outlet velocity, m/s, whatever was given."""
        return lw.quantity(np.sqrt(2.0 * self.outlet.si.mechanical), "m/s")

    @property
    def mach_reached(self) -> pint.Quantity[Any]:
        """Outlet velocity over the speed of sound there, sqrt((dp/drho)_s) (of equilibrium).

        Above 1 a nozzle needs a diverging part; a converging one would be choked and leave the
        rest of the pressure to the jet.
        """
        state = self.outlet.state.si
        fluid = self._outlet_fluid
        beyond, short = (
            self.refusals.state(fluid, ("p", "s"), state.p * (1.0 + step), state.s).si
            for step in (_SOUND_STEP, -_SOUND_STEP)
        )
        with np.errstate(invalid="ignore"):
            sound = np.sqrt((beyond.p - short.p) / (1.0 / beyond.v - 1.0 / short.v))
        return lw.quantity(np.sqrt(2.0 * self.outlet.si.mechanical) / sound, "")

    @property
    def _outlet_fluid(self) -> lw.Fluid:
        return self.inflow(self.inlet).fluid

    def _pressure_reached(self, refusals: Refusals, feed: Inflow, h_out: lw.Column) -> lw.Column:
        """Outlet pressure at which the isentropic end explains the velocity."""
        h_ideal = feed.h + (h_out - feed.h) * self.si.isentropic_efficiency**self.sense
        p: lw.Column = refusals.state(feed.fluid, ("h", "s"), h_ideal, feed.s).si.p
        return p

    def _refuse_wrong_way(self, refusals: Refusals, feed: Inflow, h_out: lw.Column) -> None:
        with np.errstate(invalid="ignore"):
            refusals.add(
                self.sense * (h_out - feed.h) < 0.0,
                "velocity_out takes the kinetic energy from {before:.6g} to {after:.6g} J/kg, the "
                "wrong way for this step; a nozzle speeds the stream up, a diffuser slows it down",
                before=feed.mechanical,
                after=feed.mechanical + feed.h - h_out,
            )


class Nozzle(_Duct):
    """A nozzle: two of the outlet pressure, the outlet velocity and the efficiency are given.

    eta = (h_1 - h_2) / (h_1 - h_s); e_2 = e_1 + h_1 - h_2.  The equations hold for a nozzle shaped
    for its pressure ratio: `mach_reached` above 1 says that it has to diverge past its throat.

    Raises
    ------
    ProcessError
        The pressure would rise, or the stream would be slowed down.

    Notes
    -----
    A free jet of gas or steam cuts, is loud and pushes back; follow local codes and licensed
    practice.  Shapiro, The Dynamics and Thermodynamics of Compressible Fluid Flow, 1953, ch. 4;
    Cengel and Boles, Thermodynamics, ch. 7.
    """

    trade_name: ClassVar[str] = "nozzle"
    sense: ClassVar[float] = -1.0

    pressure_drop: lw.PressureDrop | None = None
    """Inlet less outlet pressure."""

    alternatives: ClassVar[tuple[Alternatives, ...]] = (
        Alternatives(("p_out", "pressure_ratio", "pressure_drop"), least=0),
        Alternatives(
            ("p_out", "pressure_ratio", "pressure_drop", "velocity_out", "isentropic_efficiency"),
            least=2,
            most=2,
        ),
    )

    def _pressure(self, refusals: Refusals, feed: Inflow) -> lw.Column:
        return lowered_pressure(self, refusals, feed.p)

    def purpose(self, balance: lw.Balance) -> lw.Purpose | None:
        """Flow exergy at rest expended for kinetic energy."""
        feed = self.inflow(self.inlet)
        T0 = balance.surroundings.si.T
        given = -np.asarray(exergy_gain(feed, self.outlet, T0, with_mechanical=False))
        gained = feed.mass * (self.outlet.si.mechanical - feed.mechanical)
        with np.errstate(invalid="ignore"):
            measured = (given > 0.0) & (np.asarray(gained) >= 0.0)
        return measured_where(
            measured,
            expended=given,
            recovered=gained,
            expended_name="flow exergy given up",
            recovered_name="kinetic energy gained",
        )


class Diffuser(_Duct):
    """A diffuser: two of the outlet pressure, the outlet velocity and the efficiency are given.

    eta = (h_s - h_1) / (h_2 - h_1), h_s at the outlet pressure and the inlet entropy (not the
    recovery of stagnation pressure); h_2 = h_1 + e_1 - e_2.

    Raises
    ------
    ProcessError
        The pressure would fall, the stream would be sped up, or it is too slow for the pressure.

    Notes
    -----
    Shapiro, The Dynamics and Thermodynamics of Compressible Fluid Flow, 1953, ch. 5; Dixon and
    Hall, Fluid Mechanics and Thermodynamics of Turbomachinery, ch. 1.
    """

    trade_name: ClassVar[str] = "diffuser"
    sense: ClassVar[float] = 1.0

    pressure_rise: lw.PressureDrop | None = None
    """Outlet less inlet pressure."""

    alternatives: ClassVar[tuple[Alternatives, ...]] = (
        Alternatives(("p_out", "pressure_ratio", "pressure_rise"), least=0),
        Alternatives(
            ("p_out", "pressure_ratio", "pressure_rise", "velocity_out", "isentropic_efficiency"),
            least=2,
            most=2,
        ),
    )

    def _pressure(self, refusals: Refusals, feed: Inflow) -> lw.Column:
        return raised_pressure(self, refusals, feed.p)

    def purpose(self, balance: lw.Balance) -> lw.Purpose | None:
        """Kinetic energy expended for flow exergy at rest."""
        feed = self.inflow(self.inlet)
        T0 = balance.surroundings.si.T
        gained = np.asarray(exergy_gain(feed, self.outlet, T0, with_mechanical=False))
        given = feed.mass * (feed.mechanical - self.outlet.si.mechanical)
        with np.errstate(invalid="ignore"):
            measured = (np.asarray(given) > 0.0) & (gained > 0.0)
        return measured_where(
            measured,
            expended=given,
            recovered=gained,
            expended_name="kinetic energy given up",
            recovered_name="flow exergy gained",
        )
