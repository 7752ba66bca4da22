"""Ideal-gas heat capacity of the components, and its integrals in closed form.

Per component, from published correlations only and within their stated ranges:

- the TRC form (Kabo and Roganov, 1994, Thermodynamics of Organic Compounds in the Gas State, II),
  cp/R = a0 + a1/T^2 exp(-a2/T) + a3 y^2 + (a4 - a5/(T - a7)^2) y^8 with y = (T - a7)/(T + a6)
  above a7 and 0 below;
- 5/2 R for the noble gases, which have no inner motion to excite;
- where there is neither, the polynomial of Poling, Prausnitz and O'Connell (2001, The Properties of
  Gases and Liquids, 5th ed., appendix A).

The enthalpy and entropy are exact integrals of one cp, so they cannot contradict each other.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TypeAlias

import numpy as np
import numpy.typing as npt

from lostwork import R

__all__ = ["Correlation", "IdealGas"]

Vector: TypeAlias = npt.NDArray[np.float64]
Values: TypeAlias = npt.NDArray[np.inexact]

_NODES, _WEIGHTS = np.polynomial.legendre.leggauss(14)


@dataclass(frozen=True)
class Correlation:
    """One component: coefficients of the TRC form and of a polynomial in T, and the range in K.

    cp/R is the sum of both; one of them is zero.
    """

    trc: tuple[float, ...]
    polynomial: tuple[float, ...]
    T_min: float
    T_max: float
    source: str


class IdealGas:
    """Heat capacity, enthalpy and entropy of components as ideal gases.

    Every method takes an array of temperatures of shape (n,) and gives (n, components); real or
    complex, so that it can be differentiated by a complex step.  Zero is at `T_zero`.
    """

    def __init__(self, correlations: tuple[Correlation, ...], T_zero: float) -> None:
        table = np.array([one.trc for one in correlations])
        self._a = tuple(table.T)
        self._polynomial = np.array([one.polynomial for one in correlations])
        a6, a7 = self._a[6], self._a[7]
        self._span = np.where(a6 + a7 > 0.0, a6 + a7, 1.0)
        self._flat = a6 + a7 <= 0.0
        self._h_zero = np.zeros(len(correlations))
        self._s_zero = np.zeros(len(correlations))
        zero = np.array([T_zero])
        self._h_zero = np.real(self.enthalpy(zero)[0])
        self._s_zero = np.real(self.entropy(zero)[0])

    def heat_capacity(self, T: Values) -> Values:
        """Heat capacity at constant pressure, J/mol/K."""
        a0, a1, a2, a3, a4, a5, a6, _a7 = self._a
        T = T[:, None]
        y = self._y(T)
        # (a5/(T - a7)^2) y^8 = a5 y^6/(T + a6)^2 has no pole at a7.
        inner = a3 * y**2 + a4 * y**8 - a5 * y**6 / np.where(self._flat, 1.0, T + a6) ** 2
        poly = sum(c * T**k for k, c in enumerate(self._polynomial.T))
        return np.asarray(R * (a0 + a1 / T**2 * np.exp(-a2 / T) + inner + poly))

    def enthalpy(self, T: Values) -> Values:
        """Enthalpy above that at `T_zero`, J/mol."""
        a0, a1, a2, a3, a4, a5, _, _ = self._a
        T = T[:, None]
        y = self._y(T)
        ratio, log = y / (1.0 - y), np.log1p(-y)
        second = y + 2.0 * log + ratio
        eighth = ratio + 8.0 * log + sum((7 - j) / (j + 1) * y ** (j + 1) for j in range(7))
        inner = self._span * (a3 * second + a4 * eighth) - a5 * y**7 / (7.0 * self._span)
        poly = sum(c * T ** (k + 1) / (k + 1) for k, c in enumerate(self._polynomial.T))
        excited = np.where(a2 > 0.0, a1 / np.where(a2 > 0.0, a2, 1.0), 0.0) * np.exp(-a2 / T)
        return np.asarray(R * (a0 * T + excited + inner + poly) - self._h_zero)

    def entropy(self, T: Values) -> Values:
        """Entropy at constant pressure above that at `T_zero`, J/mol/K."""
        a0, a1, a2, a3, a4, _, _, _ = self._a
        T = T[:, None]
        y = self._y(T)
        log = -np.log1p(-y)
        # dT/T = dy/(1 - y) + a6 dy/(a7 + a6 y)
        second = log - y - y**2 / 2.0
        eighth = log - sum(y**k / k for k in range(1, 9))
        inner = a3 * second + a4 * eighth + self._over_y_plus_ratio(y)
        poly = self._polynomial[:, 0] * np.log(T) + sum(
            c * T**k / k for k, c in enumerate(self._polynomial.T) if k
        )
        safe = np.where(a2 > 0.0, a2, 1.0)
        excited = np.where(a2 > 0.0, a1 / safe**2, 0.0) * (1.0 + a2 / T) * np.exp(-a2 / T)
        return np.asarray(R * (a0 * np.log(T) + excited + inner + poly) - self._s_zero)

    def _y(self, T: Values) -> Values:
        a6, a7 = self._a[6], self._a[7]
        above = (np.real(T) > a7) & ~self._flat
        return np.asarray(np.where(above, (T - a7) / np.where(above, T + a6, 1.0), 0.0))

    def _over_y_plus_ratio(self, y: Values) -> Values:
        """Integrate the polynomial of the TRC form over (y + a7/a6) from 0 to y."""
        _, _, _, a3, a4, a5, a6, a7 = self._a
        finite = a6 > 0.0
        ratio = np.where(finite, a7 / np.where(finite, a6, 1.0), np.inf)
        weight = np.where(finite, -a5 / (self._span * np.where(finite, a6, 1.0)), 0.0)
        total = np.zeros_like(y)
        near, far = ratio < 1.0, (ratio >= 1.0) & finite
        if near.any():
            r = ratio[near]
            yn = y[:, near]
            positive = r > 0.0
            term = np.where(positive, np.log1p(yn / np.where(positive, r, 1.0)), 0.0)
            terms = [term]
            for n in range(1, 9):
                terms.append(yn**n / n - r * terms[-1])
            total[:, near] = a3[near] * terms[2] + a4[near] * terms[8]
            total[:, near] += weight[near] * (terms[6] - terms[7])
        if far.any():
            # The recursion loses digits where a7 > a6; there the integrand is smooth enough for
            # fourteen nodes to be exact to round-off.
            yf, r = y[:, far], ratio[far]
            for node, share in zip(_NODES, _WEIGHTS, strict=True):
                at = yf * (0.5 * (1.0 + node))
                inner = a3[far] * at**2 + a4[far] * at**8 + weight[far] * at**6 * (1.0 - at)
                total[:, far] += 0.5 * share * yf * inner / (at + r)
        # a6 = 0: the a5 term alone survives, a5 y^6 (1 - y)/(span a7).
        lone = ~finite & ~self._flat
        if lone.any():
            yl = y[:, lone]
            scale = -a5[lone] / (self._span[lone] * a7[lone])
            total[:, lone] = scale * (yl**7 / 7.0 - yl**8 / 8.0)
        return total
