"""The legs that paths are made of: a quasi-static one, or sudden steps one after another.

All figures are per kilogram, heat and work positive into the charge.

A quasi-static leg passes through states; its work is exact from its end states:

    T held        q = T (s2 - s1),  w = (u2 - u1) - q
    s held        q = 0,            w = u2 - u1
    p held        w = -p (v2 - v1)
    v held        w = 0
    p v^n held    w = (p2 v2 - p1 v1) / (n - 1),  or p1 v1 ln(v1 / v2) for n = 1

Sudden steps rest at the end of each and have no states in between.  The load is set to p_i at once
and the charge comes to rest against it:

    w_i = -p_i (v_i - v_(i-1))
    adiabatic     u_i - u_(i-1) = w_i,  that is  h_i = u_(i-1) + p_i v_(i-1)
    T held        the state at (T, p_i); the heat comes from a reservoir at T
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any, Literal, TypeAlias

import numpy as np
import numpy.typing as npt

from lostwork.accounting.entries import summed
from lostwork.errors import PathError
from lostwork.properties.backend import Column
from lostwork.properties.state import SiState, State
from lostwork.quantities import (
    FRACTION,
    PRESSURE,
    SPECIFIC_ENERGY,
    SPECIFIC_ENTROPY,
    SPECIFIC_VOLUME,
    TEMPERATURE,
    to_si,
)

__all__ = ["Held", "Kind", "Leg", "pressure_schedule", "quasi_static_leg", "stepwise_leg"]

Held: TypeAlias = Literal["T", "s", "p", "v", "polytropic"]
Kind: TypeAlias = Literal["quasi-static", "stepwise"]

_DIMENSION_OF = {
    "T": TEMPERATURE,
    "p": PRESSURE,
    "v": SPECIFIC_VOLUME,
    "h": SPECIFIC_ENERGY,
    "s": SPECIFIC_ENTROPY,
    "u": SPECIFIC_ENERGY,
    "quality": FRACTION,
}
_ORDER = tuple(_DIMENSION_OF)


@dataclass(frozen=True)
class Leg:
    """One leg: end states, work and heat per kilogram (J/kg), and how to trace its states.

    `reservoir` is the temperature at which all heat crosses, or ``None`` where it crosses at the
    temperature of the charge (or none does).  `step_work` and `step_heat` run along the first axis.
    """

    kind: Kind
    held: str
    start: State
    end: State
    work: Column
    heat: Column
    reservoir: Column | None
    trace: Callable[[], State]
    step_work: npt.NDArray[np.float64] | None = None
    step_heat: npt.NDArray[np.float64] | None = None


def quasi_static_leg(
    start: State, held: Held, until: Mapping[str, Any], exponent: Any, points: int
) -> Leg:
    """Lead a charge slowly until one property has its value; see `Path.quasi_static`."""
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
        return _polytropic_leg(start, name, target, exponent, points)
    if exponent is not None:
        raise PathError(reason="exponent= goes with held='polytropic'")
    if held not in ("T", "s", "p", "v"):
        raise PathError(reason=f"held={held!r}; give 'T', 's', 'p', 'v' or 'polytropic'")
    end = _at(start, held, getattr(start.si, held), name, target)
    work, heat = _exchanged(held, start, end)
    return Leg(
        kind="quasi-static",
        held=held,
        start=start,
        end=end,
        work=work,
        heat=heat,
        reservoir=start.si.T if held == "T" else None,
        trace=lambda: _traced(start, end, held, points),
    )


def _polytropic_leg(start: State, name: str, target: Column, exponent: Any, points: int) -> Leg:
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
    work: Column
    if n == 1.0:
        work = p1 * v1 * np.log(v1 / v2)
    else:
        work = (end.si.p * end.si.v - p1 * v1) / (n - 1.0)

    def trace() -> State:
        p = np.stack([_between(p1, p2, f, geometric=True) for f in _fractions(points)])
        if n == 0.0:
            v = np.stack([_between(v1, v2, f, geometric=True) for f in _fractions(points)])
        else:
            v = v1 * (p1 / p) ** (1.0 / n)
        return start.fluid.state_si(("p", "v"), p, v)

    return Leg(
        kind="quasi-static",
        held=f"p v^{n:g}",
        start=start,
        end=end,
        work=work,
        heat=(end.si.u - start.si.u) - work,
        reservoir=None,
        trace=trace,
    )


def stepwise_leg(start: State, outer: Sequence[Column], held: Literal["T"] | None) -> Leg:
    """Set the load to each outer pressure in turn; see `Path.stepwise`."""
    if held not in ("T", None):
        raise PathError(reason=f"held={held!r}; steps are adiabatic or held at T")
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
    return Leg(
        kind="stepwise",
        held=held or "adiabatic",
        start=start,
        end=rests[-1],
        work=summed(works),
        heat=summed(heats),
        reservoir=start.si.T if held == "T" else None,
        trace=lambda: _stacked(rests),
        step_work=np.stack(np.broadcast_arrays(*works)),
        step_heat=np.stack(np.broadcast_arrays(*heats)),
    )


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
