"""A rough density by a cubic equation, against which a root of the accurate one is checked.

A multi-parameter mixture equation has spurious density roots, and neither CoolProp nor a comparison
of Gibbs energies tells them from the true ones.  A cubic has one root per phase: the true roots lie
within a few ten per cent of it, the spurious ones were found 2.6 times off and more.

Source: D.-Y. Peng, D. B. Robinson, Ind. Eng. Chem. Fundam. 15 (1976) 59-64, no interaction
parameters.
"""

from __future__ import annotations

import math
from collections.abc import Sequence

from lostwork import R

__all__ = ["CubicEstimate"]

_OMEGA_A = 0.457235529
_OMEGA_B = 0.0777960739
_SQRT2 = math.sqrt(2.0)


class CubicEstimate:
    """Density roots of a mixture whose components have critical constants Tc (K), pc (Pa)."""

    def __init__(self, Tc: Sequence[float], pc: Sequence[float], acentric: Sequence[float]) -> None:
        self._Tc = tuple(Tc)
        self._sqrt_a = [math.sqrt(_OMEGA_A * (R * T) ** 2 / p) for T, p in zip(Tc, pc, strict=True)]
        self._b = [_OMEGA_B * R * T / p for T, p in zip(Tc, pc, strict=True)]
        self._m = [0.37464 + 1.54226 * w - 0.26992 * w * w for w in acentric]
        self._ln_pc = [math.log(p) for p in pc]
        self._acentric = tuple(acentric)

    def covolume(self, x: Sequence[float]) -> float:
        """Volume of the molecules themselves, m3/mol."""
        return sum(xi * b for xi, b in zip(x, self._b, strict=True))

    def densities(self, T: float, p: float, x: Sequence[float]) -> tuple[float, ...]:
        """Density roots (mol/m3) at T (K) and p (Pa), lowest first: one, or gas and liquid."""
        sqrt_a = sum(
            xi * sa * abs(1 + m * (1 - math.sqrt(T / Tc)))
            for xi, sa, m, Tc in zip(x, self._sqrt_a, self._m, self._Tc, strict=True)
        )
        RT = R * T
        A = sqrt_a * sqrt_a * p / (RT * RT)
        B = self.covolume(x) * p / RT
        roots = _real_roots(B - 1, A - 3 * B * B - 2 * B, -(A * B - B * B - B**3))
        valid = sorted((z for z in roots if z > B), reverse=True)
        return tuple(p / (z * RT) for z in dict.fromkeys((valid[0], valid[-1])))

    def wilson(self, T: float, p: float) -> list[float]:
        """Logarithm of the vapour-liquid ratios of the components, to start a search from.

        Source: G. M. Wilson, 65th National AIChE Meeting, Cleveland, 1969.
        """
        return [
            ln_pc - math.log(p) + 5.373 * (1 + w) * (1 - Tc / T)
            for ln_pc, w, Tc in zip(self._ln_pc, self._acentric, self._Tc, strict=True)
        ]


def _real_roots(c2: float, c1: float, c0: float) -> list[float]:
    """Real roots of z^3 + c2 z^2 + c1 z + c0."""
    shift = c2 / 3
    q = (3 * c1 - c2 * c2) / 9
    r = (9 * c2 * c1 - 27 * c0 - 2 * c2**3) / 54
    discriminant = q**3 + r * r
    if discriminant > 0.0:
        root = math.sqrt(discriminant)
        return [math.cbrt(r + root) + math.cbrt(r - root) - shift]
    if q == 0.0:
        return [-shift]
    angle = math.acos(max(-1.0, min(1.0, r / math.sqrt(-(q**3)))))
    size = 2 * math.sqrt(-q)
    return [size * math.cos((angle + 2 * math.pi * k) / 3) - shift for k in range(3)]
