"""The backend "ideal-gas": which heat capacity a fluid gets, over which range."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from lostwork import Backend, FluidSpec, Limits, OutOfLimits, PropertyModel, R
from lostwork_plugins.ideal_gas.constant import ConstantHeatCapacity
from lostwork_plugins.ideal_gas.correlations import (
    WIDEST_RANGE,
    Correlation,
    Monatomic,
    correlation_of,
)
from lostwork_plugins.ideal_gas.integrals import TabulatedHeatCapacity
from lostwork_plugins.ideal_gas.model import IdealGasModel, Recipe, TemperatureRange
from lostwork_plugins.ideal_gas.options import Assumptions, read_options
from lostwork_plugins.ideal_gas.refusal import NoIdealGasModel

__all__ = ["IdealGasBackend", "reopen"]

# An ideal gas has no pressure at which it ends.  These only keep v and ln p in plain numbers.
P_MIN = 1e-6
P_MAX = 1e9

_PRESSURE_NOTE = (
    "an ideal gas knows no limit of pressure and never condenses: whether the real fluid is a gas "
    "of low density at the states asked for is for the caller to judge, for example against a "
    "backend with an equation of state"
)


class IdealGasBackend(Backend):
    """Ideal gases: p v = R T, with the heat capacity of published correlations or a constant one.

    Options
    -------
    correlation : str
        "TRC", "Poling" or "Shomate", to force one; without it, for each component the first of
        these that is published for it.  Noble gases have cp = 5/2 R whatever is chosen.
    cp : quantity or str
        One constant heat capacity of the whole fluid, per mass or per amount ("1005 J/kg/K",
        "29.1 J/mol/K"); the range is then 1 K to 6000 K, because the assumption is the caller's.
    gamma : float
        One constant ratio of heat capacities of the whole fluid, above 1; range as for `cp`.
    molar_mass : quantity or str
        In place of that of the composition, within 5 %, to follow a hand calculation exactly.

    `cp`, `gamma` and `correlation` exclude each other.
    """

    def open(self, spec: FluidSpec, options: Mapping[str, Any]) -> PropertyModel:
        """Open a model of a gas or of a mixture of gases."""
        shown = spec.name or " + ".join(component.name for component in spec.components)
        assumed = read_options(shown, spec.molar_mass, options)
        recipe = Recipe(reopen, spec, dict(options))
        if assumed.cp is not None:
            return _constant(recipe, shown, assumed, assumed.cp)
        return _correlated(recipe, shown, assumed)


def reopen(spec: FluidSpec, options: Mapping[str, Any]) -> PropertyModel:
    """Open a model again in another process."""
    return IdealGasBackend().open(spec, options)


def _constant(recipe: Recipe, shown: str, assumed: Assumptions, cp: float) -> IdealGasModel:
    T_min, T_max = WIDEST_RANGE
    what = f"the constant {assumed.given} assumed for {shown}"
    return IdealGasModel(
        recipe,
        heat_capacity=ConstantHeatCapacity(cp, R / assumed.molar_mass),
        molar_mass=assumed.molar_mass,
        limits=Limits(T_min, T_max, P_MIN, P_MAX, f"ideal gas, {assumed.given} (assumed)"),
        range_=TemperatureRange(T_min, T_max, what, what),
        notes=(
            f"heat capacity: {assumed.given}, constant by the caller's assumption, "
            f"{T_min:g} K to {T_max:g} K",
            *_common_notes(assumed),
        ),
    )


def _correlated(recipe: Recipe, shown: str, assumed: Assumptions) -> IdealGasModel:
    spec = recipe.spec
    parts = _correlations(shown, spec, assumed)
    floor = max(parts, key=lambda part: part[1].T_min)
    ceiling = min(parts, key=lambda part: part[1].T_max)
    T_min, T_max = floor[1].T_min, ceiling[1].T_max
    if not T_min < T_max:
        raise OutOfLimits(
            shown,
            f"the heat capacity of {floor[0]} is published from {T_min:g} K and that of "
            f"{ceiling[0]} up to {T_max:g} K only, so the mixture has no range in common",
        )
    sources = dict.fromkeys(correlation.source for _, correlation in parts)
    return IdealGasModel(
        recipe,
        heat_capacity=_integrals(spec, parts, assumed.molar_mass, T_min, T_max),
        molar_mass=assumed.molar_mass,
        limits=Limits(T_min, T_max, P_MIN, P_MAX, f"ideal gas, cp from {'; '.join(sources)}"),
        range_=TemperatureRange(T_min, T_max, _edge(shown, floor), _edge(shown, ceiling)),
        notes=(
            *(_correlation_note(name, correlation) for name, correlation in parts),
            *_common_notes(assumed),
        ),
    )


def _correlations(
    shown: str, spec: FluidSpec, assumed: Assumptions
) -> list[tuple[str, Correlation]]:
    parts = []
    for component in spec.components:
        correlation = correlation_of(component, assumed.correlation)
        if correlation is None:
            wanted = f" {assumed.correlation}" if assumed.correlation else ""
            raise NoIdealGasModel(
                shown,
                f"no{wanted} correlation of the heat capacity of {component.name} is at hand",
                "Leave out correlation=, or give cp= or gamma="
                if assumed.correlation
                else "Give cp= or gamma=",
            )
        parts.append((component.name, correlation))
    return parts


def _integrals(
    spec: FluidSpec,
    parts: list[tuple[str, Correlation]],
    molar_mass: float,
    T_min: float,
    T_max: float,
) -> ConstantHeatCapacity | TabulatedHeatCapacity:
    if all(isinstance(correlation, Monatomic) for _, correlation in parts):
        gas_constant = R / molar_mass
        return ConstantHeatCapacity(2.5 * gas_constant, gas_constant)
    weighted = [
        (correlation, x) for (_, correlation), x in zip(parts, spec.mole_fractions, strict=True)
    ]
    return TabulatedHeatCapacity(weighted, molar_mass, T_min, T_max)


def _edge(shown: str, part: tuple[str, Correlation]) -> str:
    component, correlation = part
    of = component if component == shown else f"{component} in {shown}"
    return f"the {correlation.name} correlation of the heat capacity of {of}"


def _correlation_note(component: str, correlation: Correlation) -> str:
    note = (
        f"heat capacity of {component}: {correlation.name}, {correlation.T_min:g} K to "
        f"{correlation.T_max:g} K ({correlation.source})"
    )
    if "equilibrium" in getattr(correlation, "substance", ""):
        note += (
            "; of the equilibrium of the spin isomers, which below about 250 K departs from the "
            "frozen (normal) gas"
        )
    return note


def _common_notes(assumed: Assumptions) -> tuple[str, ...]:
    if not assumed.own_molar_mass:
        return (_PRESSURE_NOTE,)
    mass = assumed.molar_mass * 1e3
    return (f"molar mass {mass:.10g} g/mol by the caller's assumption", _PRESSURE_NOTE)
