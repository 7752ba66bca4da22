"""A fluid: one composition behind one backend, on the common datum."""

from __future__ import annotations

import threading
from collections import OrderedDict
from collections.abc import Hashable, Mapping
from types import MappingProxyType
from typing import Any, Literal

import numpy as np
import numpy.typing as npt
import pint

from lostwork._shapes import common_shape
from lostwork.errors import OutOfLimits, PairRefused, PluginFailed, StateNotFound
from lostwork.plugins import plugins
from lostwork.properties.backend import (
    Backend,
    Column,
    Columns,
    Critical,
    FluidSpec,
    Limits,
    Pair,
    PhaseSplit,
    PropertyModel,
)
from lostwork.properties.components import Component
from lostwork.properties.compositions import checked_spec, fluid_spec
from lostwork.properties.datum import Datum, Shift, shift_to_common
from lostwork.properties.noise import Noise, Region
from lostwork.properties.noise_measurement import measured
from lostwork.properties.pairs import ordered_pair, solve_pair
from lostwork.properties.state import SiState, State
from lostwork.quantities import (
    DENSITY,
    FRACTION,
    MOLAR_DENSITY,
    MOLAR_ENERGY,
    MOLAR_ENTROPY,
    MOLAR_VOLUME,
    PRESSURE,
    SPECIFIC_ENERGY,
    SPECIFIC_ENTROPY,
    SPECIFIC_VOLUME,
    TEMPERATURE,
    quantity,
    to_si,
    to_si_any,
)

__all__ = ["Fluid"]

_MOLAR_FORMS = {
    "v": (SPECIFIC_VOLUME, MOLAR_VOLUME),
    "h": (SPECIFIC_ENERGY, MOLAR_ENERGY),
    "u": (SPECIFIC_ENERGY, MOLAR_ENERGY),
    "s": (SPECIFIC_ENTROPY, MOLAR_ENTROPY),
}
_SAME_MOLAR_MASS = 1e-3
"""Published atomic weights, and compositions of air, leave molar masses this far apart."""
_SHIFTED = {"h": "h", "u": "h", "s": "s"}


class Fluid:
    """A pure fluid or a mixture, as one property backend sees it.

    Parameters
    ----------
    fluid
        A name ("nitrogen", "R134a", "air"), a CAS number, a formula, or a mapping of these to
        fractions that sum to one.
    backend
        Name of an installed backend, for example "ideal-gas", "coolprop" or "cubic";
        "distribution:name" where two plugins share a name.
    basis
        Whether the fractions are by "amount" (mole fractions) or by "mass".
    **options
        Options of the backend, for example ``eos="SRK"``.

    Raises
    ------
    UnknownComponent, AmbiguousComponent, CompositionError
        For the name or the composition.
    PluginNotFound, PluginClash, MissingExtra
        For the backend.
    PropertyError
        The backend has no model of this fluid, or no such option.
    """

    __slots__ = ("_floor", "_identity", "_model", "_shift", "backend", "options", "spec")

    _floor: float
    _identity: tuple[Hashable, ...]
    _model: PropertyModel
    _shift: Shift
    spec: FluidSpec
    """Components and mole fractions."""
    backend: str
    """Name of the backend."""
    options: Mapping[str, Any]
    """Options it was opened with."""

    def __init__(
        self,
        fluid: str | Component | Mapping[str, float] | FluidSpec,
        *,
        backend: str,
        basis: Literal["amount", "mass"] = "amount",
        **options: Any,
    ) -> None:
        source: Backend = plugins().backend(backend).load()()
        spec = (
            checked_spec(fluid.components, fluid.mole_fractions, fluid.name)
            if isinstance(fluid, FluidSpec)
            else fluid_spec(fluid, basis, named=source.composition)
        )
        put = object.__setattr__
        put(self, "spec", spec)
        put(self, "backend", backend)
        put(self, "options", MappingProxyType(dict(options)))
        put(self, "_identity", (backend, spec, _frozen(options)))
        put(self, "_floor", 0.0)
        model, shift = _opened(source, backend, spec, options)
        put(self, "_model", model)
        put(self, "_shift", shift)

    def __setattr__(self, name: str, value: object) -> None:
        raise AttributeError(f"a Fluid cannot be changed: {name}")

    def __delattr__(self, name: str) -> None:
        raise AttributeError(f"a Fluid cannot be changed: {name}")

    def state(self, *, zero: Literal["common", "backend"] = "common", **given: Any) -> State:
        """Fix a state by exactly two of T, p, v (or rho), h, s, u and quality.

        Parameters
        ----------
        zero
            Where given h, u and s are counted from: the common datum of all backends, or
            "backend" for the zero of the property library itself, as in its printed tables.  The
            state reports on the common datum either way.
        **given
            Quantities or strings with units; one point, or arrays that broadcast to one shape.
            h, s, u, v and rho may be per mass or per amount.  `quality` is the mass fraction of
            vapour, 0 to 1.

        Returns
        -------
        State
            Of the broadcast shape.  In an array a row without a state is NaN and is listed in
            `State.failed`.

        Raises
        ------
        QuantityError
            A value cannot be read.
        PairRefused
            The two properties do not fix a state.
        StateNotFound
            A single point has no state.
        """
        if zero not in ("common", "backend"):
            raise PairRefused(
                given=tuple(given),
                reason=f"zero={zero!r} is no datum",
                instead='Give zero="common" or zero="backend"',
            )
        pair = ordered_pair(tuple("v" if name == "rho" else name for name in given))
        values = {
            "v" if name == "rho" else name: self._si(name, value) for name, value in given.items()
        }
        if zero == "common":
            for name, shifted in _SHIFTED.items():
                if name in values:
                    values[name] = values[name] - getattr(self._shift, shifted)
        return self.state_si(pair, values[pair[0]], values[pair[1]], shifted=False)

    def state_si(
        self,
        pair: Pair,
        x: float | npt.NDArray[np.float64],
        y: float | npt.NDArray[np.float64],
        *,
        shifted: bool = True,
    ) -> State:
        """Fix a state by SI floats or arrays: for process types, which work in SI inside.

        Parameters
        ----------
        pair
            Two names in the order T p v h s u quality, for example ``("p", "h")``.
        x, y
            SI values, floats or arrays that broadcast.
        shifted
            Whether h, u and s are on the common datum (as those of a `State` are).

        Raises
        ------
        PairRefused
            The two properties do not fix a state.
        ShapesDiffer
            Two arrays of different lengths.
        StateNotFound
            A single point has no state.
        """
        ordered = ordered_pair(pair)
        if ordered != tuple(pair):
            pair, x, y = ordered, y, x
        if shifted:
            x, y = self._unshifted(pair[0], x), self._unshifted(pair[1], y)
        if np.ndim(x) == 0 and np.ndim(y) == 0:
            return self._point(pair, float(x), float(y))
        shape = common_shape(self.name, ((pair[0], x), (pair[1], y)))
        x, y = np.broadcast_to(x, shape), np.broadcast_to(y, shape)
        columns = solve_pair(
            self._model,
            pair,
            np.array(x, dtype=np.float64).ravel(),
            np.array(y, dtype=np.float64).ravel(),
            pure=self.is_pure,
        )
        return State(self, self._on_common(columns, shape), failed=columns.failed)

    def split(self, T: float, p: float) -> PhaseSplit:
        """Phases of a mixture in equilibrium at T (K) and p (Pa), compositions by amount."""
        return self._model.split(T, p)

    def with_composition(self, mole_fractions: tuple[float, ...]) -> Fluid:
        """Give the same components in other proportions, behind the same backend and options.

        Components whose fraction is zero are left out.

        Raises
        ------
        CompositionError
            Not one fraction for each component, a negative one, or a sum other than 1.
        """
        spec = checked_spec(self.spec.components, mole_fractions)
        return _reopen(spec, self.backend, dict(self.options), self._floor)

    def with_noise(self, noise: Noise) -> Fluid:
        """Give the same fluid with the measured noise as the least tolerance of its verdicts.

        For a backend that states less than `noise` found.
        """
        return _reopen(self.spec, self.backend, dict(self.options), noise.worst.entropy)

    def noise_at(self, T: Column, p: Column) -> Column:
        """Inconsistency of the backend's entropy at T (K) and p (Pa), J/kg/K.

        As its model states it, or as measured where `with_noise` was told of more.
        """
        stated = self._model.noise_at(T, p)
        return np.maximum(stated, self._floor) if self._floor else stated

    def noise(self, region: Region | None = None, *, cells: int = 8) -> Noise:
        """Measure how far the backend contradicts itself: the entropy that does not close.

        h, v and s are followed along isobars and isotherms, by (p, h) and (p, s), around closed
        loops and across saturation (dh = T ds + v dp).  Kept by fluid and region.  A verdict never
        measures; it relies on what the model states, which this puts to the test.

        Parameters
        ----------
        region
            Where; the whole range of the model from 1 kPa up when left out.
        cells
            Into how many cells the region is divided each way.

        Raises
        ------
        OutOfLimits
            No state could be followed in the region.
        """
        return measured(self._identity, self.name, self._model, region, cells, pure=self.is_pure)

    @property
    def critical_point(self) -> Critical | None:
        """Critical point (K, Pa, m3/kg) of the model, or ``None`` without phases."""
        return self._model.critical()

    @property
    def is_pure(self) -> bool:
        """Whether there is one component only."""
        return len(self.spec.components) == 1

    @property
    def knows_two_phases(self) -> bool:
        """Whether the backend models vapour and liquid of this fluid."""
        return self._model.two_phase

    @property
    def only_phase(self) -> str:
        """Phase of the states of a backend that models one phase."""
        return self._model.only_phase

    @property
    def molar_mass(self) -> pint.Quantity[float]:
        """Molar mass, kg/mol, by which amounts are taken for masses.

        That of the components, so that amounts are conserved whatever equation of state each
        stream has: the libraries' own differ in the fifth digit.  Where the caller stated another
        (an option of the ideal gas), the stated one.
        """
        return quantity(self.molar_mass_si, "kg/mol")

    @property
    def limits(self) -> Limits:
        """Range of the model (K, Pa) and the equation it comes from."""
        return self._model.limits

    @property
    def notes(self) -> tuple[str, ...]:
        """What the backend wants its user to know of this model."""
        return self._model.notes

    @property
    def datum(self) -> Datum:
        """Datum of h and s of its states."""
        return self._shift.datum

    @property
    def name(self) -> str:
        """Short name for tables: the word it was asked for by, or its components."""
        if self.spec.name:
            return self.spec.name
        return " + ".join(component.name for component in self.spec.components)

    @property
    def molar_mass_si(self) -> float:
        """Molar mass as a plain float, kg/mol."""
        of_components, of_model = self.spec.molar_mass, self._model.molar_mass
        same = abs(of_model - of_components) <= _SAME_MOLAR_MASS * of_components
        return of_components if same else of_model

    def __eq__(self, other: object) -> bool:
        if not isinstance(other, Fluid):
            return NotImplemented
        return self is other or self._identity == other._identity

    def __hash__(self) -> int:
        return hash(self._identity)

    def __reduce__(self) -> tuple[Any, ...]:
        return _reopen, (self.spec, self.backend, dict(self.options), self._floor)

    def __repr__(self) -> str:
        options = "".join(f", {name}={value!r}" for name, value in self.options.items())
        return f"Fluid({self.name!r}, backend={self.backend!r}{options})"

    def _point(self, pair: Pair, x: float, y: float) -> State:
        columns = solve_pair(self._model, pair, x, y, pure=self.is_pure)
        if columns.failed:
            reason = columns.failed[0]
            given = f"{pair[0]} = {x:.6g}, {pair[1]} = {y:.6g} (SI, on the zero of the backend)"
            raise StateNotFound(fluid=repr(self), given=given, reason=reason)
        return State(self, self._on_common(columns, None), failed={})

    def _on_common(self, columns: Columns, shape: tuple[int, ...] | None) -> SiState:
        h, s = columns.h + self._shift.h, columns.s + self._shift.s
        values = (columns.T, columns.p, columns.v, h, s, columns.quality)
        if shape is None:
            return SiState(*(float(value) for value in values))
        arrays = []
        for value in values:
            array = np.array(value, dtype=np.float64).reshape(shape)
            array.flags.writeable = False
            arrays.append(array)
        return SiState(*arrays)

    def _unshifted(self, name: str, value: Column) -> Column:
        shifted = _SHIFTED.get(name)
        return value - float(getattr(self._shift, shifted)) if shifted else value

    def _si(self, name: str, value: Any) -> Column:
        if name == "T":
            return to_si(value, TEMPERATURE, "T")
        if name == "p":
            return to_si(value, PRESSURE, "p")
        if name == "quality":
            return _checked_quality(to_si(value, FRACTION, "quality"))
        if name == "rho":
            density, dimension = to_si_any(value, (DENSITY, MOLAR_DENSITY), "rho")
            return 1.0 / (density * self.molar_mass_si if dimension is MOLAR_DENSITY else density)
        forms = _MOLAR_FORMS[name]
        number, dimension = to_si_any(value, forms, name)
        return number / self.molar_mass_si if dimension is forms[1] else number


def _checked_quality(quality: Column) -> Column:
    with np.errstate(invalid="ignore"):
        outside = np.any((np.asarray(quality) < 0.0) | (np.asarray(quality) > 1.0))
    if outside:
        raise OutOfLimits(
            fluid="quality", reason=f"the mass fraction of vapour runs from 0 to 1; got {quality}"
        )
    return quality


_OPEN: OrderedDict[Hashable, tuple[PropertyModel, Shift]] = OrderedDict()
_OPEN_LOCK = threading.Lock()
_KEPT_OPEN = 256


def _opened(
    source: Backend, backend: str, spec: FluidSpec, options: Mapping[str, Any]
) -> tuple[PropertyModel, Shift]:
    """Open a model once; models are immutable, so every equal fluid shares it."""
    key = (type(source), spec, _frozen(options))
    with _OPEN_LOCK:
        if key in _OPEN:
            _OPEN.move_to_end(key)
            return _OPEN[key]
    model = source.open(spec, options)
    if ("T", "p") not in model.native_pairs:
        raise PluginFailed(
            plugin=backend, stage="open", reason="its model does not offer the pair T and p"
        )
    opened = (model, shift_to_common(spec, model, _own_zero(backend, spec, options)))
    with _OPEN_LOCK:
        _OPEN[key] = opened
        while len(_OPEN) > _KEPT_OPEN:
            _OPEN.popitem(last=False)
    return opened


def _own_zero(backend: str, spec: FluidSpec, options: Mapping[str, Any]) -> str:
    """Name the zero of one model: of another composition or option, a model may have another."""
    parts = zip(spec.components, spec.mole_fractions, strict=True)
    matter = " + ".join(c.name if x == 1.0 else f"{x:.6g} {c.name}" for c, x in parts)
    chosen = "".join(f", {name}={value!r}" for name, value in sorted(options.items()))
    return f"{backend} {matter}{chosen}"


def _frozen(value: Any) -> Hashable:
    if isinstance(value, Mapping):
        return tuple(sorted((str(name), _frozen(entry)) for name, entry in value.items()))
    if isinstance(value, list | tuple | set | frozenset):
        return tuple(_frozen(entry) for entry in value)
    try:
        hash(value)
    except TypeError:
        return repr(value)
    return value if isinstance(value, str | int | float | bool | type(None)) else repr(value)


def _reopen(spec: FluidSpec, backend: str, options: dict[str, Any], floor: float) -> Fluid:
    fluid = Fluid(spec, backend=backend, **options)
    if floor:
        object.__setattr__(fluid, "_floor", floor)
        object.__setattr__(fluid, "_identity", (*fluid._identity, floor))
    return fluid
