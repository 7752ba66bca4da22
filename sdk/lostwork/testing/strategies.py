"""Hypothesis strategies for fluids, states, streams and surroundings.

All are keyword-only and shrink to round numbers near ordinary conditions, so that a failing
example can be read.  A state that a fluid does not have is rejected, not raised.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Any

from hypothesis import assume
from hypothesis import strategies as st

from lostwork.accounting.flows import Content, Stream
from lostwork.accounting.surroundings import Surroundings
from lostwork.errors import PropertyError
from lostwork.properties.fluid import Fluid
from lostwork.properties.state import State
from lostwork.quantities import quantity

__all__ = [
    "compositions",
    "contents",
    "pressures",
    "states",
    "streams",
    "surroundings",
    "temperatures",
]


def _steps(low: float, high: float, step: float, near: float) -> st.SearchStrategy[float]:
    """Multiples of `step` from `low` to `high`, shrinking towards `near`."""
    first, last = math.ceil(low / step), math.floor(high / step)
    middle = min(max(round(near / step), first), last)
    return st.integers(first - middle, last - middle).map(lambda n: (middle + n) * step)


def temperatures(*, low: float = 200.0, high: float = 1000.0) -> st.SearchStrategy[Any]:
    """Temperatures from `low` to `high` (K), in steps of half a kelvin, shrinking to 300 K."""
    return _steps(low, high, 0.5, 300.0).map(lambda T: quantity(T, "K"))


def pressures(*, low: float = 1e3, high: float = 1e7) -> st.SearchStrategy[Any]:
    """Pressures from `low` to `high` (Pa), even on a logarithmic scale, shrinking to 1 bar."""
    scale = _steps(math.log10(low), math.log10(high), 0.01, 5.0)
    return scale.map(lambda exponent: quantity(round(10.0**exponent, 3), "Pa"))


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
def streams(draw: st.DrawFn, /, *, fluid: Fluid, name: str = "", **region: float) -> Stream:
    """Streams of `fluid` of 0.1 to 10 kg/s in a region as for `states`."""
    state = draw(states(fluid=fluid, **region))
    return Stream(state, rate=quantity(draw(_steps(0.1, 10.0, 0.1, 1.0)), "kg/s"), name=name)


@st.composite
def contents(draw: st.DrawFn, /, *, fluid: Fluid, name: str = "", **region: float) -> Content:
    """Charges of `fluid` of 0.1 to 10 kg in a region as for `states`."""
    state = draw(states(fluid=fluid, **region))
    return Content(state, mass=quantity(draw(_steps(0.1, 10.0, 0.1, 1.0)), "kg"), name=name)


def _state_or_reject(fluid: Fluid, **given: Any) -> State:
    try:
        return fluid.state(**given)
    except PropertyError:
        assume(False)
        raise
