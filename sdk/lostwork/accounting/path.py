"""The way between two states of a charge: quasi-static, or in sudden steps."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from functools import cached_property
from typing import Any, Literal, TypeAlias

import numpy as np
import pint

from lostwork.accounting.balance import Balance
from lostwork.accounting.flows import Content
from lostwork.accounting.legs import (
    Held,
    Kind,
    Leg,
    pressure_schedule,
    quasi_static_leg,
    stepwise_leg,
)
from lostwork.accounting.losses import Purpose
from lostwork.accounting.surroundings import Surroundings
from lostwork.accounting.transfers import Heat, Work
from lostwork.errors import PathError
from lostwork.properties.backend import Column
from lostwork.properties.state import State
from lostwork.quantities import MASS, quantity, to_si

__all__ = ["Path", "Shortfall"]

Quantity: TypeAlias = "pint.Quantity[Any]"

_SAME_STATE = 1e-6


@dataclass(frozen=True)
class Shortfall:
    """What a stepwise path gives less than a quasi-static one.

    `work` is the difference in work (J/kg), at least zero between the same end states;
    `compared` says whether the end states are the same or only the end pressures.
    `at_reservoir` is T times the entropy generated, for steps held at T; it equals `work` when the
    end states are the same, and differs from the work lost, T0 times the entropy generated.
    """

    work: Quantity
    compared: Literal["same end state", "same end pressure"]
    at_reservoir: Quantity | None


class Path:
    """A way from one state of a charge to another; made by `quasi_static` or `stepwise`."""

    def __init__(self, leg: Leg) -> None:
        self._leg = leg

    @classmethod
    def quasi_static(
        cls,
        start: State,
        *,
        held: Held,
        until: Mapping[str, Any],
        exponent: Any = None,
        points: int = 65,
    ) -> Path:
        """Follow a quasi-static path.

        Parameters
        ----------
        start
            First state, one point or an array.
        held
            What stays: "T", "s" (reversible and adiabatic), "p", "v", or "polytropic"
            (p v^n, with `exponent` n).
        until
            One property of the end state, for example ``{"p": "5 bar"}``.
        points
            How many states `states` shows on the way.

        Raises
        ------
        PathError
            The end is not fixed by one property other than the one held.
        """
        return cls(quasi_static_leg(start, held, until, exponent, points))

    @classmethod
    def stepwise(
        cls,
        start: State,
        *,
        p_end: Any = None,
        steps: int | None = None,
        spacing: Literal["ratio", "decrement"] = "ratio",
        pressures: Any = None,
        held: Literal["T"] | None = None,
    ) -> Path:
        """Unload (or load) the charge in sudden steps against constant outer pressures.

        Parameters
        ----------
        start
            First state, one point or an array.
        p_end, steps, spacing
            Last outer pressure, number of steps, and whether the pressures stand in equal ratios or
            differ by equal decrements.
        pressures
            The outer pressures themselves, in order, instead.
        held
            "T": in a reservoir at the temperature of the start.  ``None``: adiabatic.

        Raises
        ------
        PathError
            No schedule, or two of them.
        """
        outer = pressure_schedule(start.si.p, p_end, steps, spacing, pressures)
        return cls(stepwise_leg(start, outer, held))

    @property
    def kind(self) -> Kind:
        """Whether the path is "quasi-static" or "stepwise"."""
        return self._leg.kind

    @property
    def held(self) -> str:
        """What stays on the way, or "adiabatic" for steps that are."""
        return self._leg.held

    @property
    def start(self) -> State:
        """First state."""
        return self._leg.start

    @property
    def end(self) -> State:
        """Last state."""
        return self._leg.end

    @cached_property
    def states(self) -> State:
        """States on the way, along the first axis: points of a path, or rests between steps."""
        return self._leg.trace()

    @property
    def work(self) -> Quantity:
        """Work into the charge, J/kg; negative when the charge gives work."""
        return quantity(self._leg.work, "J/kg")

    @property
    def heat(self) -> Quantity:
        """Heat into the charge, J/kg."""
        return quantity(self._leg.heat, "J/kg")

    @property
    def step_work(self) -> Quantity:
        """Work into the charge of each step, along the first axis, J/kg."""
        return quantity(self._steps(self._leg.step_work), "J/kg")

    @property
    def step_heat(self) -> Quantity:
        """Heat into the charge of each step, along the first axis, J/kg."""
        return quantity(self._steps(self._leg.step_heat), "J/kg")

    @property
    def entropy_generated(self) -> Quantity:
        """Entropy generated in the charge and at the reservoir's wall, J/kg/K.

        Zero for a quasi-static path: the heat is taken to come from bodies that keep pace in T.
        """
        return quantity(self.entropy_generated_si, "J/(kg*K)")

    @property
    def entropy_generated_si(self) -> Column:
        """Entropy generated as a plain number."""
        change = self.end.si.s - self.start.si.s
        if self.kind == "quasi-static":
            return 0.0 * change
        if self._leg.reservoir is None:
            return change
        return change - self._leg.heat / self._leg.reservoir

    def shortfall(self, quasi_static: Path) -> Shortfall:
        """What this path gives less than a quasi-static one from the same start.

        Rows that one of the two could not follow are NaN.

        Raises
        ------
        PathError
            The other path is not quasi-static, starts elsewhere, or ends at another pressure.
        """
        if quasi_static.kind != "quasi-static":
            raise PathError(reason="the shortfall is counted from a quasi-static path")
        ends = (self.end, quasi_static.end)
        lost = np.isnan(ends[0].si.p) | np.isnan(ends[1].si.p)
        if not np.all(self.start.isclose(quasi_static.start, relative=_SAME_STATE) | lost):
            raise PathError(reason="the two paths start from different states")
        if not np.all(np.isclose(ends[0].si.p, ends[1].si.p, rtol=_SAME_STATE, atol=0.0) | lost):
            raise PathError(reason="the two paths end at different pressures")
        same = bool(np.all(ends[0].isclose(ends[1], relative=_SAME_STATE) | lost))
        at_reservoir = (
            None
            if self._leg.reservoir is None
            else quantity(self._leg.reservoir * self.entropy_generated_si, "J/kg")
        )
        return Shortfall(
            work=quantity(self._leg.work - quasi_static._leg.work, "J/kg"),
            compared="same end state" if same else "same end pressure",
            at_reservoir=at_reservoir,
        )

    def balance(
        self,
        surroundings: Surroundings,
        *,
        mass: Any = "1 kg",
        name: str = "",
        purpose: Callable[[Balance], Purpose | None] | None = None,
    ) -> Balance:
        """Draw the balance of a charge of this mass over the path.

        Heat crosses at the reservoir's temperature; without a reservoir, at the thermodynamic mean
        temperature of the path, q / (s2 - s1).
        """
        kilograms = to_si(mass, MASS, "mass")
        heat: tuple[Heat, ...] = ()
        if np.any(np.asarray(self._leg.heat) != 0.0):
            T = self._leg.reservoir if self._leg.reservoir is not None else self._mean_temperature()
            heat = (Heat.from_si(kilograms * self._leg.heat, T, per_time=False, name="reservoir"),)
        return Balance(
            name=name or f"{self.kind} path, {self.held}",
            surroundings=surroundings,
            before=Content.from_si(self.start, kilograms),
            after=Content.from_si(self.end, kilograms),
            heat=heat,
            work=(Work.from_si(kilograms * self._leg.work, per_time=False, name="boundary work"),),
            remainder="sudden expansion",
            purpose=purpose,
        )

    def _mean_temperature(self) -> Column:
        change = np.asarray(self.end.si.s - self.start.si.s)
        with np.errstate(invalid="ignore", divide="ignore"):
            flows = (change != 0.0) & (np.asarray(self._leg.heat) != 0.0)
            mean = np.where(flows, self._leg.heat / change, self.start.si.T)
        return mean if mean.shape else float(mean)

    def _steps(self, values: Any) -> Any:
        if values is None:
            raise PathError(reason="a quasi-static path has no steps")
        return values

    def __repr__(self) -> str:
        return f"Path({self.kind}, {self.held}: {self.start!r} -> {self.end!r})"
