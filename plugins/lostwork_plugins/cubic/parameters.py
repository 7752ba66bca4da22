"""The numbers a cubic equation needs, and where they come from.

Critical constants, acentric factors and melting points are those of `chemicals`; interaction
parameters of Peng-Robinson those of ChemSep, as `thermo` carries them.  For Soave-Redlich-Kwong no
published set is carried there, and a parameter fitted to one equation is not lent to the other.
"""

from __future__ import annotations

import itertools
from collections.abc import Mapping
from dataclasses import dataclass
from typing import TypeAlias

import chemicals
import numpy as np
import numpy.typing as npt
from chemicals import heat_capacity
from thermo.interaction_parameters import IPDB

from lostwork import Component, FluidSpec
from lostwork_plugins.cubic.heat_capacity import Correlation
from lostwork_plugins.cubic.options import Options
from lostwork_plugins.cubic.refusal import MissingParameters

__all__ = ["Parameters", "parameters"]

Vector: TypeAlias = npt.NDArray[np.float64]

_TABLES = {"PR": "ChemSep PR", "SRK": "ChemSep SRK"}
_NOBLE = ("He", "Ne", "Ar", "Kr", "Xe")
# No inner motion; the bound keeps clear of ionisation and of the electronic levels of xenon.
_NOBLE_RANGE = (1.0, 5000.0)


@dataclass(frozen=True)
class Parameters:
    """All numbers of one equation for one list of components, in their order.

    Parameters
    ----------
    Tc, pc, omega
        Critical temperature (K), critical pressure (Pa), acentric factor; shape (components,).
    kij
        Interaction parameters, shape (components, components), symmetric with a zero diagonal.
    molar_mass
        kg/mol, shape (components,).
    melting
        Triple or normal melting temperature, K; NaN where not known.
    heat_capacity
        Correlation of the ideal-gas heat capacity of each component.
    missing_pairs
        Pairs, by name, without a published or given kij; they stand at zero.
    """

    Tc: Vector
    pc: Vector
    omega: Vector
    kij: Vector
    molar_mass: Vector
    melting: Vector
    heat_capacity: tuple[Correlation, ...]
    missing_pairs: tuple[tuple[str, str], ...]


def parameters(spec: FluidSpec, options: Options) -> Parameters:
    """Collect the parameters of `spec`.

    Raises
    ------
    MissingParameters
        A component without critical point, acentric factor or heat capacity, or a pair without kij
        where the caller refuses that.
    """
    shown = spec.name or " + ".join(part.name for part in spec.components)
    absent: list[str] = []
    constants = [_constants(part, absent) for part in spec.components]
    correlations = [_correlation(part, absent) for part in spec.components]
    if absent:
        raise MissingParameters(
            shown, tuple(absent), "Use another backend, or leave the component out"
        )
    kij, missing = _interaction(spec.components, options)
    if missing and options.missing == "refuse":
        raise MissingParameters(
            shown,
            tuple(f"the {options.eos} interaction parameter of {a} and {b}" for a, b in missing),
            'Give it with interaction={("name", "name"): kij}, or missing="note" to take zero',
        )
    melting = [chemicals.Tt(part.cas) or chemicals.Tm(part.cas) for part in spec.components]
    Tc, pc, omega = (np.array(column, dtype=np.float64) for column in zip(*constants, strict=True))
    return Parameters(
        Tc=Tc,
        pc=pc,
        omega=omega,
        kij=kij,
        molar_mass=np.array([part.molar_mass for part in spec.components]),
        melting=np.array([np.nan if T is None else T for T in melting], dtype=np.float64),
        heat_capacity=tuple(one for one in correlations if one is not None),
        missing_pairs=missing,
    )


def _constants(part: Component, absent: list[str]) -> tuple[float | None, ...]:
    known = chemicals.Tc(part.cas), chemicals.Pc(part.cas), chemicals.omega(part.cas)
    names = "critical temperature", "critical pressure", "acentric factor"
    absent += [
        f"the {name} of {part.name}"
        for name, value in zip(names, known, strict=True)
        if value is None
    ]
    return known


def _correlation(part: Component, absent: list[str]) -> Correlation | None:
    """Published correlation of one component; it must reach 298.15 K, where the datum lies."""
    found = _trc(part) or _noble(part) or _poling(part)
    if found is None:
        absent.append(f"an ideal-gas heat capacity of {part.name}")
    elif not found.T_min <= 298.15 <= found.T_max:
        absent.append(f"an ideal-gas heat capacity of {part.name} at 298.15 K")
    return found


def _trc(part: Component) -> Correlation | None:
    table = heat_capacity.TRC_gas_data
    if part.cas not in table.index:
        return None
    row = table.loc[part.cas]
    coefficients = tuple(float(row[f"a{k}"]) for k in range(8))
    return Correlation(coefficients, (0.0,) * 5, float(row["Tmin"]), float(row["Tmax"]), "TRC")


def _noble(part: Component) -> Correlation | None:
    if part.formula not in _NOBLE:
        return None
    return Correlation((2.5, *(0.0,) * 7), (0.0,) * 5, *_NOBLE_RANGE, "monatomic gas")


def _poling(part: Component) -> Correlation | None:
    table = heat_capacity.Cp_data_Poling
    if part.cas not in table.index:
        return None
    row = table.loc[part.cas]
    coefficients = tuple(float(row[f"a{k}"]) for k in range(5))
    if not np.isfinite([*coefficients, row["Tmin"], row["Tmax"]]).all():
        return None
    return Correlation((0.0,) * 8, coefficients, float(row["Tmin"]), float(row["Tmax"]), "Poling")


def _interaction(
    components: tuple[Component, ...], options: Options
) -> tuple[Vector, tuple[tuple[str, str], ...]]:
    kij = np.zeros((len(components), len(components)))
    missing = []
    for (i, one), (j, other) in itertools.combinations(enumerate(components), 2):
        value = _one_kij(one, other, options.eos, options.interaction)
        if value is None:
            missing.append((one.name, other.name))
        else:
            kij[i, j] = kij[j, i] = value
    return kij, tuple(missing)


def _one_kij(
    one: Component, other: Component, eos: str, given: Mapping[frozenset[str], float]
) -> float | None:
    pair = frozenset((one.cas, other.cas))
    if pair in given:
        return given[pair]
    table = _TABLES[eos]
    cas = [one.cas, other.cas]
    # `thermo` answers 0 for a pair it does not have; only the first question tells.
    if table not in IPDB.tables or not IPDB.has_ip_specific(table, cas, "kij"):
        return None
    return float(IPDB.get_ip_specific(table, cas, "kij"))
