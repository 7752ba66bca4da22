"""A mixture of free composition on the multi-fluid equation.

Sources: O. Kunz, W. Wagner, J. Chem. Eng. Data 57 (2012) 3032-3091; the binary parameters of
CoolProp.  The phases are told first and only then read, see `equilibrium` and `phase`; CoolProp's
own (p, h) and (p, s) are wrong in silence inside the dome and are never called.
"""

from __future__ import annotations

import math
import re
from collections.abc import Mapping, Sequence
from functools import partial
from typing import Any

import numpy as np
from CoolProp.CoolProp import (
    AbstractState,
)

from lostwork import (
    Column,
    Columns,
    Critical,
    FluidSpec,
    Pair,
    PairRefused,
    PhaseSplit,
    PropertyModel,
    StateNotFound,
)
from lostwork_plugins.coolprop.bounds import bounds_of, common_bounds, limits_of
from lostwork_plugins.coolprop.mixture_columns import mixture_columns
from lostwork_plugins.coolprop.mixture_states import MixtureStates
from lostwork_plugins.coolprop.refusal import NoModel
from lostwork_plugins.coolprop.sources import source_of
from lostwork_plugins.coolprop.threads import PerThread

__all__ = ["MixtureModel"]

_LEAST_PRESSURE = 1.0
_NOISE = 1e-6
_NOT_MATCHED = re.compile(r"binary pair \[([^,\]]+),([^\]]+)\]")

_PAIRS: frozenset[Pair] = frozenset(
    {("T", "p"), ("p", "h"), ("p", "s"), ("T", "quality"), ("p", "quality")}
)


class MixtureModel(PropertyModel):
    """States of a mixture, see `PropertyModel`.

    Parameters
    ----------
    fluids
        CoolProp's names of the components, in the order of `spec`.
    spec, options
        The recipe by which the model is opened again.

    Raises
    ------
    NoModel
        CoolProp has no interaction parameters for a pair of components; it names the pair.
    """

    two_phase = True
    native_pairs = _PAIRS
    entropy_noise = _NOISE

    def __init__(
        self, fluids: tuple[str, ...], spec: FluidSpec, options: Mapping[str, Any]
    ) -> None:
        self._recipe = (spec, dict(options))
        total = sum(spec.mole_fractions)
        self._present = tuple(x > 0.0 for x in spec.mole_fractions)
        self._z = tuple(x / total for x in spec.mole_fractions if x > 0.0)
        self.fluids = self._of_present(fluids)
        self._name = spec.name or " + ".join(self.fluids)
        _refuse_unknown_pairs(self._name, self.fluids, spec)
        pures = [AbstractState("HEOS", fluid) for fluid in self.fluids]
        self.molar_mass = self._mean([pure.molar_mass() for pure in pures])
        # The mean that `PhaseEquation` works with, not the exact constant.
        self._gas_constant = self._mean([pure.gas_constant() for pure in pures])
        parts = [bounds_of(pure, fluid) for pure, fluid in zip(pures, self.fluids, strict=True)]
        self._bounds = common_bounds(self._name, parts)
        self.limits = limits_of(self._bounds, _LEAST_PRESSURE, source_of(self.fluids))
        self._critical = Critical(
            self._mean([pure.T_critical() for pure in pures]),
            self._mean([pure.p_critical() for pure in pures]),
            self._mean([1 / pure.rhomolar_critical() for pure in pures]) / self.molar_mass,
        )
        self.notes = (
            "range of a mixture: above the highest triple point and within the narrowest range of "
            "its components; where a component would freeze out is not told",
            "the critical point is Kay's pseudo-critical one",
        )
        self._here = PerThread(
            partial(MixtureStates, self.fluids, self._z, self._bounds, self.molar_mass)
        )

    def columns(self, pair: Pair, x: Column, y: Column) -> Columns:
        """State columns for two columns of `pair`."""
        if pair not in self.native_pairs:
            raise PairRefused(given=pair, reason="coolprop does not solve it for a mixture")
        return mixture_columns(self._here(), self._bounds, pair, x, y)

    def ideal_gas_limit(self) -> tuple[float, float]:
        """Give h (J/kg) and s (J/kg/K) as an ideal gas at 298.15 K and 1 bar.

        Each component stands at zero there, so that only the mixing entropy is left.
        """
        mixing = -self._gas_constant * sum(x * math.log(x) for x in self._z)
        return 0.0, mixing / self.molar_mass

    def critical(self) -> Critical:
        """Give the pseudo-critical point: means over the components by amount (Kay, 1936)."""
        return self._critical

    def split(self, T: float, p: float) -> PhaseSplit:
        """Compositions of liquid and vapour at T (K) and p (Pa).

        Raises
        ------
        StateNotFound
            The mixture is one phase there, or outside the range of the equation.
        """
        answer = self._here().split(T, p)
        if isinstance(answer, str):
            raise StateNotFound(
                fluid=self._name, given=f"T = {T:.6g} K, p = {p:.6g} Pa", reason=answer
            )
        return PhaseSplit(
            vapour_fraction=answer.vapour_fraction,
            liquid=self._of_all(answer.liquid.x),
            vapour=self._of_all(answer.vapour.x),
        )

    def noise_at(self, T: Column, p: Column) -> Column:
        """Inconsistency of the entropy, the same everywhere."""
        shape = np.broadcast(T, p).shape
        return np.full(shape, self.entropy_noise) if shape else self.entropy_noise

    def __reduce__(self) -> tuple[Any, ...]:
        from lostwork_plugins.coolprop.backend import reopen  # noqa: PLC0415  (a circle)

        return reopen, self._recipe

    def _mean(self, values: Sequence[Any]) -> float:
        return sum(x * float(value) for x, value in zip(self._z, values, strict=True))

    def _of_present(self, values: tuple[str, ...]) -> tuple[str, ...]:
        return tuple(v for v, here in zip(values, self._present, strict=True) if here)

    def _of_all(self, x: tuple[float, ...]) -> tuple[float, ...]:
        fractions = iter(x)
        return tuple(next(fractions) if here else 0.0 for here in self._present)


def _refuse_unknown_pairs(name: str, fluids: tuple[str, ...], spec: FluidSpec) -> None:
    try:
        AbstractState("HEOS", "&".join(fluids))
    except (ValueError, RuntimeError) as error:
        names = {component.cas: component.name for component in spec.components}
        unmatched = _NOT_MATCHED.search(str(error))
        if unmatched is None:
            raise NoModel(fluid=name, reason=str(error)) from error
        first, second = (names.get(cas, cas) for cas in unmatched.groups())
        raise NoModel(
            fluid=name,
            reason=f"CoolProp has no interaction parameters for {first} with {second}",
            advice="Use another backend for this mixture",
        ) from error
