"""Hypothesis strategies for states, streams, charges, surroundings and steps.

All are keyword-only and shrink to round numbers near ordinary conditions, so that a failing
example can be read.  A state that a fluid does not have is rejected, not raised.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np
from hypothesis import assume
from hypothesis import strategies as st

from lostwork.accounting.flows import Content, Stream
from lostwork.accounting.surroundings import Surroundings
from lostwork.errors import PathError, ProcessError, PropertyError
from lostwork.processes.contract import Process, process
from lostwork.properties.fluid import Fluid
from lostwork.properties.given import GivenState
from lostwork.properties.state import State
from lostwork.quantities import quantity

__all__ = [
    "compositions",
    "contents",
    "fractions",
    "given_states",
    "pressures",
    "processes",
    "ratios",
    "rows_of_states",
    "states",
    "streams",
    "surroundings",
    "temperatures",
    "wet_states",
]

_DECIMALS = 9
_WET_BELOW = 0.95
"""Fraction of the critical pressure below which wet states are drawn."""


def _steps(low: float, high: float, step: float, near: float) -> st.SearchStrategy[float]:
    """Multiples of `step` from `low` to `high`, shrinking towards `near`."""
    first, last = math.ceil(low / step), math.floor(high / step)
    middle = min(max(round(near / step), first), last)
    # Multiples of a decimal step are rounded, so that 0.3 is drawn and not 0.30000000000000004.
    return st.integers(first - middle, last - middle).map(
        lambda n: round((middle + n) * step, _DECIMALS)
    )


def temperatures(*, low: float = 200.0, high: float = 1000.0) -> st.SearchStrategy[Any]:
    """Temperatures from `low` to `high` (K), in steps of half a kelvin, shrinking to 300 K."""
    return _steps(low, high, 0.5, 300.0).map(lambda T: quantity(T, "K"))


def pressures(*, low: float = 1e3, high: float = 1e7) -> st.SearchStrategy[Any]:
    """Pressures from `low` to `high` (Pa), even on a logarithmic scale, shrinking to 1 bar."""
    scale = _steps(math.log10(low), math.log10(high), 0.01, 5.0)
    return scale.map(lambda exponent: quantity(round(10.0**exponent, 3), "Pa"))


def fractions(*, low: float = 0.0, high: float = 1.0, near: float = 1.0) -> st.SearchStrategy[Any]:
    """Pure numbers from `low` to `high` in steps of a hundredth, shrinking to `near`.

    For efficiencies, shares and qualities.
    """
    return _steps(low, high, 0.01, near).map(lambda x: quantity(x, ""))


def ratios(*, high: float = 10.0) -> st.SearchStrategy[Any]:
    """Ratios of pressures or volumes from 1 to `high`, shrinking to 1: nothing happens."""
    return _steps(1.0, high, 0.05, 1.0).map(lambda x: quantity(x, ""))


@st.composite
def compositions(draw: st.DrawFn, /, *, components: Sequence[str]) -> dict[str, float]:
    """Mole fractions of `components`, from near-uniform to near-pure, summing to one."""
    nearly_pure = draw(st.booleans())
    largest = draw(st.integers(0, len(components) - 1))
    weights = [float(draw(st.integers(1, 100))) for _ in components]
    if nearly_pure:
        weights = [1e-4 * w for w in weights]
        weights[largest] = 100.0
    total = math.fsum(weights)
    fractions = {name: w / total for name, w in zip(components, weights, strict=True)}
    rest = math.fsum(f for name, f in fractions.items() if name != components[largest])
    fractions[components[largest]] = 1.0 - rest
    return fractions


@st.composite
def surroundings(
    draw: st.DrawFn, /, *, T_low: float = 250.0, T_high: float = 320.0
) -> Surroundings:
    """Surroundings from an arctic to a desert site, 0.7 to 1.1 bar."""
    T = draw(_steps(T_low, T_high, 0.5, 288.0))
    p = draw(_steps(7e4, 1.1e5, 1e3, 1e5))
    return Surroundings(T=quantity(T, "K"), p=quantity(p, "Pa"))


@st.composite
def states(
    draw: st.DrawFn,
    *,
    fluid: Fluid,
    T_low: float | None = None,
    T_high: float | None = None,
    p_low: float = 1e4,
    p_high: float = 5e6,
) -> State:
    """States of `fluid` by T and p, within its own limits."""
    limits = fluid.limits
    low = max(limits.T_min, T_low if T_low is not None else 150.0)
    high = min(limits.T_max, T_high if T_high is not None else 900.0)
    T = draw(temperatures(low=low, high=high))
    p = draw(pressures(low=max(p_low, limits.p_min), high=min(p_high, limits.p_max)))
    return _state_or_reject(fluid, T=T, p=p)


@st.composite
def wet_states(
    draw: st.DrawFn, /, *, fluid: Fluid, p_low: float = 1e4, p_high: float = 5e6
) -> State:
    """Wet vapour of `fluid`, both saturation lines included, by pressure and quality.

    Parameters
    ----------
    fluid
        Its backend must know two phases.
    p_low, p_high
        Pa; at most 0.95 of the critical pressure is drawn, where that is known.
    """
    critical = fluid.critical_point
    high = p_high if critical is None else min(p_high, _WET_BELOW * critical.p)
    p = draw(pressures(low=max(p_low, fluid.limits.p_min), high=high))
    return _state_or_reject(fluid, p=p, quality=draw(fractions()))


@st.composite
def rows_of_states(draw: st.DrawFn, /, *, fluid: Fluid, rows: int, **region: float) -> State:
    """One state of `rows` rows, each in a region as for `states`."""
    one = states(fluid=fluid, **region)
    points = [draw(one).si for _ in range(rows)]
    T, p = (np.array([getattr(point, name) for point in points]) for name in ("T", "p"))
    return fluid.state_si(("T", "p"), T, p)


@st.composite
def given_states(
    draw: st.DrawFn, /, *, fluid: Fluid, datum: str = "given", **region: float
) -> GivenState:
    """States of `fluid` as a host program would hand them in, on a datum of its own.

    Its h and s are counted from another zero, by up to 1 MJ/kg and 1 kJ/kg/K; take one draw for
    all the states of a balance, since every draw has a zero of its own.
    """
    state = draw(states(fluid=fluid, **region))
    h = draw(_steps(-1e6, 1e6, 1e3, 0.0))
    s = draw(_steps(-1e3, 1e3, 1.0, 0.0))
    return GivenState(
        h=quantity(state.si.h + h, "J/kg"),
        s=quantity(state.si.s + s, "J/(kg*K)"),
        T=state.T,
        p=state.p,
        v=state.v,
        datum=datum,
        label=state.label,
    )


@st.composite
def streams(draw: st.DrawFn, /, *, fluid: Fluid, name: str = "", **region: float) -> Stream:
    """Streams of `fluid` of 0.1 to 10 kg/s in a region as for `states`."""
    state = draw(states(fluid=fluid, **region))
    return Stream(state, rate=quantity(draw(_steps(0.1, 10.0, 0.1, 1.0)), "kg/s"), name=name)


@st.composite
def contents(draw: st.DrawFn, /, *, fluid: Fluid, name: str = "", **region: float) -> Content:
    """Charges of `fluid` of 0.1 to 10 kg in a region as for `states`."""
    state = draw(states(fluid=fluid, **region))
    return Content(state, mass=quantity(draw(_steps(0.1, 10.0, 0.1, 1.0)), "kg"), name=name)


@st.composite
def processes(
    draw: st.DrawFn, /, *, kind: str, fields: st.SearchStrategy[Mapping[str, Any]]
) -> Process:
    """Steps of an installed process type that can be run; others are rejected.

    Parameters
    ----------
    kind
        Trade name, as for `lostwork.process`.
    fields
        Draws the fields of one step.  A field that cannot be read is an error of the strategy and
        is raised; a step that refuses to run is rejected.
    """
    step = process(kind, **draw(fields))
    try:
        _ = step.solution
    except (ProcessError, PathError, PropertyError):
        assume(False)
        raise
    return step


def _state_or_reject(fluid: Fluid, **given: Any) -> State:
    try:
        return fluid.state(**given)
    except PropertyError:
        assume(False)
        raise
