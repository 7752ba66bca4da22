"""Where a mixture of one composition is a single phase, established once and kept.

At some pressures, a fifth apart, the stability test is made at falling T from above every critical
point, and at rising T from the coldest, as far as the feed is stable and its density changes
steadily (a step of the density is a dome too narrow to be met).  Dew and bubble lines run steadily
between two such pressures, so that beyond both of their ends, and a margin, a state is a single
phase without a test of its own.  Which phase is told by its density: a search among neighbours may
have followed the other one, as a metastable root.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import TypeAlias

import numpy as np
import numpy.typing as npt

from lostwork_plugins.coolprop.bounds import Bounds
from lostwork_plugins.coolprop.equilibrium import NoEquilibrium, equilibrium
from lostwork_plugins.coolprop.phase import Phase, PhaseEquation

__all__ = ["PhaseMap"]

_Array: TypeAlias = npt.NDArray[np.float64]
_End: TypeAlias = tuple[float, float]

_LN_P_STEP = 0.2
_T_STEP = 0.04
_HALVINGS = 4
_STEADY = 1.3
_MARGIN = 0.005
_MARGIN_OF_SLOPE = 0.25
_DENSITY_MARGIN = 1.1
_SUPERCRITICAL = 1.1


class PhaseMap:
    """Stable ranges of T of the feed z, by pressure; for one thread."""

    def __init__(self, equation: PhaseEquation, z: Sequence[float], bounds: Bounds) -> None:
        self._equation, self._z = equation, tuple(z)
        self._lowest = bounds.T_min
        self._top = min(_SUPERCRITICAL * max(equation.critical_temperatures), bounds.T_max)
        self._single_above_top = self._top < bounds.T_max
        self._ends: dict[int, tuple[_End, _End]] = {}
        self.tests = 0

    def single(self, T: _Array, p: _Array, rho: _Array | None = None) -> npt.NDArray[np.bool_]:
        """Whether states at T (K) and p (Pa) are known to be one phase, of a density (mol/m3).

        What is not known may be a single phase all the same.  Without densities only T and p are
        judged.
        """
        known = (self._top < T) & self._single_above_top
        node = np.floor(np.log(p) / _LN_P_STEP).astype(int)
        for below in np.unique(node[~known]).tolist():
            (liquid, dense), (gas, thin) = self._ends_at(below)
            (liquid_above, dense_above), (gas_above, thin_above) = self._ends_at(below + 1)
            here = (node == below) & ~known
            # At one pressure the density falls with T: the other root lies beyond the ends.
            hot = max(gas, gas_above) + _MARGIN_OF_SLOPE * abs(gas - gas_above)
            is_gas = hot * (1 + _MARGIN) < T
            cold = min(liquid, liquid_above) - _MARGIN_OF_SLOPE * abs(liquid - liquid_above)
            is_liquid = cold * (1 - _MARGIN) > T
            if rho is not None:
                is_gas &= rho < _DENSITY_MARGIN * max(thin, thin_above)
                is_liquid &= rho * _DENSITY_MARGIN > min(dense, dense_above)
            known |= here & (is_gas | is_liquid)
        return known

    def unknown_pressures(self, p: npt.NDArray[np.float64]) -> int:
        """How many pressures would have to be gone through for states at p (Pa)."""
        node = np.floor(np.log(p) / _LN_P_STEP).astype(int)
        return len({*node.tolist(), *(node + 1).tolist()} - self._ends.keys())

    def _ends_at(self, node: int) -> tuple[_End, _End]:
        """Where the steady liquid ends and where the steady gas begins at a pressure."""
        if node not in self._ends:
            p = math.exp(node * _LN_P_STEP)
            gas = self._followed(p, self._top, self._lowest)
            liquid = self._followed(p, self._lowest, gas[0])
            self._ends[node] = liquid, gas
        return self._ends[node]

    def _followed(self, p: float, start: float, end: float) -> _End:
        """Last T and density from `start` to `end` up to which the feed is one steady phase."""
        rho = self._density(start, p)
        if rho is None or start == end:
            return start, rho or math.nan
        factor = 1.0 + math.copysign(_T_STEP, end - start)
        T = start
        for halvings in range(_HALVINGS + 1):
            while end != T:
                ahead = min(T * factor, end) if factor > 1.0 else max(T * factor, end)
                following = self._density(ahead, p)
                steady = 1.0 + (_STEADY - 1.0) / 2**halvings
                if following is None or not 1 / steady < following / rho < steady:
                    break
                T, rho = ahead, following
            factor = 1.0 + 0.5 * (factor - 1.0)
        return T, rho

    def _density(self, T: float, p: float) -> float | None:
        """Density (mol/m3) of the feed, ``None`` where it is not surely one phase."""
        self.tests += 1
        try:
            found = equilibrium(self._equation, T, p, self._z)
        except (NoEquilibrium, ValueError, RuntimeError, ArithmeticError):
            return None
        return found.rho if isinstance(found, Phase) else None
