"""The outlet pressure of a step, from whichever way the trade states it."""

from __future__ import annotations

import numpy as np

import lostwork as lw
from lostwork_plugins.flow.rows import Refusals
from lostwork_plugins.flow.step import FlowStep

__all__ = ["lowered_pressure", "raised_pressure"]


def lowered_pressure(
    step: FlowStep, refusals: Refusals, p_in: lw.Column, side: str = ""
) -> lw.Column:
    """Give the outlet pressure, Pa, of a step in which pressure falls.

    From ``p_out``, ``pressure_ratio`` (inlet over outlet, 1 or more) or ``pressure_drop``; the
    inlet pressure where none of them is given.  `side` ends the names of these fields
    where a step has several streams.
    """
    si, given = step.si, step.given_fields
    if f"p_out{side}" in given:
        p_out = getattr(si, f"p_out{side}")
    elif f"pressure_ratio{side}" in given:
        ratio = getattr(si, f"pressure_ratio{side}")
        _refuse_ratio(refusals, ratio)
        p_out = p_in / ratio
    elif f"pressure_drop{side}" in given:
        p_out = p_in - getattr(si, f"pressure_drop{side}")
    else:
        return p_in
    with np.errstate(invalid="ignore"):
        refusals.add(
            p_out > p_in,
            "the outlet pressure, {out:.6g} Pa, is above the inlet pressure, {inn:.6g} Pa; "
            "pressure falls here, so lower p_out or take a compression or pumping step",
            out=p_out,
            inn=p_in,
        )
        refusals.add(
            np.asarray(p_out) <= 0.0,
            "a drop from {inn:.6g} Pa would leave {out:.6g} Pa; give a smaller pressure_drop",
            out=p_out,
            inn=p_in,
        )
    return p_out  # type: ignore[no-any-return]


def raised_pressure(step: FlowStep, refusals: Refusals, p_in: lw.Column) -> lw.Column:
    """Give the outlet pressure, Pa, of a step in which pressure rises.

    From ``p_out``, ``pressure_ratio`` (outlet over inlet, 1 or more) or ``pressure_rise``.
    """
    si, given = step.si, step.given_fields
    if "p_out" in given:
        p_out = si.p_out
    elif "pressure_ratio" in given:
        _refuse_ratio(refusals, si.pressure_ratio)
        p_out = p_in * si.pressure_ratio
    else:
        p_out = p_in + si.pressure_rise
    with np.errstate(invalid="ignore"):
        refusals.add(
            p_out < p_in,
            "the outlet pressure, {out:.6g} Pa, is below the inlet pressure, {inn:.6g} Pa; "
            "pressure rises here, so raise p_out or take a throttling or expansion step",
            out=p_out,
            inn=p_in,
        )
    return p_out  # type: ignore[no-any-return]


def _refuse_ratio(refusals: Refusals, ratio: lw.Column) -> None:
    refusals.add(
        np.asarray(ratio) < 1.0,
        "pressure_ratio is {ratio:.6g}; it is the higher pressure over the lower, 1 or more",
        ratio=ratio,
    )
