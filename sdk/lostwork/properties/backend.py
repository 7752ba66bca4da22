"""The contract of a property backend.

A `Backend` opens a `PropertyModel` for one composition; a model turns a pair of columns into
the columns of a state.  The rules a model keeps:

1. SI floats, mass basis: K, Pa, m3/kg, J/kg, J/kg/K.  Composition by mole fraction.
2. `columns(pair, x, y)` takes two floats, or two one-dimensional float64 arrays of one length,
   and answers in the same form.  ``("T", "p")`` is the one pair that every model offers.
3. A bad row is marked: NaN in every column and an entry in `Columns.failed` that says why.  The
   other rows are computed.  A bad call (a pair not in `native_pairs`) raises.
4. No clipping and no extrapolation: outside `limits` a row fails.
5. A two-phase model offers (p, h), (p, s), (T, quality) and (p, quality) itself.  `quality` is the
   mass fraction of vapour inside the dome, saturation lines included, and NaN outside.
6. h and s are on any zero the model likes, the same for every pair and every row.
   `ideal_gas_limit` tells that zero, and the core shifts the model to the common datum.
7. Safe to call from several threads at once, picklable as the recipe that opened it.
"""

from __future__ import annotations

from abc import ABC, abstractmethod
from collections.abc import Mapping
from dataclasses import dataclass, field
from types import MappingProxyType
from typing import Any, TypeAlias

import numpy as np
import numpy.typing as npt

from lostwork.errors import PairRefused
from lostwork.properties.components import Component

__all__ = [
    "DETERMINING_PAIRS",
    "REFERENCE_PRESSURE",
    "REFERENCE_TEMPERATURE",
    "Backend",
    "Columns",
    "Critical",
    "FluidSpec",
    "Limits",
    "Pair",
    "PhaseSplit",
    "PropertyModel",
    "R",
]

Column: TypeAlias = "float | npt.NDArray[np.float64]"
Pair: TypeAlias = tuple[str, str]

R = 8.31446261815324
"""Molar gas constant, J/mol/K (exact, SI 2019)."""

REFERENCE_TEMPERATURE = 298.15
"""Temperature of the common datum, K."""

REFERENCE_PRESSURE = 1e5
"""Pressure of the common datum, Pa."""

DETERMINING_PAIRS: frozenset[Pair] = frozenset(
    {
        ("T", "p"),
        ("T", "v"),
        ("T", "s"),
        ("T", "quality"),
        ("p", "v"),
        ("p", "h"),
        ("p", "s"),
        ("p", "u"),
        ("p", "quality"),
        ("v", "h"),
        ("v", "s"),
        ("v", "u"),
        ("h", "s"),
        ("s", "u"),
    }
)
"""The pairs that fix one state, each in the order T p v h s u quality."""


@dataclass(frozen=True)
class FluidSpec:
    """What a backend is asked to open: components, mole fractions, and the name asked for.

    `name` is the caller's word ("air", "R410A", "nitrogen") or ``None`` for a composition given
    as a mapping; a backend may hold a model of its own under that name.
    """

    components: tuple[Component, ...]
    mole_fractions: tuple[float, ...]
    name: str | None = None

    @property
    def molar_mass(self) -> float:
        """Molar mass of the mixture, kg/mol."""
        pairs = zip(self.components, self.mole_fractions, strict=True)
        return sum(c.molar_mass * x for c, x in pairs)

    @property
    def mass_fractions(self) -> tuple[float, ...]:
        """Mass fractions, in the order of the components."""
        total = self.molar_mass
        pairs = zip(self.components, self.mole_fractions, strict=True)
        return tuple(c.molar_mass * x / total for c, x in pairs)


@dataclass(frozen=True)
class Limits:
    """Range of a model: temperatures in K, pressures in Pa, and the equation it comes from."""

    T_min: float
    T_max: float
    p_min: float
    p_max: float
    source: str = ""


@dataclass(frozen=True)
class Critical:
    """Critical point of a pure fluid, or a pseudo-critical one of a mixture; K, Pa, m3/kg."""

    T: float
    p: float
    v: float


@dataclass(frozen=True, slots=True)
class Columns:
    """Columns of a state: T (K), p (Pa), v (m3/kg), h (J/kg), s (J/kg/K), quality, failed rows.

    `failed` maps the index of a row (0 for a scalar call) to the reason.
    """

    T: Column
    p: Column
    v: Column
    h: Column
    s: Column
    quality: Column
    failed: Mapping[int, str] = field(default_factory=lambda: MappingProxyType({}))


@dataclass(frozen=True)
class PhaseSplit:
    """Phases in equilibrium at one (T, p): vapour fraction by amount and both compositions."""

    vapour_fraction: float
    liquid: tuple[float, ...]
    vapour: tuple[float, ...]


class PropertyModel(ABC):
    """One fluid of one backend, see the rules at the top of this module."""

    molar_mass: float
    """kg/mol, as the equation itself uses it."""
    limits: Limits
    native_pairs: frozenset[Pair]
    """Pairs that `columns` answers; the core solves the other determining pairs."""
    two_phase: bool
    """Whether the model knows vapour-liquid equilibrium."""
    entropy_noise: float
    """Measured inconsistency of the model in single phase, J/kg/K: the floor of a verdict."""
    only_phase: str = "gas"
    """What the states of a model are that knows no two phases and no critical point."""
    notes: tuple[str, ...] = ()
    """What the user should know, for example which interaction parameters were missing."""

    @abstractmethod
    def columns(self, pair: Pair, x: Column, y: Column) -> Columns:
        """State columns for two columns of `pair`, which is one of `native_pairs`."""

    def ideal_gas_limit(self) -> tuple[float, float] | None:
        """Give h (J/kg) and s (J/kg/K) of the fluid as an ideal gas at 298.15 K and 1 bar.

        On the model's own zero, mixing entropy included.  ``None`` where the model has no such
        limit; its states then keep a datum of their own.
        """
        return None

    def critical(self) -> Critical | None:
        """Give the critical point, by which liquid, gas and supercritical are told apart."""
        return None

    def split(self, T: float, p: float) -> PhaseSplit:
        """Compositions of the phases of a mixture at T (K) and p (Pa) inside the dome.

        A two-phase model of a mixture overrides this.
        """
        raise PairRefused(given=("T", "p"), reason="this model gives no phase compositions")

    def noise_at(self, T: Column, p: Column) -> Column:
        """Inconsistency of the entropy at T and p, J/kg/K; `entropy_noise` unless overridden."""
        return self.entropy_noise


class Backend(ABC):
    """A source of property models, found by name through the plugins."""

    @abstractmethod
    def open(self, spec: FluidSpec, options: Mapping[str, Any]) -> PropertyModel:
        """Open a model; heavy libraries are imported here, not before.

        Raises
        ------
        PropertyError, UnknownComponent
            The backend does not know the fluid, or has no such option.
        """

    def composition(self, name: str) -> Mapping[str, float] | None:
        """Mole fractions (by component name or CAS number) of a mixture this backend names."""
        return None
