"""A state of matter: one point, or an array of points of any shape."""

from __future__ import annotations

import html
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from types import MappingProxyType
from typing import TYPE_CHECKING, Any, Protocol, TypeAlias

import numpy as np
import numpy.typing as npt
import pint

from lostwork.errors import DatumMismatch, StateNotFound
from lostwork.properties.backend import Column
from lostwork.properties.datum import Datum
from lostwork.properties.formation import formation
from lostwork.quantities import (
    PRESSURE,
    SPECIFIC_ENERGY,
    SPECIFIC_ENTROPY,
    SPECIFIC_VOLUME,
    TEMPERATURE,
    in_unit,
    quantity,
)

if TYPE_CHECKING:
    from lostwork.properties.fluid import Fluid

__all__ = ["Change", "DeadState", "Matter", "SiState", "State"]

Quantity: TypeAlias = "pint.Quantity[Any]"

_SAME_FRACTION = 1e-9


@dataclass(frozen=True, slots=True)
class SiState:
    """The columns of a state as plain floats or read-only arrays: K, Pa, m3/kg, J/kg, J/kg/K."""

    T: Column
    p: Column
    v: Column
    h: Column
    s: Column
    quality: Column

    @property
    def rho(self) -> Column:
        """Density, kg/m3."""
        return 1.0 / self.v

    @property
    def u(self) -> Column:
        """Internal energy, J/kg."""
        return self.h - self.p * self.v


@dataclass(frozen=True, slots=True)
class DeadState:
    """A fluid at the T0 and p0 of its surroundings: v0 (m3/kg), h0, u0 (J/kg), s0 (J/kg/K)."""

    T: Column
    p: Column
    v: Column
    h: Column
    s: Column

    @property
    def u(self) -> Column:
        """Internal energy, J/kg."""
        return self.h - self.p * self.v


class Environment(Protocol):
    """What the exergy of a state is counted against; `Surroundings` is one."""

    def dead_state(self, fluid: Fluid) -> DeadState:
        """Give the dead state of a fluid."""


class Matter(Protocol):
    """What a balance needs of a state, whether computed or given."""

    @property
    def si(self) -> Any:
        """Columns in SI: h and s at least."""

    @property
    def datum(self) -> Datum:
        """Datum of h and s."""

    @property
    def shape(self) -> tuple[int, ...]:
        """Shape of the columns; ``()`` for one point."""

    @property
    def failed(self) -> Mapping[int, str]:
        """Reason for each row without a state."""

    @property
    def label(self) -> str:
        """Name for messages."""


@dataclass(frozen=True, slots=True)
class Change:
    """What changed from one state to another on one datum: v, h, s, u, as quantities."""

    v: Quantity
    h: Quantity
    s: Quantity
    u: Quantity


class State:
    """A state of a fluid, made by `Fluid.state`; it cannot be changed.

    Properties are pint quantities of the application registry; `si` holds the same as plain
    floats or read-only arrays.  h, u and s are on `datum`.
    """

    __slots__ = ("_failed", "_fluid", "_si")

    _fluid: Fluid
    _si: SiState
    _failed: Mapping[int, str]

    def __init__(self, fluid: Fluid, si: SiState, failed: Mapping[int, str]) -> None:
        put = object.__setattr__
        put(self, "_fluid", fluid)
        put(self, "_si", si)
        put(self, "_failed", MappingProxyType(dict(failed)))

    def __setattr__(self, name: str, value: object) -> None:
        raise AttributeError(f"a State cannot be changed: {name}")

    def __delattr__(self, name: str) -> None:
        raise AttributeError(f"a State cannot be changed: {name}")

    @property
    def fluid(self) -> Fluid:
        """The fluid, with its backend."""
        return self._fluid

    @property
    def si(self) -> SiState:
        """Columns in SI: T p v rho h s u quality."""
        return self._si

    @property
    def failed(self) -> Mapping[int, str]:
        """Rows without a state: flat index and reason."""
        return self._failed

    @property
    def datum(self) -> Datum:
        """Datum of h, u and s."""
        return self.fluid.datum

    @property
    def label(self) -> str:
        """Name of the fluid, for messages."""
        return self.fluid.name

    @property
    def shape(self) -> tuple[int, ...]:
        """Shape of the columns; ``()`` for one point."""
        return np.shape(self.si.T)

    @property
    def T(self) -> Quantity:
        """Temperature, K."""
        return quantity(self.si.T, "K")

    @property
    def p(self) -> Quantity:
        """Absolute pressure, Pa."""
        return quantity(self.si.p, "Pa")

    @property
    def v(self) -> Quantity:
        """Specific volume, m3/kg."""
        return quantity(self.si.v, "m^3/kg")

    @property
    def rho(self) -> Quantity:
        """Density, kg/m3."""
        return quantity(self.si.rho, "kg/m^3")

    @property
    def h(self) -> Quantity:
        """Specific enthalpy, J/kg, on `datum`."""
        return quantity(self.si.h, "J/kg")

    @property
    def u(self) -> Quantity:
        """Specific internal energy, J/kg, on `datum`."""
        return quantity(self.si.u, "J/kg")

    @property
    def s(self) -> Quantity:
        """Specific entropy, J/kg/K, on `datum`."""
        return quantity(self.si.s, "J/(kg*K)")

    @property
    def quality(self) -> Quantity:
        """Mass fraction of vapour; NaN outside the dome."""
        return quantity(self.si.quality, "")

    @property
    def molar_mass(self) -> Quantity:
        """Molar mass, kg/mol."""
        return self.fluid.molar_mass

    @property
    def phase(self) -> Any:
        """Phase by name, one word or an array of words.

        "liquid", "gas", "supercritical", "two-phase", "saturated liquid", "saturated vapour".
        """
        si = self.si
        names = _phase_names(si, self.fluid)
        return names if self.shape else str(names[()])

    def exergy(self, site: Environment, *, closed: bool = False) -> Quantity:
        """Exergy against the surroundings, J/kg, kinetic and potential terms left out.

        Flow exergy (h - h0) - T0 (s - s0), or with ``closed=True`` that of a charge,
        (u - u0) + p0 (v - v0) - T0 (s - s0).  The dead state is the same fluid at T0 and p0.

        Raises
        ------
        StateNotFound
            The fluid has no state at T0 and p0 (frozen, or outside the model).
        """
        dead = site.dead_state(self.fluid)
        si = self.si
        if closed:
            exergy = (si.u - dead.u) + dead.p * (si.v - dead.v) - dead.T * (si.s - dead.s)
        else:
            exergy = (si.h - dead.h) - dead.T * (si.s - dead.s)
        return quantity(exergy, "J/kg")

    def isclose(self, other: State, *, relative: float = 1e-9) -> Any:
        """Whether T, p and v agree within a relative tolerance, row by row."""
        if self.fluid != other.fluid:
            return False
        pairs = ((self.si.T, other.si.T), (self.si.p, other.si.p), (self.si.v, other.si.v))
        close = np.logical_and.reduce(
            np.broadcast_arrays(*(np.isclose(a, b, rtol=relative, atol=0.0) for a, b in pairs))
        )
        return close if close.shape else bool(close)

    def reshape(self, *shape: int | tuple[int, ...]) -> State:
        """Give the same states in another shape.

        Raises
        ------
        StateNotFound
            The shape holds another number of states.
        """
        wanted: Any = shape[0] if len(shape) == 1 else shape
        try:
            columns = [_frozen(np.reshape(column, wanted)) for column in _columns(self.si)]
        except (ValueError, TypeError) as error:
            raise StateNotFound(
                fluid=self.label, given=f"shape {wanted}", reason=f"shape is {self.shape}"
            ) from error
        return State(self.fluid, SiState(*columns), self.failed)

    def __sub__(self, other: State) -> Change:
        """Change from `other` to this state.

        Raises
        ------
        DatumMismatch
            The two are not on one datum, or differ by a component without formation data.
        """
        if not isinstance(other, State):
            return NotImplemented
        if self.datum != other.datum:
            raise DatumMismatch(
                first=self.label, second=other.label, reason=f"{self.datum} against {other.datum}"
            )
        stray = _without_formation(self.fluid, other.fluid)
        if stray:
            raise DatumMismatch(
                first=self.label,
                second=other.label,
                reason=f"their compositions differ and no formation data are known for {stray}",
            )
        a, b = self.si, other.si
        return Change(
            v=quantity(a.v - b.v, "m^3/kg"),
            h=quantity(a.h - b.h, "J/kg"),
            s=quantity(a.s - b.s, "J/(kg*K)"),
            u=quantity(a.u - b.u, "J/kg"),
        )

    def __getitem__(self, key: Any) -> State:
        if not self.shape:
            raise StateNotFound(
                fluid=self.label, given=f"[{key!r}]", reason="one point has no axis to index"
            )
        try:
            places = np.arange(int(np.prod(self.shape))).reshape(self.shape)[key]
        except IndexError as error:
            raise StateNotFound(
                fluid=self.label, given=f"[{key!r}]", reason=f"shape is {self.shape}"
            ) from error
        si = self.si
        if np.ndim(places) == 0:
            row = int(places)
            if row in self.failed:
                raise StateNotFound(fluid=self.label, given=f"row {row}", reason=self.failed[row])
            return State(self.fluid, SiState(*(float(np.ravel(c)[row]) for c in _columns(si))), {})
        flat = np.ravel(places)
        failed = {i: self.failed[int(row)] for i, row in enumerate(flat) if int(row) in self.failed}
        return State(self.fluid, SiState(*(_frozen(c[key]) for c in _columns(si))), failed)

    def __iter__(self) -> Iterator[State]:
        return (self[row] for row in range(len(self)))

    def __bool__(self) -> bool:
        return 0 not in self.shape

    def __len__(self) -> int:
        if not self.shape:
            raise TypeError("one point has no length")
        return self.shape[0]

    def __eq__(self, other: object) -> bool:
        if not isinstance(other, State):
            return NotImplemented
        return (
            self.fluid == other.fluid
            and self.shape == other.shape
            and all(
                np.array_equal(a, b, equal_nan=True)
                for a, b in zip(_columns(self.si), _columns(other.si), strict=True)
            )
        )

    def __hash__(self) -> int:
        columns = (np.asarray(self.si.T).tobytes(), np.asarray(self.si.v).tobytes())
        return hash((self.fluid, self.shape, *columns))

    def __reduce__(self) -> tuple[Any, ...]:
        return _restored, (self.fluid, _columns(self.si), dict(self.failed))

    def __repr__(self) -> str:
        facts = ", ".join(f"{name} = {text}" for name, text in self._facts())
        shape = f", {self.shape} points" if self.shape else ""
        failed = f", {len(self.failed)} failed" if self.failed else ""
        return f"State({self.fluid.name} by {self.fluid.backend}{shape}{failed}: {facts})"

    def _repr_html_(self) -> str:
        rows = "".join(
            f"<tr><th>{html.escape(name)}</th><td>{html.escape(text)}</td></tr>"
            for name, text in self._facts()
        )
        title = html.escape(f"{self.fluid.name} by {self.fluid.backend}")
        return f"<table><caption>{title}</caption>{rows}</table>"

    def _facts(self) -> list[tuple[str, str]]:
        si = self.si
        facts = [
            ("T", _range(in_unit(si.T, TEMPERATURE, "degC"), "degC")),
            ("p", _range(in_unit(si.p, PRESSURE, "bar"), "bar")),
            ("v", _range(in_unit(si.v, SPECIFIC_VOLUME, "m^3/kg"), "m3/kg")),
            ("h", _range(in_unit(si.h, SPECIFIC_ENERGY, "kJ/kg"), "kJ/kg")),
            ("s", _range(in_unit(si.s, SPECIFIC_ENTROPY, "kJ/(kg*K)"), "kJ/kg/K")),
        ]
        if not np.all(np.isnan(si.quality)):
            facts.append(("quality", _range(si.quality, "")))
        if not self.shape:
            facts.append(("phase", self.phase))
        return facts


def _without_formation(one: Fluid, other: Fluid) -> str:
    """Name a component that only one side holds as much of and that has no formation data."""
    if one.spec == other.spec:
        return ""
    shares = [
        dict(zip(f.spec.components, f.spec.mass_fractions, strict=True)) for f in (one, other)
    ]
    for component in {**shares[0], **shares[1]}:
        here, there = (share.get(component, 0.0) for share in shares)
        if abs(here - there) > _SAME_FRACTION and formation(component) is None:
            return component.name
    return ""


def _columns(si: SiState) -> tuple[Any, ...]:
    return si.T, si.p, si.v, si.h, si.s, si.quality


def _restored(fluid: Fluid, columns: tuple[Any, ...], failed: dict[int, str]) -> State:
    return State(fluid, SiState(*(_frozen(c) for c in columns)), failed)


def _frozen(column: Any) -> Any:
    if isinstance(column, np.ndarray):
        column = column.copy()
        column.flags.writeable = False
    return column


def _range(values: Column, unit: str) -> str:
    array = np.asarray(values, dtype=np.float64)
    known = array[np.isfinite(array)]
    if known.size == 0:
        return "none"
    low, high = float(known.min()), float(known.max())
    text = f"{low:.6g}" if low == high else f"{low:.6g} to {high:.6g}"
    return f"{text} {unit}".rstrip()


def _phase_names(si: SiState, fluid: Fluid) -> npt.NDArray[np.str_]:
    """Phases from quality and the critical point; the libraries' own labels are wrong at times."""
    T, p, v, quality = (np.asarray(c) for c in (si.T, si.p, si.v, si.quality))
    critical = fluid.critical_point
    with np.errstate(invalid="ignore"):
        wet = np.isfinite(quality)
        conditions = [
            ~np.isfinite(T),
            wet & (quality <= 0.0),
            wet & (quality >= 1.0),
            wet,
        ]
        names = ["no state", "saturated liquid", "saturated vapour", "two-phase"]
        if critical is not None:
            conditions += [
                (critical.T <= T) & (critical.p <= p),
                (critical.T > T) & (v < critical.v),
            ]
            names += ["supercritical", "liquid"]
    return np.select(conditions, names, default=fluid.only_phase if critical is None else "gas")
