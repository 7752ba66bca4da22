"""h(T), s(T) and their inverses from a heat capacity that varies with temperature.

The closed integrals of the published equations lose digits by cancellation (the entropy of the TRC
equation sums terms that grow as (a7/a6)^6) and cost a logarithm and an exponential per component.
So cp and cp/T are replaced, in cells of 1 K, by the polynomials through their values at six
Gauss points, which reproduce them to round-off above 50 K, and these are integrated exactly.  The
joints of the published equations are at whole kelvins, hence never inside a cell.  cp is linear in
the composition, so a mixture costs what a pure gas costs.

On one cell, with t = T - T_left in kelvins: h = h_left + sum h_k t^k, s = s_left + sum s_k t^k.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from functools import lru_cache
from typing import TypeAlias

import numpy as np
import numpy.typing as npt

from lostwork import REFERENCE_TEMPERATURE, R
from lostwork_plugins.ideal_gas.correlations import Correlation

__all__ = ["TabulatedHeatCapacity"]

Vector: TypeAlias = npt.NDArray[np.float64]
Cells: TypeAlias = npt.NDArray[np.intp]

_POINTS = 6
_NEWTON_STEPS = 3


class TabulatedHeatCapacity:
    """Integrals of the heat capacity of a mixture of gases, per kilogram; h = s = 0 at 298.15 K.

    Parameters
    ----------
    parts
        Correlation and mole fraction of each component.
    molar_mass
        kg/mol.
    T_min, T_max
        Range common to all parts, K.
    """

    def __init__(
        self,
        parts: Sequence[tuple[Correlation, float]],
        molar_mass: float,
        T_min: float,
        T_max: float,
    ) -> None:
        low, high = math.floor(T_min), math.ceil(T_max)
        self.gas_constant = R / molar_mass
        self._low = float(low)
        self._last = high - low - 1
        values = np.zeros((high - low, _POINTS))
        for correlation, x in parts:
            values += x * self.gas_constant * _values(correlation, low, high)
        T_left = np.arange(low, high, dtype=np.float64)
        self._h, self._h_edges = _integrate(values)
        self._s, self._s_edges = _integrate(values / (T_left[:, None] + _NODES))
        origin = min(max(REFERENCE_TEMPERATURE, T_min), T_max)
        h_origin, s_origin = self.at_T(origin)
        self._h_edges -= h_origin
        self._s_edges -= s_origin
        self._h[0], self._s[0] = self._h_edges[:-1], self._s_edges[:-1]
        edges = np.append(T_left, float(high))
        self._u_edges = self._h_edges - self.gas_constant * edges
        self._w_edges = self._s_edges - self.gas_constant * np.log(edges)
        for array in (
            self._h,
            self._s,
            self._h_edges,
            self._s_edges,
            self._u_edges,
            self._w_edges,
        ):
            array.flags.writeable = False

    def at_T(self, T: float | Vector) -> tuple[float | Vector, float | Vector]:
        """Give h (J/kg) and s (J/kg/K, at the reference pressure) at T (K) inside the range.

        Outside it an array has meaningless rows, which the model marks as failed.
        """
        if isinstance(T, np.ndarray):
            offsets = T - self._low
            cells = offsets.astype(np.intp)
            np.clip(cells, 0, self._last, out=cells)
            offsets -= cells
            return _horner(self._h, cells, offsets), _horner(self._s, cells, offsets)
        offset = T - self._low
        cell = min(int(offset), self._last)
        t = offset - cell
        h0, h1, h2, h3, h4, h5, h6 = self._h[:, cell].tolist()
        s0, s1, s2, s3, s4, s5, s6 = self._s[:, cell].tolist()
        h = h0 + t * (h1 + t * (h2 + t * (h3 + t * (h4 + t * (h5 + t * h6)))))
        s = s0 + t * (s1 + t * (s2 + t * (s3 + t * (s4 + t * (s5 + t * s6)))))
        return h, s

    def T_of_h(self, h: float | Vector) -> float | Vector:
        """Invert h(T); outside the range the result lies outside too, and is no temperature."""
        return self._inverse(h, self._h, self._h_edges, 0.0, 0.0)

    def T_of_u(self, u: float | Vector) -> float | Vector:
        """Invert u(T) = h - R T."""
        return self._inverse(u, self._h, self._u_edges, self.gas_constant, 0.0)

    def T_of_s(self, s: float | Vector) -> float | Vector:
        """Invert s(T) at constant pressure."""
        return self._inverse(s, self._s, self._s_edges, 0.0, 0.0)

    def T_of_w(self, w: float | Vector) -> float | Vector:
        """Invert w(T) = s(T) - R ln T: entropy at constant volume."""
        return self._inverse(w, self._s, self._w_edges, 0.0, self.gas_constant)

    def _inverse(
        self, target: float | Vector, c: Vector, edges: Vector, linear: float, log: float
    ) -> float | Vector:
        """Solve c(t) - linear t - log ln(T/T_left) = target by Newton inside the cell.

        The edges are strictly increasing (cv > 0), so the cell is the bracket.  The slope changes
        by at most some per cent in 1 K: three steps from the chord reach round-off.  A step may
        leave the cell by 1 % at most, which tells a value outside the table from one at its end.
        """
        if isinstance(target, np.ndarray):
            cells = np.searchsorted(edges, target, side="right") - 1
            np.clip(cells, 0, self._last, out=cells)
            return self._newton(target, c.take(cells, axis=1), edges, cells, linear, log)
        cell = min(max(int(edges.searchsorted(target, side="right")) - 1, 0), self._last)
        _, c1, c2, c3, c4, c5, c6 = c[:, cell].tolist()
        left, right = edges[cell : cell + 2].tolist()
        T_left = self._low + cell
        rest = target - left
        t = min(max(rest / (right - left), -0.01), 1.01)
        for _ in range(_NEWTON_STEPS):
            f = t * (c1 + t * (c2 + t * (c3 + t * (c4 + t * (c5 + t * c6))))) - linear * t
            slope = c1 + t * (2 * c2 + t * (3 * c3 + t * (4 * c4 + t * (5 * c5 + t * 6 * c6))))
            if log:
                f -= log * math.log1p(t / T_left)
                slope -= log / (T_left + t)
            t = min(max(t - (f - rest) / (slope - linear), -0.01), 1.01)
        return float(T_left + t)

    def _newton(
        self, target: Vector, c: Vector, edges: Vector, cells: Cells, linear: float, log: float
    ) -> Vector:
        T_left = self._low + cells
        rest = target - edges[cells]
        t = np.clip(rest / (edges[cells + 1] - edges[cells]), -0.01, 1.01)
        for _ in range(_NEWTON_STEPS):
            f = c[_POINTS] * t
            slope = _POINTS * c[_POINTS]
            for k in range(_POINTS - 1, 0, -1):
                f += c[k]
                f *= t
                slope *= t
                slope += k * c[k]
            f -= linear * t
            slope -= linear
            if log:
                f -= log * np.log1p(t / T_left)
                slope -= log / (T_left + t)
            f -= rest
            f /= slope
            t -= f
            np.clip(t, -0.01, 1.01, out=t)
        t += T_left
        return t


def _horner(coefficients: Vector, cells: Cells, t: Vector) -> Vector:
    total: Vector = coefficients[_POINTS].take(cells)
    picked = np.empty_like(total)
    for row in coefficients[_POINTS - 1 :: -1]:
        total *= t
        # The cells are known to be inside; "clip" spares numpy a buffer.
        total += row.take(cells, out=picked, mode="clip")
    return total


def _integrate(values: Vector) -> tuple[Vector, Vector]:
    """Integrate the polynomials through `values` (cells, points): coefficients and edge values.

    The polynomial is fitted to the departure from the mean of the cell, a few per cent of the
    value at most, so the rounding of the fit is that much smaller.
    """
    mean = values.mean(axis=1)
    powers = (values - mean[:, None]) @ _TO_POWERS
    powers[:, 0] += mean
    coefficients = np.empty((_POINTS + 1, len(values)))
    coefficients[1:] = (powers / np.arange(1, _POINTS + 1)).T
    edges = np.zeros(len(values) + 1)
    # Thousands of terms are summed: extended precision keeps the sum at its last digit.
    edges[1:] = np.cumsum((values @ _WEIGHTS).astype(np.longdouble))
    coefficients[0] = edges[:-1]
    return coefficients, edges


def _gauss_points() -> tuple[Vector, Vector, Vector]:
    """Nodes and weights on [0, 1], and the map from values at the nodes to powers of t.

    By discrete orthogonality the coefficient of the Legendre polynomial P_k is
    (2k + 1) sum w_j P_k(2 t_j - 1) f_j; the shifted P_k have whole coefficients, so the map is
    exact but for the weights.
    """
    x, w = np.polynomial.legendre.leggauss(_POINTS)
    to_powers = np.zeros((_POINTS, _POINTS))
    for k in range(_POINTS):
        shifted = [(-1) ** (k + i) * math.comb(k, i) * math.comb(k + i, i) for i in range(k + 1)]
        legendre = np.polynomial.legendre.Legendre.basis(k)(x)
        to_powers[:, : k + 1] += np.outer((2 * k + 1) * 0.5 * w * legendre, shifted)
    return 0.5 * (x + 1.0), 0.5 * w, to_powers


_NODES, _WEIGHTS, _TO_POWERS = _gauss_points()


@lru_cache(maxsize=64)
def _values(correlation: Correlation, low: int, high: int) -> Vector:
    """Give cp / R at the Gauss points of every cell; kept, because mixtures share components."""
    T = np.arange(low, high, dtype=np.float64)[:, None] + _NODES
    values = correlation.cp_over_R(T)
    values.flags.writeable = False
    return values
