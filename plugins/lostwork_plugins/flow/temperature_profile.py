"""Temperatures along a heat exchanger, over the share of the duty that has been passed.

The share runs from 0 at the inlet of the hot stream to 1 at its outlet.  Enthalpy and pressure of
each stream run linearly with it, so what a stream has reached is its state at (p, h), and the
difference of temperatures is found wherever it is least: at an end, or at a bend inside, where a
stream begins to boil or to condense.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
import numpy.typing as npt

import lostwork as lw
from lostwork_plugins.flow.bracketing import bracketed_root
from lostwork_plugins.flow.rows import Refusals, point_or_array
from lostwork_plugins.flow.step import Inflow

__all__ = ["Side", "duty_at_approach", "least_difference"]

_Array = npt.NDArray[np.float64]

_POINTS = 25
_REFINED_POINTS = 13
_MOST_REFINEMENTS = 12
_LEVEL = 1e-7
_DUTY_ACCURACY = 1e-10
_APPROACH_ACCURACY = 1e-9


@dataclass(frozen=True)
class Side:
    """One stream of an exchanger: what enters, its outlet pressure, and what it loses outside.

    `sense` is +1 for the stream that takes the duty up, -1 for the one that gives it.
    """

    feed: Inflow
    p_out: lw.Column
    loss: lw.Column
    sense: float

    def duty_to(self, outlet: lw.State) -> lw.Column:
        """Duty at which the stream leaves in the state `outlet`, W (or J)."""
        duty: lw.Column = self.sense * self.feed.mass * (outlet.si.h - self.feed.h) - self.loss
        return duty

    def outlet(self, refusals: Refusals, duty: lw.Column) -> lw.State:
        """Give the state in which the stream leaves."""
        return self.reached(refusals, duty, 1.0)

    def reached(self, refusals: Refusals, duty: lw.Column, share: Any) -> lw.State:
        """Give the state when the stream has passed a share (0 to 1) of the duty."""
        feed = self.feed
        with np.errstate(divide="ignore", invalid="ignore"):
            rise = self.sense * np.divide(duty + self.loss, feed.mass)
        p = feed.p + share * (self.p_out - np.asarray(feed.p))
        h = feed.h + share * rise
        return refusals.state(feed.fluid, ("p", "h"), point_or_array(p), point_or_array(h))


def least_difference(
    refusals: Refusals, hot: Side, cold: Side, duty: lw.Column, arrangement: str
) -> lw.Column:
    """Least temperature of the hot less that of the cold stream along the exchanger, K.

    Parameters
    ----------
    refusals
        Of the step.
    hot, cold
        The two sides.
    duty
        Heat taken up by the cold stream, W (or J).
    arrangement
        "counter" or "parallel".

    Returns
    -------
    float or ndarray
        Negative where temperatures cross.  Located between the neighbours of the least of 25
        points, until the points around it are level within 1e-7 K.
    """
    shape = np.broadcast_shapes(
        *(np.shape(x) for side in (hot, cold) for x in (side.feed.T, side.feed.mass, side.p_out)),
        np.shape(duty),
        np.shape(hot.loss),
    )

    def difference(share: _Array) -> _Array:
        passed = 1.0 - share if arrangement == "counter" else share
        warm = hot.reached(refusals, duty, share).si.T
        cool = cold.reached(refusals, duty, passed).si.T
        return np.asarray(np.asarray(warm) - np.asarray(cool), dtype=np.float64)

    low, high, points = np.zeros(shape), np.ones(shape), _POINTS
    least = np.full(shape, np.inf)
    for _ in range(_MOST_REFINEMENTS):
        steps = np.linspace(0.0, 1.0, points).reshape(-1, *(1,) * len(shape))
        share = low + steps * (high - low)
        apart = np.broadcast_to(difference(share), (points, *shape))
        # A row that fails somewhere along the way has no least difference.
        place = np.argmin(np.where(np.isnan(apart), -np.inf, apart), axis=0)
        now = np.take_along_axis(apart, place[None], axis=0)[0]
        least = np.where(np.isnan(now), np.nan, np.minimum(least, now))
        below, above = np.maximum(place - 1, 0), np.minimum(place + 1, points - 1)
        low = np.take_along_axis(share, below[None], axis=0)[0]
        high = np.take_along_axis(share, above[None], axis=0)[0]
        around = [np.take_along_axis(apart, at[None], axis=0)[0] for at in (below, above)]
        with np.errstate(invalid="ignore"):
            uneven = np.maximum(around[0], around[1]) - now > _LEVEL
        if not np.any(uneven):
            break
        points = _REFINED_POINTS
    return point_or_array(least)


def duty_at_approach(
    refusals: Refusals,
    hot: Side,
    cold: Side,
    largest: lw.Column,
    approach: lw.Column,
    arrangement: str,
) -> lw.Column:
    """Duty, W (or J), at which the least difference of temperatures is `approach` (K).

    The difference falls at every place as the duty rises, so there is one such duty between
    nothing and `largest`, at which one stream has reached the other.
    """
    target = np.asarray(approach, dtype=np.float64)
    shape = np.broadcast_shapes(
        *(np.shape(x) for side in (hot, cold) for x in (side.feed.T, side.feed.mass, side.p_out)),
        np.shape(largest),
        target.shape,
    )

    def residual(duty: _Array) -> _Array:
        found = least_difference(refusals, hot, cold, point_or_array(duty), arrangement)
        return np.asarray(found) - target

    low = np.zeros(shape)
    high = np.broadcast_to(np.asarray(largest, dtype=np.float64), shape)
    root = bracketed_root(residual, low, high, relative=_DUTY_ACCURACY, enough=_APPROACH_ACCURACY)
    return point_or_array(root)
