"""Charges that exchange heat, with a reservoir or with each other, or are joined."""

from __future__ import annotations

from typing import ClassVar, Literal

import numpy as np

from lostwork import (
    Balance,
    Column,
    Content,
    Fluid,
    Heat,
    Process,
    ProcessError,
    Purpose,
    Solution,
    State,
    Temperature,
    Work,
    bracketed_root,
)
from lostwork_plugins.closed.paths import state_of
from lostwork_plugins.closed.worth import charge_exergy_rise, from_heat

__all__ = ["Equilibration", "ReservoirContact"]

_ROUND_OFF = 1e-12


class ReservoirContact(Process):
    """A charge heated or cooled by one reservoir, at constant pressure or volume.

    It ends at `T_end`, or at the temperature of the reservoir.  `T_end` lies between the start and
    the reservoir: the entropy of the whole may rise beyond, but heat does not flow uphill alone.

    Raises
    ------
    ProcessError
        `T_end` is not between the start and the reservoir.
    """

    trade_name: ClassVar[str] = "reservoir-contact"

    charge: Content
    reservoir: Temperature
    held: Literal["p", "v"] = "p"
    T_end: Temperature | None = None

    def solve(self) -> Solution:
        """End state, heat from the reservoir, and the work of the boundary."""
        start = state_of(self.charge, self.label)
        mass = self.charge.mass_si
        T_end = self.si.reservoir if self.T_end is None else self.si.T_end
        self._require_downhill(start.si.T, T_end)
        if self.held == "p":
            end = start.fluid.state_si(("T", "p"), T_end, start.si.p)
        else:
            end = start.fluid.state_si(("T", "v"), T_end, start.si.v)
        work = -start.si.p * (end.si.v - start.si.v) if self.held == "p" else 0.0 * end.si.v
        q = (end.si.u - start.si.u) - work
        return Solution(
            after={"charge": Content.from_si(end, mass, name=self.stream_name("charge"))},
            heat=(Heat.from_si(mass * q, self.si.reservoir, per_time=False, name="reservoir"),),
            work=(Work.from_si(mass * work, per_time=False, name="boundary"),),
            remainder="heat transfer",
        )

    def _require_downhill(self, T: Column, T_end: Column) -> None:
        way, whole = np.asarray(T_end - T), np.asarray(self.si.reservoir - T)
        uphill = (way * whole < 0.0) | (np.abs(way) > np.abs(whole) * (1.0 + _ROUND_OFF))
        if np.any(uphill):
            raise ProcessError(
                process=self.label,
                reason=f"T_end = {self.T_end} is not between the start, {T} K, and the reservoir, "
                f"{self.reservoir}; heat does not flow uphill by itself",
            )

    def purpose(self, balance: Balance) -> Purpose | None:
        """Exergy of the charge against that of the heat, where one gains what the other gives."""
        rise = charge_exergy_rise(balance)
        if rise is None:
            return None
        useful = balance.work_useful.magnitude
        heat = from_heat(balance)
        gives = np.asarray(heat) > 0.0
        expended = np.where(gives, heat + np.maximum(useful, 0.0), -rise + np.maximum(useful, 0.0))
        recovered = np.where(gives, rise - np.minimum(useful, 0.0), -heat - np.minimum(useful, 0.0))
        measured = (expended > 0.0) & (recovered >= 0.0)
        if not np.any(measured):
            return None
        return Purpose(
            _plain(np.where(measured, expended, np.nan)),
            _plain(np.where(measured, recovered, np.nan)),
            "exergy given up",
            "exergy gained",
        )


class Equilibration(Process):
    """Two charges, isolated together, brought to equilibrium.

    ``contact="heat"``: a conducting wall lies between them; each keeps its volume (``held="v"``)
    or its pressure (``held="p"``), and both end at one temperature.
    ``contact="joined"``: the wall is taken out of a rigid, insulated space; they share it, and mix
    if they differ.  One fluid gives one state (v, u); joined charges need one backend.
    """

    trade_name: ClassVar[str] = "equilibration"

    first: Content
    second: Content
    contact: Literal["heat", "joined"] = "joined"
    held: Literal["p", "v"] = "v"

    def solve(self) -> Solution:
        """End states, and boundary work where pressures are held."""
        if self.contact == "heat":
            return self._by_heat()
        return self._joined()

    def _by_heat(self) -> Solution:
        a, b = state_of(self.first, self.label), state_of(self.second, self.label)
        ma, mb = self.first.mass_si, self.second.mass_si
        energy = "h" if self.held == "p" else "u"
        total = ma * getattr(a.si, energy) + mb * getattr(b.si, energy)

        def at(state: State, T: Column) -> State:
            if self.held == "p":
                return state.fluid.state_si(("T", "p"), T, state.si.p)
            return state.fluid.state_si(("T", "v"), T, state.si.v)

        def excess(T: Column) -> Column:
            inside = ma * getattr(at(a, T).si, energy) + mb * getattr(at(b, T).si, energy)
            left: Column = inside - total
            return left

        T = bracketed_root(
            excess, np.minimum(a.si.T, b.si.T) + 0.0 * ma, np.maximum(a.si.T, b.si.T) + 0.0 * mb
        )
        if np.any(np.isnan(np.asarray(T))):
            raise ProcessError(
                process=self.label,
                reason="no common temperature was found between those of the two charges",
            )
        a_end, b_end = at(a, T), at(b, T)
        work: tuple[Work, ...] = ()
        if self.held == "p":
            pushed = -ma * a.si.p * (a_end.si.v - a.si.v) - mb * b.si.p * (b_end.si.v - b.si.v)
            work = (Work.from_si(pushed, per_time=False, name="boundary"),)
        return Solution(
            after={
                "first": Content.from_si(a_end, ma, name=self.stream_name("first")),
                "second": Content.from_si(b_end, mb, name=self.stream_name("second")),
            },
            work=work,
            remainder="heat transfer",
        )

    def _joined(self) -> Solution:
        a, b = state_of(self.first, self.label), state_of(self.second, self.label)
        ma, mb = self.first.mass_si, self.second.mass_si
        mass = ma + mb
        v = (ma * a.si.v + mb * b.si.v) / mass
        u = (ma * a.si.u + mb * b.si.u) / mass
        end = self._mixed_fluid(a.fluid, b.fluid, ma, mb).state_si(("v", "u"), v, u)
        return Solution(
            after={"charge": Content.from_si(end, mass, name=self.stream_name("charge"))},
            remainder="mixing",
        )

    def _mixed_fluid(self, a: Fluid, b: Fluid, ma: Column, mb: Column) -> Fluid:
        if a == b:
            return a
        if a.backend != b.backend or dict(a.options) != dict(b.options):
            raise ProcessError(
                process=self.label,
                reason=f"joined charges need one backend; they have {a!r} and {b!r}",
            )
        if np.ndim(ma) or np.ndim(mb):
            raise ProcessError(
                process=self.label,
                reason="masses are arrays and the fluids differ, so every row has a composition "
                "of its own; take the rows one by one",
            )
        masses: dict[str, float] = {}
        for fluid, mass in ((a, float(ma)), (b, float(mb))):
            spec = fluid.spec
            for component, w in zip(spec.components, spec.mass_fractions, strict=True):
                masses[component.cas] = masses.get(component.cas, 0.0) + w * mass
        total = sum(masses.values())
        fractions = {cas: mass / total for cas, mass in masses.items()}
        return Fluid(fractions, backend=a.backend, basis="mass", **a.options)

    def purpose(self, balance: Balance) -> Purpose | None:
        """Exergy that one charge gains from the other, where it does.

        A charge that keeps its pressure pushes its surroundings back; the useful part of that work,
        (p - p0) (V2 - V1), is counted with the charge that does it.
        """
        if self.contact == "joined" or balance.exergy_basis != "dead state":
            return None
        p0 = balance.surroundings.si.p
        rises = [
            after.exergy(balance.surroundings).magnitude
            - before.exergy(balance.surroundings).magnitude
            + (after.state.si.p - p0) * (after.volume.magnitude - before.volume.magnitude)
            for before, after in zip(balance.before, balance.after, strict=True)
        ]
        gained, given = np.maximum(*rises), -np.minimum(*rises)
        measured = (np.asarray(gained) > 0.0) & (np.asarray(given) > 0.0)
        if not np.any(measured):
            return None
        return Purpose(
            _plain(np.where(measured, given, np.nan)),
            _plain(np.where(measured, gained, np.nan)),
            "exergy of one charge",
            "exergy of the other",
        )


def _plain(value: np.ndarray[tuple[int, ...], np.dtype[np.float64]]) -> Column:
    return value if value.shape else float(value)
