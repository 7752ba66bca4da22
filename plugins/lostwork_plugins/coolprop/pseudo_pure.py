"""A blend that has an equation of its own and no composition: air, R410A and their like.

Such a fluid boils between two pressures (bubble and dew) that its equation does not join by
equilibrium.  Between them CoolProp refuses (T, p) and any quality but 0 and 1, and misses states
close to the bubble line; here every property there is joined by the lever rule between the two
saturated states, at a cost in consistency that `noise_at` tells.
"""

from __future__ import annotations

import math
from typing import Any

import numpy as np
from CoolProp.CoolProp import (
    QT_INPUTS,
)

from lostwork import Column, Pair
from lostwork_plugins.coolprop.pure import PureModel
from lostwork_plugins.coolprop.rows import Row

__all__ = ["PseudoPureModel"]

_NAMES = ("T", "p", "v", "h", "s")
_NOISE_IN_DOME = 0.2
_NOISE = 1e-5


class PseudoPureModel(PureModel):
    """States of one pseudo-pure fluid of CoolProp, see `PropertyModel`."""

    def __init__(self, *recipe: Any) -> None:
        super().__init__(*recipe)
        self.entropy_noise = _NOISE
        self.notes = (
            f"{self.fluid} is a pseudo-pure fluid: between its bubble and dew lines T with p, or a "
            "quality other than 0 and 1, fix no state, and entropy is good to 0.2 J/kg/K or worse "
            "(air at 1 bar: 10); pseudo_pure=False models the mixture instead",
        )

    def noise_at(self, T: Column, p: Column) -> Column:
        """Inconsistency of the entropy, which is much larger between bubble and dew line."""
        T, p = np.broadcast_arrays(T, p)
        here = self._here()
        noise = np.array(super().noise_at(T, p))
        flat = noise.reshape(-1)
        for index, (T_row, p_row) in enumerate(zip(T.flat, p.flat, strict=True)):
            edges = self._pressures(here[0], float(T_row))
            if edges is not None and 0.99 * min(edges) <= p_row <= 1.01 * max(edges):
                flat[index] = self._noise_in_dome(here, float(p_row))
        return noise if noise.ndim else float(noise)

    def _noise_in_dome(self, here: tuple[Any, float, float], p: float) -> float:
        """Entropy of vaporisation against heat over temperature, along the straight lever."""
        line = ("p", "quality")
        liquid, vapour = super()._row(here, line, p, 0.0), super()._row(here, line, p, 1.0)
        if isinstance(liquid, str) or isinstance(vapour, str):
            return _NOISE_IN_DOME
        T_low, T_high = liquid[0], vapour[0]
        glide = (T_high - T_low) / T_low
        mean = T_low * (glide / math.log1p(glide) if abs(glide) > 1e-9 else 1.0)
        gap = (vapour[3] - liquid[3]) / mean - (vapour[4] - liquid[4])
        return max(_NOISE_IN_DOME, abs(gap))

    @staticmethod
    def _pairs() -> frozenset[Pair]:
        held_p = {("p", name) for name in ("v", "h", "s", "u", "quality")}
        return frozenset({("T", "p"), ("T", "v"), ("T", "s"), ("T", "quality")} | held_p)

    def _row(self, here: tuple[Any, float, float], pair: Pair, x: float, y: float) -> Row:
        first, second = pair
        if second == "quality":
            if y not in (0.0, 1.0):
                return (
                    f"{self.fluid} is a pseudo-pure fluid without a quality between 0 and 1; "
                    "give p with h or s"
                )
            return super()._row(here, pair, x, y)
        if second != "p":
            reason = self._reason_against(here[0], pair, x, y)
            if reason is not None:
                return reason
            wet = self._between_lines(here, first, second, x, y)
            if wet is not None:
                return wet
        return super()._row(here, pair, x, y)

    def _on_saturation(self, state: Any, T: float, p: float) -> str | None:
        edges = self._pressures(state, T)
        if edges is None:
            return None
        dew, bubble = sorted(edges)
        if not dew * (1 - 1e-6) <= p <= bubble * (1 + 1e-6):
            return None
        return (
            f"T and p lie between the dew pressure {dew:.9g} Pa and the bubble pressure "
            f"{bubble:.9g} Pa of {self.fluid} at {T:.9g} K and do not fix the state; give p with h"
        )

    def _pressures(self, state: Any, T: float) -> tuple[float, float] | None:
        if T >= self._critical.T:
            return None
        try:
            state.update(QT_INPUTS, 0.0, T)
            bubble = float(state.p())
            state.update(QT_INPUTS, 1.0, T)
        except (ValueError, RuntimeError):
            return None
        return bubble, float(state.p())

    def _between_lines(
        self, here: tuple[Any, float, float], held: str, sought: str, x: float, y: float
    ) -> Row | None:
        """Join the saturated states where `sought` lies between them; ``None`` outside."""
        if x >= (self._critical.T if held == "T" else self._critical.p):
            return None
        line = (held, "quality")
        liquid, vapour = super()._row(here, line, x, 0.0), super()._row(here, line, x, 1.0)
        if isinstance(liquid, str) or isinstance(vapour, str):
            return None
        at_liquid, at_vapour = _value(liquid, sought), _value(vapour, sought)
        quality = (y - at_liquid) / (at_vapour - at_liquid)
        if not 0.0 <= quality <= 1.0:
            return None
        T, p, v, h, s = (a + quality * (b - a) for a, b in zip(liquid[:5], vapour[:5], strict=True))
        return T, p, v, h, s, quality


def _value(row: tuple[float, ...], name: str) -> float:
    if name == "u":
        return row[3] - row[1] * row[2]
    return row[_NAMES.index(name)]
