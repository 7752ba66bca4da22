"""What a unit means in one pint registry: scale, offset and dimension, read once.

A registry is only asked, never told: prefixes are resolved here, because a registry notes down
every prefixed unit it is asked for among its definitions.  A unit is read once per registry; a
definition that the host changes after its first use is not seen.
"""

from __future__ import annotations

import math
import threading
from collections import OrderedDict
from collections.abc import Callable, Iterable
from dataclasses import dataclass, replace
from enum import Enum
from typing import Any, Final

import pint
from pint.facets.plain import PlainQuantity
from pint.registry import ApplicationRegistry

from lostwork._dimensions import Signature, signature_of
from lostwork._trade_units import MEANT, OURS, nearest, pressure_scale
from lostwork._units import parse_unit, shortened
from lostwork.errors import QuantityError, UnknownUnit, WrongDimension

__all__ = ["Book", "Kind", "Reading", "application_book", "book_of"]

Registry = pint.UnitRegistry[Any]


class Kind(Enum):
    """On which scale a unit counts."""

    PLAIN = "plain"
    POINT = "point"  # from a zero of its own: degC
    DIFFERENCE = "difference"  # delta_degC
    GAUGE = "gauge"  # from the pressure of the surrounding air


@dataclass(frozen=True, slots=True)
class Reading:
    """A unit as one registry reads it: SI value = number * scale + offset."""

    signature: Signature
    scale: float
    offset: float
    kind: Kind
    container: Any
    factor: float
    names: tuple[str, ...]


_PREFIXES: Final[dict[str, float]] = {
    name: 10.0**power
    for name, power in {
        "yotta": 24,
        "zetta": 21,
        "exa": 18,
        "peta": 15,
        "tera": 12,
        "giga": 9,
        "mega": 6,
        "kilo": 3,
        "hecto": 2,
        "deca": 1,
        "deci": -1,
        "centi": -2,
        "milli": -3,
        "micro": -6,
        "nano": -9,
        "pico": -12,
        "femto": -15,
        "atto": -18,
        "zepto": -21,
        "yocto": -24,
    }.items()
}
_BASE: Final[dict[str, str]] = {
    "[mass]": "kilogram",
    "[length]": "meter",
    "[time]": "second",
    "[temperature]": "kelvin",
    "[substance]": "mole",
    "[current]": "ampere",
    "[luminosity]": "candela",
}
_AMBIGUOUS: Final = ("MBtu", "MBTU", "Mbtu")
_GAS_VOLUMES: Final = ("Nm", "Sm")
_MOST_READINGS: Final = 4096
_MOST_REGISTRIES: Final = 16


class Book:
    """The readings of one registry, which is kept alive as long as its book is."""

    def __init__(self, registry: Registry) -> None:
        self.registry = registry
        self.quantity: Callable[[Any, Any], pint.Quantity[Any]] = registry.Quantity
        self.numbers: dict[Any, float] = {}
        self._texts: dict[str, Reading] = {}
        self.containers: dict[Any, Reading] = {}
        self._lock = threading.RLock()

    def text(self, unit: str) -> Reading:
        """Read a unit given in words.

        Raises
        ------
        UnknownUnit
            A name is not known to the registry nor here, or the text is no product of names.
        """
        reading = self._texts.get(unit)
        return reading if reading is not None else self._noted(self._texts, unit, self._read_text)

    def container(self, units: Any) -> Reading:
        """Read the units of a quantity of this registry.

        Raises
        ------
        UnknownUnit
            A unit is not of this registry, or counts on a logarithmic scale.
        """
        reading = self.containers.get(units)
        if reading is not None:
            return reading
        return self._noted(self.containers, units, self._read_container)

    def remember(self, key: Any, number: float) -> None:
        """Keep the SI value of a text that was read, within bounds."""
        if len(self.numbers) >= _MOST_READINGS:
            self.numbers.clear()
        self.numbers[key] = number

    def _noted(
        self, notes: dict[Any, Reading], key: Any, read: Callable[[Any], Reading]
    ) -> Reading:
        with self._lock:
            try:
                reading = read(key)
            except QuantityError:
                raise
            # pint's errors are AttributeError, TypeError, ValueError and more; a unit that its
            # own registry cannot read, for whatever cause, is not known to us.
            except Exception as cause:
                raise UnknownUnit(field="", value=shortened(str(key)), hint=str(cause)) from cause
            if len(notes) >= _MOST_READINGS:
                notes.clear()
            notes[key] = reading
            return reading

    def _read_text(self, unit: str) -> Reading:
        scale = pressure_scale(unit)
        if scale is not None and not (scale[1] is False and self._defines(unit)):
            base, gauge = scale
            plain = self.text(base)
            kind = Kind.GAUGE if gauge else Kind.PLAIN
            return replace(plain, kind=kind, names=(unit,))
        names: list[str] = []
        factor = 1.0
        powers: dict[str, int] = {}
        for name, exponent in parse_unit(unit):
            names.append(name)
            share, resolved = self._resolve(name, exponent, unit)
            factor *= share
            for canonical, power in resolved:
                powers[canonical] = powers.get(canonical, 0) + power
        return self._measure(((n, p) for n, p in powers.items() if p), factor, tuple(names))

    def _read_container(self, units: Any) -> Reading:
        items = [(str(name), power) for name, power in units.items()]
        reading = self._measure(items, 1.0, tuple(name for name, _ in items))
        scale = pressure_scale(reading.names[0]) if len(items) == 1 else None
        if scale is not None and scale[1] and reading.offset == 0.0 and items[0][1] == 1:
            # A host that defines "barg = bar" has lost the barometer: not an absolute pressure.
            return replace(reading, kind=Kind.GAUGE)
        return reading

    def _defines(self, name: str) -> bool:
        return any(not prefix for prefix, _, _ in self.registry.parse_unit_name(name))

    def _resolve(self, name: str, exponent: int, unit: str) -> tuple[float, list[tuple[str, int]]]:
        """Factor and canonical names of one name; names a registry has itself go before ours."""
        if name in _GAS_VOLUMES and abs(exponent) == 3:
            name, exponent = f"{name}3", exponent // 3
        if name in _AMBIGUOUS:
            raise UnknownUnit(field="", value=repr(unit), hint=MEANT["MBtu"])
        ours = OURS.get(name)
        if ours is not None and not self._defines(name):
            factor, parts = ours
            return factor**exponent, [
                (self._canonical(part) or part, power * exponent) for part, power in parts
            ]
        canonical = self._canonical(name)
        if canonical is not None:
            return 1.0, [(canonical, exponent)] if canonical else []
        stem = name.rstrip("0123456789")
        if len(name) - len(stem) == 1 and stem and exponent in (1, -1):
            return self._resolve(stem, exponent * int(name[-1]), unit)
        if pressure_scale(name) is not None:
            hint = f"{name} stands alone; in a product write the plain pressure unit"
        else:
            near = nearest(name)
            hint = f"Nearest: {', '.join(near)}" if near else ""
        known = f"{name!r} is not a unit known here"
        raise UnknownUnit(field="", value=repr(unit), hint=f"{known}. {hint}" if hint else known)

    def _canonical(self, name: str) -> str | None:
        if name == "dimensionless":
            return ""
        candidates = self.registry.parse_unit_name(name)
        return f"{candidates[0][0]}{candidates[0][1]}" if candidates else None

    def _delta(self, name: str) -> str | None:
        # A registry defines a delta unit beside each unit with a zero of its own, and only there.
        found = self.registry.parse_unit_name(f"delta_{name}")
        return f"delta_{name}" if any(not prefix for prefix, _, _ in found) else None

    def _measure(
        self, items: Iterable[tuple[str, Any]], factor: float, names: tuple[str, ...]
    ) -> Reading:
        parts = list(items)
        alone = len(parts) == 1 and parts[0][1] == 1
        make = self.registry.UnitsContainer
        spans = {self._delta(name) or name: power for name, power in parts}
        signature = signature_of(
            dict(self.registry.get_dimensionality(make(self._unprefixed(spans)[1])))
        )
        if any(base not in _BASE for base, _ in signature):
            # No field takes such a dimension, so the scale is never asked for.
            return Reading(signature, math.nan, 0.0, Kind.PLAIN, make(spans), factor, names)
        si = make({_BASE[base]: _whole(power) for base, power in signature})
        prefix, bare = self._unprefixed(spans)
        scale = prefix * float(self.registry.convert(1, make(bare), si)) * factor
        kind, offset, container = Kind.PLAIN, 0.0, make(spans)
        if alone:
            container = make(dict(parts))
            if self._delta(parts[0][0]):
                kind, offset = Kind.POINT, float(self.registry.convert(0, container, si))
            elif parts[0][0].startswith("delta_"):
                kind = Kind.DIFFERENCE
            bare_container = container if kind is Kind.POINT else make(bare)
            seven = float(self.registry.convert(7, bare_container, si)) * prefix * factor
            if not math.isclose(seven, 7 * scale + offset, rel_tol=1e-9):
                hint = "Logarithmic units are not taken; give the value itself"
                raise WrongDimension(field="", value=repr(parts[0][0]), hint=hint)
        return Reading(signature, scale, offset, kind, container, factor, names)

    def _unprefixed(self, powers: dict[str, Any]) -> tuple[float, dict[str, Any]]:
        scale = 1.0
        bare: dict[str, Any] = {}
        for name, power in powers.items():
            found = self.registry.parse_unit_name(name)
            prefix, unit = (found[0][0], found[0][1]) if found else ("", name)
            if prefix in _PREFIXES:
                scale *= _PREFIXES[prefix] ** float(power)
            else:
                unit = f"{prefix}{unit}"
            bare[unit] = bare.get(unit, 0) + power
        return scale, {unit: power for unit, power in bare.items() if power}


def _whole(power: float) -> float:
    return int(power) if power == int(power) else power


_APPLICATION: Final[ApplicationRegistry] = pint.application_registry
_books: OrderedDict[int, Book] = OrderedDict()
_books_lock = threading.Lock()
_current: Book | None = None


def _book(registry: Registry) -> Book:
    with _books_lock:
        # The book holds its registry, so an id in use cannot be taken by another one.
        book = _books.get(id(registry))
        if book is None:
            book = _books[id(registry)] = Book(registry)
            while len(_books) > _MOST_REGISTRIES:
                _books.popitem(last=False)
        _books.move_to_end(id(registry))
        return book


def application_book() -> Book:
    """Give the book of the application registry, which a host may swap at any time."""
    global _current  # noqa: PLW0603  one word, written whole: the last book used
    registry = _APPLICATION.get()  # type: ignore[no-untyped-call]
    book = _current
    if book is None or book.registry is not registry:
        book = _current = _book(registry)
    return book


def book_of(quantity: PlainQuantity[Any]) -> Book:
    """Give the book of the registry that a quantity belongs to."""
    registry = quantity._REGISTRY
    if isinstance(registry, ApplicationRegistry):
        registry = registry.get()
    book = _current
    return book if book is not None and book.registry is registry else _book(registry)
