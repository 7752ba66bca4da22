"""Real roots of the cubic in Z, to round-off, for columns of coefficients.

Closed form first (Cardano, Viete), then Newton.  At low pressure the two roots of the liquid side
are so small that the closed form loses them, and even whether they are real; there the root of the
vapour is divided out, from the constant term upwards, and what is left is a well-scaled quadratic.
"""

from __future__ import annotations

from typing import TypeAlias

import numpy as np
import numpy.typing as npt

__all__ = ["outer_roots", "refined"]

Vector: TypeAlias = npt.NDArray[np.float64]
Values: TypeAlias = npt.NDArray[np.inexact]

_POLISH = 60
_SMALL = 0.01


def outer_roots(c2: Vector, c1: Vector, c0: Vector, B: Vector) -> tuple[Vector, Vector]:
    """Smallest and largest real root above B of Z^3 + c2 Z^2 + c1 Z + c0; equal where one only.

    Parameters
    ----------
    c2, c1, c0
        Coefficients, shape (n,).
    B
        Reduced covolume b p/(R T): roots at or below it mean nothing.

    Returns
    -------
    tuple of array
        The root of the liquid and the root of the vapour.
    """
    shift = c2 / 3.0
    P = c1 / 3.0 - shift**2
    Q = shift**3 - 0.5 * shift * c1 + 0.5 * c0
    discriminant = Q**2 + P**3
    three = discriminant < 0.0
    with np.errstate(invalid="ignore"):
        radius = np.sqrt(np.where(three, -P, 0.0))
        cosine = np.where(three, -Q / np.where(three, radius**3, 1.0), 0.0)
        angle = np.arccos(np.clip(cosine, -1.0, 1.0)) / 3.0
        rest = np.sqrt(np.where(three, 0.0, discriminant))
    # The larger of the two cube roots first; the other follows without cancellation.
    big = np.cbrt(-Q - np.copysign(rest, Q))
    single = big + np.where(big == 0.0, 0.0, -P / np.where(big == 0.0, 1.0, big)) - shift
    high = np.where(three, 2.0 * radius * np.cos(angle) - shift, single)
    low = np.where(three, 2.0 * radius * np.cos(angle + 2.0 * np.pi / 3.0) - shift, single)
    high = _polished(np.where(high > B, high, B), c2, c1, c0)
    low, three = _small_roots(high, c1, c0, low, three)
    low = np.where(three, _polished(low, c2, c1, c0), high)
    # The smallest of three may lie below B, where it is no state.
    return np.where(low > B, low, high), high


def _small_roots(
    high: Vector, c1: Vector, c0: Vector, low: Vector, three: npt.NDArray[np.bool_]
) -> tuple[Vector, npt.NDArray[np.bool_]]:
    """Smaller root and whether it is real, where both are far below the root of the vapour."""
    with np.errstate(divide="ignore", invalid="ignore"):
        product = -c0 / high
        half = 0.5 * (c1 - product) / high
        square = half**2 - product
        far = (np.abs(product) < (_SMALL * high) ** 2) & (np.abs(half) < _SMALL * high)
        real = far & (square > 0.0)
        small = product / (half + np.sqrt(np.where(real, square, 0.0)))
    return np.where(real, small, low), np.where(far, real, three)


def refined(Z: Vector, c2: Values, c1: Values, c0: Values) -> Values:
    """One Newton step from an exact real root: carries a complex step of the coefficients over."""
    value = ((Z + c2) * Z + c1) * Z + c0
    slope = (3.0 * Z + 2.0 * c2) * Z + c1
    return np.asarray(Z - value / slope)


def _polished(Z: Vector, c2: Vector, c1: Vector, c0: Vector) -> Vector:
    Z = Z.copy()
    active = np.arange(Z.size)
    last = np.full(Z.size, np.inf)
    for _ in range(_POLISH):
        z, k2, k1, k0 = Z[active], c2[active], c1[active], c0[active]
        slope = (3.0 * z + 2.0 * k2) * z + k1
        with np.errstate(divide="ignore", invalid="ignore"):
            step = (((z + k2) * z + k1) * z + k0) / slope
        size = np.abs(step)
        # At round-off the steps stop shrinking; a double root has no slope to divide by.
        better = np.isfinite(step) & ((size < last[active]) | (size > 1e-3 * np.abs(z)))
        Z[active[better]] = z[better] - step[better]
        last[active] = size
        active = active[better & (size > 1e-16 * np.abs(z))]
        if active.size == 0:
            break
    return Z
