"""What a step spends and what it is for: exergy expended and recovered.

Changes of the exergy of one fluid need no dead state, b2 - b1 = (h2 - h1) - T0 (s2 - s1) + de, so
they stand even where the fluid has none.  Roles are told by sign, because below the temperature of
the surroundings a stream gains exergy by being cooled (Kotas, The Exergy Method of Thermal Plant
Analysis, 1985, ch. 3; Tsatsaronis, Definitions and nomenclature in exergy analysis, 2007).
"""

from __future__ import annotations

from typing import Any

import numpy as np

import lostwork as lw
from lostwork_plugins.flow.rows import point_or_array
from lostwork_plugins.flow.step import Inflow

__all__ = ["exergy_brought_by_heat", "exergy_gain", "measured_where", "one_gives_one_gains"]


def exergy_gain(
    feed: Inflow, outlet: lw.Stream, T0: lw.Column, *, with_mechanical: bool = True
) -> lw.Column:
    """Rise of the flow exergy of a stream, W (or J): m [(h2 - h1) - T0 (s2 - s1) + de]."""
    si = outlet.state.si
    rise = (si.h - feed.h) - T0 * (si.s - feed.s)
    if with_mechanical:
        rise = rise + outlet.si.mechanical - feed.mechanical
    gain: lw.Column = feed.mass * rise
    return gain


def exergy_brought_by_heat(balance: lw.Balance) -> lw.Column:
    """Exergy that comes with heat, W (or J): sum of Q (1 - T0 / T_boundary) where it is above zero.

    Heat taken from something hotter than the surroundings brings exergy, and so does heat given to
    something colder than they are; both belong to what a step spends.
    """
    T0 = balance.surroundings.si.T
    brought: lw.Column = 0.0
    for heat in balance.heat:
        if heat.si is not None:
            brought = brought + np.maximum(heat.si * (1.0 - T0 / np.asarray(heat.T)), 0.0)
    return point_or_array(brought)


def measured_where(
    where: Any,
    *,
    expended: lw.Column,
    recovered: lw.Column,
    expended_name: str,
    recovered_name: str,
) -> lw.Purpose | None:
    """Make a purpose for the rows where `where` holds; NaN elsewhere, ``None`` if nowhere."""
    mask = np.asarray(where, dtype=bool)
    if not mask.any():
        return None
    return lw.Purpose(
        expended=point_or_array(np.where(mask, expended, np.nan)),
        recovered=point_or_array(np.where(mask, recovered, np.nan)),
        expended_name=expended_name,
        recovered_name=recovered_name,
    )


def one_gives_one_gains(
    first: lw.Column, second: lw.Column, first_name: str, second_name: str
) -> lw.Purpose | None:
    """Measure two partners of whom one gives exergy up and the other gains it.

    Parameters
    ----------
    first, second
        Gains of exergy of the two, W (or J); negative for the one that gives.
    first_name, second_name
        Who they are.

    Returns
    -------
    Purpose or None
        Rows in which neither gains, as in heat across the temperature of the surroundings, have
        no purpose to measure.
    """
    with np.errstate(invalid="ignore"):
        first_gives = np.asarray((first < 0.0) & (second > 0.0))
        second_gives = np.asarray((second < 0.0) & (first > 0.0))
    if first_gives.any() and second_gives.any():
        giver, gainer = f"{first_name} or {second_name}", f"{second_name} or {first_name}"
    elif second_gives.any():
        giver, gainer = second_name, first_name
    else:
        giver, gainer = first_name, second_name
    return measured_where(
        first_gives | second_gives,
        expended=-np.minimum(first, second),
        recovered=np.maximum(first, second),
        expended_name=f"exergy given up by the {giver}",
        recovered_name=f"exergy gained by the {gainer}",
    )
