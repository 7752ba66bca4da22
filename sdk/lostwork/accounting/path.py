"""The way between two states of a charge: quasi-static, or in sudden steps.

All figures are per kilogram, heat and work positive into the charge.

A quasi-static path passes through states; its work is exact from its end states:

    T held        q = T (s2 - s1),  w = (u2 - u1) - q
    s held        q = 0,            w = u2 - u1
    p held        w = -p (v2 - v1)
    v held        w = 0
    p v^n held    w = (p2 v2 - p1 v1) / (n - 1),  or p1 v1 ln(v1 / v2) for n = 1

A stepwise path rests at the end of each step and has no states in between.  The load is set to
p_i at once and the charge comes to rest against it:

    w_i = -p_i (v_i - v_(i-1))
    adiabatic     u_i - u_(i-1) = w_i,  that is  h_i = u_(i-1) + p_i v_(i-1)
    T held        the state at (T, p_i); the heat comes from a reservoir at T
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import Any, Literal, TypeAlias

import numpy as np
import pint

from lostwork.accounting.balance import Balance
from lostwork.accounting.flows import Content, Heat, Work
from lostwork.accounting.losses import Purpose
from lostwork.accounting.surroundings import Surroundings
from lostwork.errors import PathError
from lostwork.properties.backend import Column
from lostwork.properties.state import SiState, State
from lostwork.quantities import (
    FRACTION,
    MASS,
    PRESSURE,
    SPECIFIC_ENERGY,
    SPECIFIC_ENTROPY,
    SPECIFIC_VOLUME,
    TEMPERATURE,
    quantity,
    to_si,
)

__all__ = ["Path", "Shortfall", "pressure_schedule"]

Quantity: TypeAlias = "pint.Quantity[Any]"
Held: TypeAlias = Literal["T", "s", "p", "v", "polytropic"]
Kind: TypeAlias = Literal["quasi-static", "stepwise"]

_DIMENSION_OF = {
    "T": TEMPERATURE,
    "p": PRESSURE,
    "v": SPECIFIC_VOLUME,
    "h": SPECIFIC_ENERGY,
    "u": SPECIFIC_ENERGY,
    "s": SPECIFIC_ENTROPY,
    "quality": FRACTION,
}
_ORDER = tuple(_DIMENSION_OF)
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

    def __init__(
        self,
        *,
        kind: Kind,
        held: str,
        start: State,
        end: State,
        work: Column,
        heat: Column,
        reservoir: Column | None,
        trace: Callable[[], State],
    ) -> None:
        self.kind: Kind = kind
        self.held = held
        self.start = start
        self.end = end
        self._work = work
        self._heat = heat
        self._reservoir = reservoir
        self._trace = trace

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
        if len(until) != 1:
            raise PathError(reason="until= takes one property of the end state")
        name, value = next(iter(until.items()))
        if name not in _DIMENSION_OF or name == held:
            raise PathError(
                reason=f"a path at constant {held} cannot end by {name}; give one of "
                f"{', '.join(n for n in _ORDER if n != held)}"
            )
        target = to_si(value, _DIMENSION_OF[name], f"until {name}")
        if held == "polytropic":
            return cls._polytropic(start, name, target, exponent, points)
        if exponent is not None:
            raise PathError(reason="exponent= goes with held='polytropic'")
        if held not in ("T", "s", "p", "v"):
            raise PathError(reason=f"held={held!r}; give 'T', 's', 'p', 'v' or 'polytropic'")
        end = _at(start, held, getattr(start.si, held), name, target)
        work, heat = _exchanged(held, start, end)
        return cls(
            kind="quasi-static",
            held=held,
            start=start,
            end=end,
            work=work,
            heat=heat,
            reservoir=start.si.T if held == "T" else None,
            trace=lambda: _traced(start, end, held, points),
        )

    @classmethod
    def _polytropic(
        cls, start: State, name: str, target: Column, exponent: Any, points: int
    ) -> Path:
        if exponent is None:
            raise PathError(reason="a polytropic path needs exponent=, n of p v^n")
        if name not in ("p", "v"):
            raise PathError(reason="a polytropic path ends by p or by v")
        n = float(to_si(exponent, FRACTION, "exponent"))
        p1, v1 = start.si.p, start.si.v
        if n == 0.0 and name == "p":
            raise PathError(reason="with exponent 0 the pressure is held; end by v")
        p2 = target if name == "p" else p1 * (v1 / target) ** n
        v2 = target if name == "v" else v1 * (p1 / target) ** (1.0 / n)
        end = start.fluid.state_si(("p", "v"), p2, v2)
        change = end.si.p * end.si.v - p1 * v1
        work = p1 * v1 * np.log(v1 / v2) if n == 1.0 else change / (n - 1.0)
        heat = (end.si.u - start.si.u) - work

        def trace() -> State:
            p = np.stack([_between(p1, p2, f, geometric=True) for f in _fractions(points)])
            v = v1 * (p1 / p) ** (1.0 / n) if n else np.broadcast_to(v1, p.shape)
            return start.fluid.state_si(("p", "v"), p, v)

        return cls(
            kind="quasi-static",
            held=f"p v^{n:g}",
            start=start,
            end=end,
            work=work if np.shape(work) else float(work),
            heat=heat,
            reservoir=None,
            trace=trace,
        )

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
        if held not in ("T", None):
            raise PathError(reason=f"held={held!r}; steps are adiabatic or held at T")
        outer = pressure_schedule(start.si.p, p_end, steps, spacing, pressures)
        rests, works, heats = [start], [], []
        for p in outer:
            last = rests[-1].si
            if held == "T":
                state = start.fluid.state_si(("T", "p"), start.si.T, p)
            else:
                state = start.fluid.state_si(("p", "h"), p, last.u + p * last.v)
            work = -p * (state.si.v - last.v)
            works.append(work)
            heats.append((state.si.u - last.u) - work if held == "T" else 0.0 * work)
            rests.append(state)
        path = cls(
            kind="stepwise",
            held=held or "adiabatic",
            start=start,
            end=rests[-1],
            work=_total(works),
            heat=_total(heats),
            reservoir=start.si.T if held == "T" else None,
            trace=lambda: _stacked(rests),
        )
        path._step_work = np.stack(np.broadcast_arrays(*works))
        path._step_heat = np.stack(np.broadcast_arrays(*heats))
        return path

    _step_work: Any = None
    _step_heat: Any = None

    @cached_property
    def states(self) -> State:
        """States on the way, along the first axis: points of a path, or rests between steps."""
        return self._trace()

    @property
    def work(self) -> Quantity:
        """Work into the charge, J/kg; negative when the charge gives work."""
        return quantity(self._work, "J/kg")

    @property
    def heat(self) -> Quantity:
        """Heat into the charge, J/kg."""
        return quantity(self._heat, "J/kg")

    @property
    def step_work(self) -> Quantity:
        """Work into the charge of each step, along the first axis, J/kg."""
        return quantity(self._steps(self._step_work), "J/kg")

    @property
    def step_heat(self) -> Quantity:
        """Heat into the charge of each step, along the first axis, J/kg."""
        return quantity(self._steps(self._step_heat), "J/kg")

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
        if self._reservoir is None:
            return change
        return change - self._heat / self._reservoir

    def shortfall(self, quasi_static: Path) -> Shortfall:
        """What this path gives less than a quasi-static one from the same start.

        Raises
        ------
        PathError
            The other path is not quasi-static, starts elsewhere, or ends at another pressure.
        """
        if quasi_static.kind != "quasi-static":
            raise PathError(reason="the shortfall is counted from a quasi-static path")
        if not np.all(self.start.isclose(quasi_static.start, relative=_SAME_STATE)):
            raise PathError(reason="the two paths start from different states")
        ends = (self.end, quasi_static.end)
        if not np.allclose(ends[0].si.p, ends[1].si.p, rtol=_SAME_STATE, atol=0.0):
            raise PathError(reason="the two paths end at different pressures")
        same = bool(np.all(ends[0].isclose(ends[1], relative=_SAME_STATE)))
        at_reservoir = (
            None
            if self._reservoir is None
            else quantity(self._reservoir * self.entropy_generated_si, "J/kg")
        )
        return Shortfall(
            work=quantity(self._work - quasi_static._work, "J/kg"),
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
        heat = ()
        if np.any(np.asarray(self._heat) != 0.0):
            T = self._reservoir if self._reservoir is not None else self._mean_temperature()
            heat = (Heat.from_si(kilograms * self._heat, T, per_time=False, name="reservoir"),)
        return Balance(
            name=name or f"{self.kind} path, {self.held}",
            surroundings=surroundings,
            before=Content.from_si(self.start, kilograms),
            after=Content.from_si(self.end, kilograms),
            heat=heat,
            work=(Work.from_si(kilograms * self._work, per_time=False, name="boundary work"),),
            remainder="sudden expansion",
            purpose=purpose,
        )

    def _mean_temperature(self) -> Column:
        change = np.asarray(self.end.si.s - self.start.si.s)
        with np.errstate(invalid="ignore", divide="ignore"):
            mean = np.where(change != 0.0, self._heat / change, self.start.si.T)
        return mean if mean.shape else float(mean)

    def _steps(self, values: Any) -> Any:
        if values is None:
            raise PathError(reason="a quasi-static path has no steps")
        return values

    def __repr__(self) -> str:
        return f"Path({self.kind}, {self.held}: {self.start!r} -> {self.end!r})"


def pressure_schedule(
    p_start: Column,
    p_end: Any,
    steps: int | None,
    spacing: str,
    pressures: Any,
) -> list[Column]:
    """Outer pressures of the steps, Pa: given, or in equal ratios or decrements down to `p_end`."""
    if pressures is not None:
        if p_end is not None or steps is not None:
            raise PathError(reason="give the pressures, or p_end and steps, not both")
        given = np.atleast_1d(to_si(pressures, PRESSURE, "pressures"))
        return [float(p) if np.ndim(p) == 0 else p for p in given]
    if p_end is None or steps is None:
        raise PathError(reason="give p_end and steps, or the pressures")
    if steps < 1 or int(steps) != steps:
        raise PathError(reason=f"steps is a whole number of at least 1; got {steps}")
    last = to_si(p_end, PRESSURE, "p_end")
    if spacing not in ("ratio", "decrement"):
        raise PathError(reason=f"spacing={spacing!r}; give 'ratio' or 'decrement'")
    return [
        _between(p_start, last, (i + 1) / steps, geometric=spacing == "ratio")
        for i in range(int(steps))
    ]


def _between(first: Column, last: Column, fraction: float, *, geometric: bool) -> Column:
    if fraction == 1.0:
        return last + 0.0 * first
    if geometric:
        return first * (last / first) ** fraction
    return first + fraction * (last - first)


def _fractions(points: int) -> list[float]:
    return [float(f) for f in np.linspace(0.0, 1.0, points)]


def _at(start: State, held: str, held_value: Column, name: str, value: Column) -> State:
    pair = (held, name) if _ORDER.index(held) < _ORDER.index(name) else (name, held)
    if pair[0] == held:
        return start.fluid.state_si(pair, held_value, value)
    return start.fluid.state_si(pair, value, held_value)


def _exchanged(held: str, start: State, end: State) -> tuple[Column, Column]:
    a, b = start.si, end.si
    change = b.u - a.u
    if held == "T":
        heat = a.T * (b.s - a.s)
        return change - heat, heat
    if held == "s":
        return change, 0.0 * change
    work = -a.p * (b.v - a.v) if held == "p" else 0.0 * change
    return work, change - work


def _traced(start: State, end: State, held: str, points: int) -> State:
    """States on the way; each held property has a partner that moves evenly through the dome."""
    partner = {"T": "s", "s": "p", "p": "h", "v": "u"}[held]
    first, last = getattr(start.si, partner), getattr(end.si, partner)
    moving = np.stack(
        [_between(first, last, f, geometric=partner == "p") for f in _fractions(points)]
    )
    fixed = np.broadcast_to(getattr(start.si, held), moving.shape)
    return _at(start, held, fixed, partner, moving)


def _total(values: Sequence[Column]) -> Column:
    total: Column = 0.0
    for value in values:
        total = total + value
    return total


def _stacked(states: Sequence[State]) -> State:
    names = ("T", "p", "v", "h", "s", "quality")
    columns = [
        np.stack(np.broadcast_arrays(*(getattr(state.si, name) for state in states)))
        for name in names
    ]
    for column in columns:
        column.flags.writeable = False
    size = int(np.prod(np.shape(columns[0])[1:], dtype=int))
    failed = {
        place * size + row: reason
        for place, state in enumerate(states)
        for row, reason in state.failed.items()
    }
    return State(states[0].fluid, SiState(*columns), failed)
