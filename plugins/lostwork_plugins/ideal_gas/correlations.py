"""Published correlations of the heat capacity of one gas, each with the range it was made for.

The coefficients are those that `chemicals` carries; the equations are evaluated here on arrays.
Every correlation gives cp / R; the model refuses what lies outside its range.

How far they can be trusted: against the ideal part of the reference equations of CoolProp 8.0, from
250 K to 450 K, the greatest departure of cp has a median of 0.4 % (TRC, 89 fluids), 0.6 % (Poling,
81) and 0.2 % (Shomate, 30); for one fluid in ten it is above 1.7 %, 2.2 % and 0.8 %.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from itertools import pairwise
from typing import Protocol, TypeAlias

import numpy as np
import numpy.typing as npt

from lostwork import REFERENCE_TEMPERATURE, Component, R

__all__ = ["CORRELATIONS", "Correlation", "Monatomic", "Poling", "Shomate", "Trc", "correlation_of"]

Vector: TypeAlias = npt.NDArray[np.float64]

WIDEST_RANGE = (1.0, 6000.0)
"""Range, K, of what no correlation bounds: noble gases, and a constant assumed by the caller."""

_NOBLE = frozenset(
    {
        "7440-59-7",
        "14762-55-1",
        "7440-01-9",
        "7440-37-1",
        "7439-90-9",
        "7440-63-3",
        "10043-92-2",
    }
)


class Correlation(Protocol):
    """Heat capacity of one gas as a function of temperature."""

    @property
    def name(self) -> str:
        """Short name, as the option `correlation` takes it."""

    @property
    def source(self) -> str:
        """Publication the equation and its coefficients come from."""

    @property
    def T_min(self) -> float:
        """Lower end of the published range, K."""

    @property
    def T_max(self) -> float:
        """Upper end of the published range, K."""

    def cp_over_R(self, T: Vector) -> Vector:
        """Give cp / R at T (K), for T inside the range."""

    def __hash__(self) -> int: ...


@dataclass(frozen=True)
class Monatomic:
    """A noble gas: translation only, cp = 5/2 R exactly."""

    T_min: float = WIDEST_RANGE[0]
    T_max: float = WIDEST_RANGE[1]
    name: str = "monatomic"
    source: str = "kinetic theory, cp = 5/2 R"

    def cp_over_R(self, T: Vector) -> Vector:
        """Give 5/2 at every T."""
        return np.full_like(T, 2.5)


@dataclass(frozen=True)
class Trc:
    """Equation of the Thermodynamics Research Center, with eight coefficients.

    cp/R = a0 + (a1/T^2) exp(-a2/T) + a3 y^2 + (a4 - a5/(T - a7)^2) y^8, where
    y = (T - a7)/(T + a6) above a7 and 0 below.  The pole at a7 cancels against y^8, so it is
    written here as a5 y^6 / (T + a6)^2.
    """

    T_min: float
    T_max: float
    a: tuple[float, ...]
    substance: str = ""
    name: str = "TRC"
    source: str = (
        "Kabo and Roganov, Thermodynamics of Organic Compounds in the Gas State, vol. II, 1994"
    )

    def cp_over_R(self, T: Vector) -> Vector:
        """Give cp / R at T (K)."""
        a0, a1, a2, a3, a4, a5, a6, a7 = self.a
        y2 = np.square(np.maximum(T - a7, 0.0) / (T + a6))
        high = a4 * np.square(np.square(y2)) - a5 * y2**3 / np.square(T + a6)
        return np.asarray(a0 + a1 / np.square(T) * np.exp(-a2 / T) + a3 * y2 + high)


@dataclass(frozen=True)
class Poling:
    """Polynomial of the fourth degree: cp/R = a0 + a1 T + a2 T^2 + a3 T^3 + a4 T^4."""

    T_min: float
    T_max: float
    a: tuple[float, ...]
    name: str = "Poling"
    source: str = (
        "Poling, Prausnitz and O'Connell, The Properties of Gases and Liquids, 5th ed., 2001"
    )

    def cp_over_R(self, T: Vector) -> Vector:
        """Give cp / R at T (K)."""
        a0, a1, a2, a3, a4 = self.a
        return a0 + T * (a1 + T * (a2 + T * (a3 + T * a4)))


@dataclass(frozen=True)
class Shomate:
    """Shomate's equation in adjoining pieces: cp = A + B T + C T^2 + D T^3 + E/T^2, J/mol/K.

    `pieces` holds (T_low, T_high, A, B, C, D, E); where two meet, cp may have a small step, h and
    s have none.
    """

    pieces: tuple[tuple[float, ...], ...]
    name: str = "Shomate"
    source: str = "NIST Chemistry WebBook, Standard Reference Database 69 (Chase, 1998)"

    @property
    def T_min(self) -> float:
        """Lower end of the first piece, K."""
        return self.pieces[0][0]

    @property
    def T_max(self) -> float:
        """Upper end of the last piece, K."""
        return self.pieces[-1][1]

    def cp_over_R(self, T: Vector) -> Vector:
        """Give cp / R at T (K)."""
        meetings = [piece[1] for piece in self.pieces[:-1]]
        coefficients = np.array([piece[2:7] for piece in self.pieces])
        chosen = coefficients[np.searchsorted(meetings, T, side="right")]
        A, B, C, D, E = np.moveaxis(chosen, -1, 0)
        return np.asarray((A + T * (B + T * (C + D * T)) + E / np.square(T)) / R)


CORRELATIONS = ("TRC", "Poling", "Shomate")
"""Names of the correlations, in the order in which they are tried."""


def correlation_of(component: Component, wanted: str | None = None) -> Correlation | None:
    """Choose the correlation of a gas.

    Parameters
    ----------
    component
        The gas.
    wanted
        One of `CORRELATIONS`, or ``None`` for the first that has this gas; those whose range holds
        298.15 K go before the others, because the common datum is there.

    Returns
    -------
    Correlation or None
        ``None`` where none is published.  A noble gas is monatomic whatever is wanted.
    """
    if component.cas in _NOBLE:
        return Monatomic()
    found = [_published(component.cas, name) for name in CORRELATIONS if wanted in (None, name)]
    known = [correlation for correlation in found if correlation is not None]
    return min(known, key=_misses_datum, default=None)


def _misses_datum(correlation: Correlation) -> bool:
    return not correlation.T_min <= REFERENCE_TEMPERATURE <= correlation.T_max


@lru_cache(maxsize=512)
def _published(cas: str, name: str) -> Correlation | None:
    read = {"TRC": _trc, "Poling": _poling, "Shomate": _shomate}[name]
    correlation = read(cas)
    return correlation if correlation is not None and _is_sound(correlation) else None


def _trc(cas: str) -> Correlation | None:
    from chemicals import heat_capacity  # noqa: PLC0415

    table = heat_capacity.TRC_gas_data
    if cas not in table.index:
        return None
    row = table.loc[cas]
    coefficients = tuple(float(row[f"a{i}"]) for i in range(8))
    return Trc(float(row["Tmin"]), float(row["Tmax"]), coefficients, str(row["Chemical"]))


def _poling(cas: str) -> Correlation | None:
    from chemicals import heat_capacity  # noqa: PLC0415

    table = heat_capacity.Cp_data_Poling
    if cas not in table.index:
        return None
    row = table.loc[cas]
    coefficients = tuple(float(row[f"a{i}"]) for i in range(5))
    return Poling(float(row["Tmin"]), float(row["Tmax"]), coefficients)


def _shomate(cas: str) -> Correlation | None:
    from chemicals import heat_capacity  # noqa: PLC0415

    # Solid, liquid and gas, in this order.
    _, _, gas = heat_capacity.WebBook_Shomate_coefficients.get(cas, (None, None, None))
    if not gas:
        return None
    return Shomate(tuple(tuple(float(number) for number in piece) for piece in gas))


def _is_sound(correlation: Correlation) -> bool:
    """Tell whether a set of coefficients gives a gas: finite, with cv above zero, in one piece.

    A few published sets are misprinted, overlap or have no range; they are left out.
    """
    if not (0.0 < correlation.T_min < correlation.T_max):
        return False
    if isinstance(correlation, Shomate):
        # The table of integrals has its joints at whole kelvins, and a joint of cp must be one.
        for below, above in pairwise(correlation.pieces):
            if below[1] != above[0] or not below[1].is_integer():
                return False
    if isinstance(correlation, Trc) and not correlation.a[7].is_integer():
        return False
    T = np.linspace(correlation.T_min, correlation.T_max, 500)
    with np.errstate(all="ignore"):
        cp = correlation.cp_over_R(T)
    return bool(np.isfinite(cp).all() and cp.min() > 1.0)
