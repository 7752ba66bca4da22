"""Flash separation: vapour and liquid in equilibrium leave apart."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar

import numpy as np

import lostwork as lw
from lostwork_plugins.flow.entropy_split import entropy_of_drop, let_down, refuse_uphill_heat
from lostwork_plugins.flow.pressures import lowered_pressure
from lostwork_plugins.flow.rows import Refusals, choose, point_or_array
from lostwork_plugins.flow.step import Alternatives, FlowStep, Inflow

__all__ = ["FlashSeparation"]

_LIQUID = ("liquid", "saturated liquid")
_SAME_TEMPERATURE = 1e-6


@dataclass(frozen=True)
class _Phases:
    """Both phases and the mass fraction of vapour."""

    vapour: lw.State
    liquid: lw.State
    share: lw.Column


class FlashSeparation(FlowStep):
    """A flash drum or a separator; outlets "vapour" and "liquid".

    Without T_out, duty and quality_out the flash is adiabatic, h = h_1 at the outlet pressure;
    with one of them, heat from a reservoir at ``at`` makes up m (h - h_1).  Vapour and liquid leave
    in equilibrium, at one temperature and pressure; sigma = sum(m s)_out - m s_1 - Q / T_at.
    Kinetic and potential energy per kilogram are carried into both.

    Where one phase only is left the other outlet has no flow, and stands in its saturated state for
    a pure fluid, in the state of the whole for a mixture.

    Raises
    ------
    ProcessError
        The fluid has no phases here (a model without liquid, a pressure above the critical one),
        or rows of a mixture, whose phases have compositions of their own.

    Notes
    -----
    Entropy generated is split as in `entropy_split`: pressure drop first, heat afterwards.  A
    separator is a pressure vessel: its design, level control and relief follow local codes and
    licensed practice.  Smith, Van Ness and Abbott, Introduction to Chemical Engineering
    Thermodynamics, ch. on vapour-liquid equilibrium.
    """

    trade_name: ClassVar[str] = "flash-separation"

    inlet: lw.Stream
    """The stream that enters."""
    p_out: lw.Pressure | None = None
    """Pressure of the drum; that of the inlet unless given."""
    pressure_drop: lw.PressureDrop | None = None
    """Inlet less drum pressure."""
    T_out: lw.Temperature | None = None
    """Temperature of the drum."""
    duty: lw.Duty | None = None
    """Heat taken up in the drum; negative where it is given off."""
    quality_out: lw.Fraction | None = None
    """Mass fraction that leaves as vapour."""
    at: lw.Temperature | None = None
    """Temperature of the reservoir that gives or takes the heat."""

    alternatives: ClassVar[tuple[Alternatives, ...]] = (
        Alternatives(("p_out", "pressure_drop"), least=0),
        Alternatives(("T_out", "duty", "quality_out"), least=0),
    )
    together: ClassVar[tuple[tuple[tuple[str, ...], str], ...]] = (
        (("T_out", "duty", "quality_out"), "at"),
    )

    def solve(self) -> lw.Solution:
        """Find both phases."""
        refusals, feed = self.refusals, self.inflow(self.inlet)
        if not feed.fluid.knows_two_phases:
            raise lw.ProcessError(
                process=self.label,
                reason=f"{feed.fluid!r} is modelled without a liquid; take a backend that knows "
                "two phases",
            )
        p_out = lowered_pressure(self, refusals, feed.p)
        fallen = let_down(refusals, feed, p_out)
        whole = self._whole(refusals, feed, fallen, p_out)
        if self.at is not None:
            heat_in = feed.mass * (whole.si.h - feed.h)
            refuse_uphill_heat(refusals, whole.si.T, heat_in, self.si.at)
            whole = refusals.mark(whole)
        phases = self._pure(refusals, whole) if feed.fluid.is_pure else self._mixture(whole)
        vapour = feed.mass * phases.share
        liquid = feed.mass * (1.0 - phases.share)
        outlets = {
            "vapour": self.stream("vapour", phases.vapour, feed, mass=vapour),
            "liquid": self.stream("liquid", phases.liquid, feed, mass=liquid),
        }
        leaves = vapour * phases.vapour.si.s + liquid * phases.liquid.si.s
        drop = entropy_of_drop(feed, fallen)
        if self.at is None:
            return lw.Solution(
                outlets=outlets,
                mechanisms={"pressure drop": leaves - feed.mass * feed.s},
                remainder="pressure drop",
            )
        boundary = self.si.at
        heat = vapour * phases.vapour.si.h + liquid * phases.liquid.si.h - feed.mass * feed.h
        return lw.Solution(
            outlets=outlets,
            heat=(lw.Heat.from_si(heat, boundary, per_time=feed.per_time, name="reservoir"),),
            mechanisms={
                "pressure drop": drop,
                "heat transfer": leaves - feed.mass * fallen.si.s - heat / boundary,
            },
            remainder="heat transfer",
        )

    def _whole(
        self, refusals: Refusals, feed: Inflow, fallen: lw.State, p_out: lw.Column
    ) -> lw.State:
        """Give both phases together, as one state."""
        if self.T_out is not None:
            return refusals.state(feed.fluid, ("T", "p"), self.si.T_out, p_out)
        if self.quality_out is not None:
            return refusals.state(feed.fluid, ("p", "quality"), p_out, self.si.quality_out)
        if self.duty is None:
            return fallen
        refusals.add(
            np.asarray(feed.mass) <= 0.0,
            "a duty is given and nothing flows; give the inlet a rate above zero",
        )
        with np.errstate(divide="ignore", invalid="ignore"):
            h = feed.h + np.divide(self.energy("duty", feed.per_time), feed.mass)
        return refusals.state(feed.fluid, ("p", "h"), p_out, h)

    def _pure(self, refusals: Refusals, whole: lw.State) -> _Phases:
        """Part a pure fluid by its quality."""
        fluid, p = whole.fluid, whole.si.p
        critical = fluid.critical_point
        if critical is not None:
            with np.errstate(invalid="ignore"):
                refusals.add(
                    np.asarray(p) >= critical.p,
                    "the drum is at {p:.6g} Pa, above the critical pressure of {critical:.6g} Pa, "
                    "where there are no two phases; lower p_out",
                    p=p,
                    critical=critical.p,
                )
        whole = refusals.mark(whole)
        quality = np.asarray(whole.si.quality)
        wet = np.isfinite(quality)
        boils_off = ~wet & ~np.isin(np.asarray(whole.phase), _LIQUID)
        stays = ~wet & ~boils_off
        bubble = refusals.state(fluid, ("p", "quality"), p, 0.0)
        dew = refusals.state(fluid, ("p", "quality"), p, 1.0)
        share = np.where(wet, quality, np.where(boils_off, 1.0, 0.0))
        return _Phases(
            vapour=choose(boils_off, whole, dew),
            liquid=choose(stays, whole, bubble),
            share=point_or_array(share),
        )

    def _mixture(self, whole: lw.State) -> _Phases:
        """Part a mixture into phases of compositions of their own."""
        if whole.shape:
            raise lw.ProcessError(
                process=self.label,
                reason="the phases of a mixture have other compositions in every row, and a fluid "
                "has one composition; take the rows one by one",
            )
        fluid, T, p = whole.fluid, float(whole.si.T), float(whole.si.p)
        if not np.isfinite(whole.si.quality):
            if whole.phase == "supercritical":
                raise lw.ProcessError(
                    process=self.label,
                    reason=f"the fluid is supercritical in the drum ({T:.6g} K, {p:.6g} Pa), so "
                    "there is nothing to part; lower p_out",
                )
            return _Phases(whole, whole, 0.0 if whole.phase in _LIQUID else 1.0)
        split = fluid.split(T, p)
        beta = split.vapour_fraction
        # The smaller phase is what the larger one leaves of the whole, so that the components
        # close to round-off whatever the accuracy of the flash.
        if beta < 0.5:
            liquid_x = split.liquid
            vapour_x = _left_over(fluid.spec.mole_fractions, liquid_x, 1.0 - beta)
        else:
            vapour_x = split.vapour
            liquid_x = _left_over(fluid.spec.mole_fractions, vapour_x, beta)
        vapour = self._saturated(fluid.with_composition(vapour_x), 1.0, T, p)
        liquid = self._saturated(fluid.with_composition(liquid_x), 0.0, T, p)
        # Mass fractions by the molar masses of the components, as a balance counts them.
        lightness = vapour.fluid.spec.molar_mass / fluid.spec.molar_mass
        return _Phases(vapour, liquid, beta * lightness)

    def _saturated(self, fluid: lw.Fluid, quality: float, T: float, p: float) -> lw.State:
        """Give one phase, which is saturated by its making."""
        state = fluid.state_si(("p", "quality"), p, quality)
        if abs(float(state.si.T) - T) > _SAME_TEMPERATURE * T:
            raise lw.ProcessError(
                process=self.label,
                reason=f"the phases found at {T:.8g} K are saturated at {state.si.T:.8g} K by the "
                f"same backend ({fluid.backend}); it does not part this mixture consistently here",
            )
        return state


def _left_over(
    whole: tuple[float, ...], phase: tuple[float, ...], fraction: float
) -> tuple[float, ...]:
    """Composition, by amount, of what is left of `whole` when `phase` has gone."""
    rest = (z - fraction * x for z, x in zip(whole, phase, strict=True))
    return tuple(max(amount, 0.0) / (1.0 - fraction) for amount in rest)
