"""h(T), s(T) and their inverses of a constant heat capacity, in closed form."""

from __future__ import annotations

import math
from typing import TypeAlias, overload

import numpy as np
import numpy.typing as npt

from lostwork import REFERENCE_TEMPERATURE

__all__ = ["ConstantHeatCapacity", "exponential", "logarithm"]

Vector: TypeAlias = npt.NDArray[np.float64]

_T0 = REFERENCE_TEMPERATURE


class ConstantHeatCapacity:
    """A gas with cp the same at every temperature; h = s = 0 at 298.15 K.

    Parameters
    ----------
    cp, gas_constant
        J/kg/K; cp above the gas constant.
    """

    def __init__(self, cp: float, gas_constant: float) -> None:
        self.cp = cp
        self.gas_constant = gas_constant
        self._cv = cp - gas_constant

    def at_T(self, T: float | Vector) -> tuple[float | Vector, float | Vector]:
        """Give h (J/kg) and s (J/kg/K, at the reference pressure) at T (K)."""
        return self.cp * (T - _T0), self.cp * logarithm(T / _T0)

    def T_of_h(self, h: float | Vector) -> float | Vector:
        """Invert h(T)."""
        return h / self.cp + _T0

    def T_of_u(self, u: float | Vector) -> float | Vector:
        """Invert u(T) = h - R T."""
        return (u + self.cp * _T0) / self._cv

    def T_of_s(self, s: float | Vector) -> float | Vector:
        """Invert s(T) at constant pressure."""
        return _T0 * exponential(s / self.cp)

    def T_of_w(self, w: float | Vector) -> float | Vector:
        """Invert w(T) = s(T) - R ln T: entropy at constant volume."""
        return _T0 * exponential((w + self.gas_constant * math.log(_T0)) / self._cv)


@overload
def logarithm(x: float) -> float: ...
@overload
def logarithm(x: Vector) -> Vector: ...
@overload
def logarithm(x: float | Vector) -> float | Vector: ...
def logarithm(x: float | Vector) -> float | Vector:
    """Natural logarithm of a float or an array; NaN where there is none."""
    if isinstance(x, np.ndarray):
        return np.asarray(np.log(x))
    return math.log(x) if x > 0.0 else math.nan


@overload
def exponential(x: float) -> float: ...
@overload
def exponential(x: Vector) -> Vector: ...
@overload
def exponential(x: float | Vector) -> float | Vector: ...
def exponential(x: float | Vector) -> float | Vector:
    """Exponential of a float or an array; infinity where it overflows."""
    if isinstance(x, np.ndarray):
        return np.asarray(np.exp(x))
    try:
        return math.exp(x)
    except OverflowError:
        return math.inf
