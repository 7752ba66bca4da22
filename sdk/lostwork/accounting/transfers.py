"""Heat and work across a boundary, positive into the system."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, TypeAlias

import numpy as np
import pint

from lostwork.properties.backend import Column
from lostwork.quantities import ENERGY, POWER, TEMPERATURE, quantity, to_si, to_si_any

__all__ = ["Heat", "Work"]

Quantity: TypeAlias = "pint.Quantity[Any]"


@dataclass(frozen=True, slots=True, init=False, eq=False)
class Heat:
    """Heat across the boundary, positive into the system.

    Parameters
    ----------
    amount
        A power (steady) or an energy (transient); negative leaves.
    at
        Temperature of the boundary where it crosses; it decides how much of the entropy generated
        lies inside.
    name
        Where it comes from or goes to.
    """

    si: Column | None
    per_time: bool | None
    T: Column
    name: str

    def __init__(self, amount: Any, at: Any, name: str = "") -> None:
        number, per_time = _energy_si(amount, "heat")
        self._fill(number, per_time, to_si(at, TEMPERATURE, "at"), name)

    @classmethod
    def unknown(cls, at: Any, name: str = "") -> Heat:
        """Heat that the energy balance is to find."""
        return cls.from_si(None, to_si(at, TEMPERATURE, "at"), per_time=None, name=name)

    @classmethod
    def from_si(
        cls, amount: Column | None, T: Column, *, per_time: bool | None = True, name: str = ""
    ) -> Heat:
        """Make a heat from SI numbers: W (or J) and K; ``None`` for an unknown amount."""
        heat = object.__new__(cls)
        heat._fill(amount, per_time, T, name)
        return heat

    def _fill(self, si: Column | None, per_time: bool | None, T: Column, name: str) -> None:
        for field, value in (("si", si), ("per_time", per_time), ("T", T), ("name", name)):
            object.__setattr__(self, field, value)

    @property
    def amount(self) -> Quantity | None:
        """W or J; ``None`` while unknown."""
        return None if self.si is None else quantity(self.si, "W" if self.per_time else "J")

    @property
    def at(self) -> Quantity:
        """Boundary temperature, K."""
        return quantity(self.T, "K")

    @classmethod
    def __get_pydantic_core_schema__(cls, source: Any, handler: Any) -> Any:
        return _taken_as_it_is(cls)

    def __eq__(self, other: object) -> bool:
        if not isinstance(other, Heat):
            return NotImplemented
        return _identity(self.si, self.T, self.per_time, self.name) == _identity(
            other.si, other.T, other.per_time, other.name
        )

    def __hash__(self) -> int:
        return hash(_identity(self.si, self.T, self.per_time, self.name))


@dataclass(frozen=True, slots=True, init=False, eq=False)
class Work:
    """Work across the boundary (shaft, electric or by a moving boundary), positive into the system.

    Parameters
    ----------
    amount
        A power (steady) or an energy (transient); negative leaves.
    name
        What it drives or what drives it.
    """

    si: Column | None
    per_time: bool | None
    name: str

    def __init__(self, amount: Any, name: str = "") -> None:
        number, per_time = _energy_si(amount, "work")
        self._fill(number, per_time, name)

    @classmethod
    def unknown(cls, name: str = "") -> Work:
        """Work that the energy balance is to find."""
        return cls.from_si(None, per_time=None, name=name)

    @classmethod
    def from_si(
        cls, amount: Column | None, *, per_time: bool | None = True, name: str = ""
    ) -> Work:
        """Make a work from an SI number, W (or J); ``None`` for an unknown amount."""
        work = object.__new__(cls)
        work._fill(amount, per_time, name)
        return work

    def _fill(self, si: Column | None, per_time: bool | None, name: str) -> None:
        for field, value in (("si", si), ("per_time", per_time), ("name", name)):
            object.__setattr__(self, field, value)

    @property
    def amount(self) -> Quantity | None:
        """W or J; ``None`` while unknown."""
        return None if self.si is None else quantity(self.si, "W" if self.per_time else "J")

    @classmethod
    def __get_pydantic_core_schema__(cls, source: Any, handler: Any) -> Any:
        return _taken_as_it_is(cls)

    def __eq__(self, other: object) -> bool:
        if not isinstance(other, Work):
            return NotImplemented
        return _identity(self.si, self.per_time, self.name) == _identity(
            other.si, other.per_time, other.name
        )

    def __hash__(self) -> int:
        return hash(_identity(self.si, self.per_time, self.name))


def _taken_as_it_is(kind: type[Any]) -> Any:
    """Tell pydantic, which would build a dataclass anew from its fields, to take an instance."""
    from pydantic_core import core_schema  # noqa: PLC0415  only for who uses pydantic

    return core_schema.is_instance_schema(kind)


def _identity(*fields: Any) -> tuple[Any, ...]:
    """Give fields in a form that compares and hashes, arrays by their shape and numbers."""
    return tuple(
        (field.shape, field.tobytes()) if isinstance(field, np.ndarray) else field
        for field in fields
    )


def _energy_si(value: Any, field: str) -> tuple[Column, bool]:
    number, dimension = to_si_any(value, (POWER, ENERGY), field)
    return number, dimension is POWER
