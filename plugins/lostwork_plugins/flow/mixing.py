"""Adiabatic mixing of any number of streams."""

from __future__ import annotations

from typing import Any, ClassVar

import numpy as np

import lostwork as lw
from lostwork_plugins.flow.entropy_split import entropy_of_drop, let_down
from lostwork_plugins.flow.purposes import exergy_gain, measured_where
from lostwork_plugins.flow.rows import Refusals, point_or_array
from lostwork_plugins.flow.step import FlowStep, Inflow

__all__ = ["Mixing"]

_ONE_COMPOSITION = 1e-9


class Mixing(FlowStep):
    """A tee, a header, a desuperheater or a mixing vessel; one outlet, named "outlet".

    sum(m h)_in = m_out h_out, sigma = m_out s_out - sum(m s)_in.  Streams of different
    composition leave as their mixture, behind the same backend.  Kinetic and potential energy are
    averaged by mass.

    Entropy generated is split as if every stream were let down to the outlet pressure first:

        pressure drop   sum m_i [s(p_out, h_i) - s_i]
        mixing          the rest: different temperatures and compositions at one pressure

    Raises
    ------
    ProcessError
        The outlet pressure is above that of an inlet; the fluids have different backends or
        options; the composition varies from row to row.

    Notes
    -----
    Streams that react or form flammable mixtures on meeting are hazards that this step does not
    see.  Bejan, Advanced Engineering Thermodynamics, ch. 3 and 5.
    """

    trade_name: ClassVar[str] = "mixing"

    inflows: tuple[lw.Stream, ...]
    """The streams that enter, two or more."""
    p_out: lw.Pressure | None = None
    """Outlet pressure; the lowest inlet pressure unless given."""

    def __init__(self, /, **fields: Any) -> None:
        super().__init__(**fields)
        if len(self.inflows) < 2:
            problem = ("inflows", "give two streams or more")
            raise lw.FieldError(process=self.label, problems=(problem,))

    def solve(self) -> lw.Solution:
        """Find the mixed outlet."""
        refusals = self.refusals
        feeds = [self.inflow(stream) for stream in self.inflows]
        self._refuse_strangers(feeds)
        p_out = self._outlet_pressure(refusals, feeds)
        total = sum(feed.mass for feed in feeds)
        refusals.add(np.asarray(total) <= 0.0, "nothing flows in; give one stream a rate above 0")
        with np.errstate(divide="ignore", invalid="ignore"):
            shares = [np.divide(feed.mass, total) for feed in feeds]
        shared = list(zip(shares, feeds, strict=True))
        outlet = refusals.state(
            self._mixed_fluid(shared), ("p", "h"), p_out, sum(x * feed.h for x, feed in shared)
        )
        mechanical = sum(x * feed.mechanical for x, feed in shared)
        return lw.Solution(
            outlets={
                "outlet": self.stream(
                    "outlet", outlet, feeds[0], mass=total, mechanical=point_or_array(mechanical)
                )
            },
            **self._split(refusals, feeds, outlet, p_out),
        )

    @staticmethod
    def _split(
        refusals: Refusals, feeds: list[Inflow], outlet: lw.State, p_out: lw.Column
    ) -> dict[str, Any]:
        """Give mechanisms and remainder; a stream let down out of its model leaves no split."""
        try:
            fallen = [(feed, let_down(refusals, feed, p_out)) for feed in feeds]
        except lw.PropertyError:
            return {}
        drop = sum(entropy_of_drop(feed, low) for feed, low in fallen)
        total = sum(feed.mass for feed in feeds)
        mixing = total * outlet.si.s - sum(feed.mass * low.si.s for feed, low in fallen)
        lost = np.isnan(drop) & np.isfinite(outlet.si.s)
        if not np.any(lost):
            return {"mechanisms": {"pressure drop": drop, "mixing": mixing}, "remainder": "mixing"}
        known = {"pressure drop": np.where(lost, 0.0, drop), "mixing": np.where(lost, 0.0, mixing)}
        return {"mechanisms": known}

    def purpose(self, balance: lw.Balance) -> lw.Purpose | None:
        """Exergy given up by the streams that lose, for those that gain, if any does.

        Streams of different composition have no common measure, and no purpose.
        """
        feeds = [self.inflow(stream) for stream in self.inflows]
        if any(feed.fluid != feeds[0].fluid for feed in feeds):
            return None
        T0 = balance.surroundings.si.T
        gains = [np.asarray(exergy_gain(feed, self.outlet, T0)) for feed in feeds]
        gained = sum(np.maximum(gain, 0.0) for gain in gains)
        with np.errstate(invalid="ignore"):
            some_gain = np.asarray(gained > 0.0)
        return measured_where(
            some_gain,
            expended=-sum(np.minimum(gain, 0.0) for gain in gains),
            recovered=gained,
            expended_name="exergy given up by streams",
            recovered_name="exergy gained by streams",
        )

    def _refuse_strangers(self, feeds: list[Inflow]) -> None:
        first = feeds[0].fluid
        for feed in feeds[1:]:
            other = feed.fluid
            if (other.backend, dict(other.options)) != (first.backend, dict(first.options)):
                raise lw.ProcessError(
                    process=self.label,
                    reason=f"{first!r} and {other!r} are behind different backends or options; "
                    "make all inflows with one backend and the same options",
                )
            if feed.per_time is not feeds[0].per_time:
                raise lw.ProcessError(
                    process=self.label,
                    reason="some inflows have a rate and some a mass; give all of them rates",
                )
            if feed.state.datum != feeds[0].state.datum:
                raise lw.DatumMismatch(
                    first=first.name,
                    second=other.name,
                    reason=f"{feeds[0].state.datum} against {feed.state.datum}",
                )

    def _outlet_pressure(self, refusals: Refusals, feeds: list[Inflow]) -> lw.Column:
        lowest = feeds[0].p
        for feed in feeds[1:]:
            lowest = np.minimum(lowest, feed.p)
        lowest = point_or_array(lowest)
        if self.p_out is None:
            return lowest
        p_out: lw.Column = self.si.p_out
        with np.errstate(invalid="ignore"):
            refusals.add(
                p_out > lowest,
                "p_out, {out:.6g} Pa, is above the lowest inlet pressure, {low:.6g} Pa; lower "
                "p_out, or bring that stream to pressure first",
                out=p_out,
                low=lowest,
            )
        return p_out

    def _mixed_fluid(self, shared: list[tuple[Any, Inflow]]) -> lw.Fluid:
        first = shared[0][1].fluid
        if all(feed.fluid == first for _, feed in shared):
            return first
        amounts: dict[lw.Component, Any] = {}
        for share, feed in shared:
            spec = feed.fluid.spec
            for component, fraction in zip(spec.components, spec.mole_fractions, strict=True):
                amount = share / spec.molar_mass * fraction
                amounts[component] = amounts.get(component, 0.0) + amount
        total = sum(amounts.values())
        kept: dict[lw.Component, float] = {}
        for component, amount in amounts.items():
            fractions = np.ravel(amount / total)
            fractions = fractions[np.isfinite(fractions)]
            if np.ptp(fractions) > _ONE_COMPOSITION:
                raise lw.ProcessError(
                    process=self.label,
                    reason=f"the fraction of {component.name} in the mixture varies from row to "
                    "row, and a fluid has one composition; take the rows one by one",
                )
            if fractions[0] > 0.0:
                kept[component] = float(fractions[0])
        spec = lw.FluidSpec(tuple(kept), tuple(kept.values()))
        return lw.Fluid(spec, backend=first.backend, **first.options)
