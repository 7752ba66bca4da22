"""The pairs of properties that CoolProp takes for one fluid, and how it wants them."""

from __future__ import annotations

from collections.abc import Callable, Mapping

from CoolProp.CoolProp import (
    PQ_INPUTS,
    PT_INPUTS,
    QT_INPUTS,
    DmassHmass_INPUTS,
    DmassP_INPUTS,
    DmassSmass_INPUTS,
    DmassT_INPUTS,
    DmassUmass_INPUTS,
    HmassP_INPUTS,
    HmassSmass_INPUTS,
    PSmass_INPUTS,
    PUmass_INPUTS,
    SmassT_INPUTS,
)

from lostwork import Pair

__all__ = ["INPUTS", "OrderedInputs"]

OrderedInputs = tuple[int, Callable[[float, float], tuple[float, float]]]


def _same(x: float, y: float) -> tuple[float, float]:
    return x, y


def _swapped(x: float, y: float) -> tuple[float, float]:
    return y, x


def _density_first(v: float, y: float) -> tuple[float, float]:
    return 1.0 / v, y


def _density_of_second(x: float, v: float) -> tuple[float, float]:
    return 1.0 / v, x


INPUTS: Mapping[Pair, OrderedInputs] = {
    ("T", "p"): (PT_INPUTS, _swapped),
    ("T", "v"): (DmassT_INPUTS, _density_of_second),
    ("T", "s"): (SmassT_INPUTS, _swapped),
    ("T", "quality"): (QT_INPUTS, _swapped),
    ("p", "v"): (DmassP_INPUTS, _density_of_second),
    ("p", "h"): (HmassP_INPUTS, _swapped),
    ("p", "s"): (PSmass_INPUTS, _same),
    ("p", "u"): (PUmass_INPUTS, _same),
    ("p", "quality"): (PQ_INPUTS, _same),
    ("v", "h"): (DmassHmass_INPUTS, _density_first),
    ("v", "s"): (DmassSmass_INPUTS, _density_first),
    ("v", "u"): (DmassUmass_INPUTS, _density_first),
    ("h", "s"): (HmassSmass_INPUTS, _same),
}
"""Number of the input pair, and the order in which its two values go.

CoolProp does not solve (s, u); the core does, on top of (p, s).
"""
