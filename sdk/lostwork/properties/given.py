"""States handed in by a host program that has properties of its own."""

from __future__ import annotations

from collections.abc import Mapping
from types import MappingProxyType
from typing import Any

import numpy as np

from lostwork._shapes import common_shape
from lostwork.errors import StateNotFound
from lostwork.properties.backend import Column
from lostwork.properties.datum import Datum
from lostwork.quantities import (
    PRESSURE,
    SPECIFIC_ENERGY,
    SPECIFIC_ENTROPY,
    SPECIFIC_VOLUME,
    TEMPERATURE,
    to_si,
)

__all__ = ["GivenState"]


class GivenState:
    """h and s (and whatever else is known) handed in by a host program, without any backend.

    Parameters
    ----------
    h, s
        Specific enthalpy and entropy.
    T, p, v
        Optional; p and v are needed for a charge (`Content`), whose u follows from h, p and v.
    datum
        Name of the zero of h and s.  Only states of one datum are subtracted.
    label
        Name of the fluid, for messages.

    Raises
    ------
    QuantityError
        A value cannot be read.
    ShapesDiffer
        The arrays are of different lengths.
    """

    __slots__ = ("_datum", "_label", "_si")

    _si: _GivenSi
    _datum: Datum
    _label: str

    def __init__(
        self,
        *,
        h: Any,
        s: Any,
        T: Any = None,
        p: Any = None,
        v: Any = None,
        datum: str = "given",
        label: str = "given state",
    ) -> None:
        si = _GivenSi(
            h=to_si(h, SPECIFIC_ENERGY, "h"),
            s=to_si(s, SPECIFIC_ENTROPY, "s"),
            T=None if T is None else to_si(T, TEMPERATURE, "T"),
            p=None if p is None else to_si(p, PRESSURE, "p"),
            v=None if v is None else to_si(v, SPECIFIC_VOLUME, "v"),
            label=label,
        )
        self._fill(si, datum, label)

    @classmethod
    def from_si(
        cls,
        *,
        h: Column,
        s: Column,
        T: Column | None = None,
        p: Column | None = None,
        v: Column | None = None,
        datum: str = "given",
        label: str = "given state",
    ) -> GivenState:
        """Make a given state from SI numbers: J/kg, J/kg/K, K, Pa, m3/kg."""
        state = object.__new__(cls)
        state._fill(_GivenSi(h=h, s=s, T=T, p=p, v=v, label=label), datum, label)
        return state

    def _fill(self, si: _GivenSi, datum: str, label: str) -> None:
        put = object.__setattr__
        put(self, "_si", si)
        put(self, "_datum", Datum(datum))
        put(self, "_label", label)

    def __delattr__(self, name: str) -> None:
        raise AttributeError(f"a GivenState cannot be changed: {name}")

    def __setattr__(self, name: str, value: object) -> None:
        raise AttributeError(f"a GivenState cannot be changed: {name}")

    def __reduce__(self) -> tuple[Any, ...]:
        return _restored_given, (self._si, self._datum.label, self._label)

    @property
    def si(self) -> _GivenSi:
        """Columns in SI."""
        return self._si

    @property
    def datum(self) -> Datum:
        """Datum of h and s, by the name given."""
        return self._datum

    @property
    def label(self) -> str:
        """Name for messages."""
        return self._label

    @property
    def failed(self) -> Mapping[int, str]:
        """Nothing fails: values are given."""
        return _NONE_FAILED

    @property
    def shape(self) -> tuple[int, ...]:
        """Shape of the columns."""
        return self.si.shape

    def __repr__(self) -> str:
        return f"GivenState({self.label}: h = {self.si.h} J/kg, s = {self.si.s} J/kg/K)"


_NONE_FAILED: Mapping[int, str] = MappingProxyType({})


class _GivenSi:
    """Given columns; one that is missing says so when it is asked for."""

    __slots__ = ("_label", "_others", "h", "s", "shape")

    h: Column
    s: Column
    _others: Mapping[str, Column | None]

    def __init__(self, *, label: str, h: Column, s: Column, **others: Column | None) -> None:
        self.h = _fixed(h)
        self.s = _fixed(s)
        self._others = {name: _fixed(value) for name, value in others.items()}
        self._label = label
        self.shape = common_shape(label, [("h", h), ("s", s), *others.items()])

    def __reduce__(self) -> tuple[Any, ...]:
        return _restored_given_si, (self._label, self.h, self.s, self._others)

    def _value(self, name: str) -> Column:
        value = self._others[name]
        if value is None:
            raise StateNotFound(
                fluid=self._label, given="h and s", reason=f"{name} is needed here; give {name}="
            )
        return value

    @property
    def T(self) -> Column:
        return self._value("T")

    @property
    def p(self) -> Column:
        return self._value("p")

    @property
    def v(self) -> Column:
        return self._value("v")

    @property
    def u(self) -> Column:
        return self.h - self._value("p") * self._value("v")


def _fixed(value: Any) -> Any:
    """Give a float as it is, and an array as one that nobody writes to."""
    if isinstance(value, np.ndarray):
        value = value.copy()
        value.flags.writeable = False
    return value


def _restored_given_si(
    label: str, h: Column, s: Column, others: dict[str, Column | None]
) -> _GivenSi:
    return _GivenSi(label=label, h=h, s=s, **others)


def _restored_given(si: _GivenSi, datum: str, label: str) -> GivenState:
    state = object.__new__(GivenState)
    state._fill(si, datum, label)
    return state
