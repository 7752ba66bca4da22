"""The errors of lostwork: one class per cause, the facts kept as fields.

Every error is a `LostworkError` and also the builtin exception a caller would expect
(`ValueError`, `LookupError`, ...).  The message is built from the fields, so an error
survives pickling and a host program can read the fields instead of the text.
"""

from __future__ import annotations

from dataclasses import dataclass, field, fields
from typing import Any

__all__ = [
    "AmbiguousComponent",
    "ApiVersionMismatch",
    "AuditError",
    "BalanceError",
    "BalanceNotClosed",
    "CaseError",
    "CircularReference",
    "CompositionError",
    "DatumMismatch",
    "DescriptorError",
    "FieldError",
    "GaugePressure",
    "IllPosed",
    "InternalDisagreement",
    "LostworkError",
    "MissingExtra",
    "MissingUnit",
    "NotAbsolute",
    "NotFinite",
    "OutOfLimits",
    "PairRefused",
    "PathError",
    "PluginClash",
    "PluginError",
    "PluginFailed",
    "PluginNotFound",
    "ProcessError",
    "PropertyError",
    "QuantityError",
    "SecondLawViolation",
    "ShapesDiffer",
    "StateNotFound",
    "TemperatureKind",
    "UnknownComponent",
    "UnknownUnit",
    "WrongDimension",
]


def _rebuild(kind: type[LostworkError], values: dict[str, Any]) -> LostworkError:
    return kind(**values)


@dataclass(eq=False)
class LostworkError(Exception):
    """Root of every error that lostwork raises."""

    def __str__(self) -> str:
        return self.message

    def __repr__(self) -> str:
        return f"{type(self).__name__}({self.message!r})"

    def __reduce__(self) -> tuple[Any, ...]:
        return _rebuild, (type(self), {f.name: getattr(self, f.name) for f in fields(self)})

    @property
    def message(self) -> str:
        """What went wrong, what was expected and what to do."""
        return self.__class__.__doc__ or ""


def _sentence(*parts: str) -> str:
    return " ".join(part.rstrip(".") + "." for part in parts if part)


# --- quantities ---------------------------------------------------------------------


@dataclass(eq=False)
class QuantityError(LostworkError, ValueError):
    """A value at the unit boundary could not be taken over."""

    field: str
    value: str
    expected: str = ""
    example: str = ""
    hint: str = ""

    cause = "cannot be read"

    @property
    def message(self) -> str:
        expected = f"expected {self.expected}" if self.expected else ""
        if expected and self.example:
            expected += f", for example {self.example}"
        return _sentence(f"{self.field}: {self.value} {self.cause}", expected, self.hint)


class WrongDimension(QuantityError):
    """The unit is of another dimension than the field needs."""

    cause = "has the wrong dimension"


class MissingUnit(QuantityError):
    """A bare number was given where a unit is needed."""

    cause = "has no unit"


class UnknownUnit(QuantityError, LookupError):
    """The unit is not known, or the text is not a number followed by a unit."""

    cause = "is not a number followed by a known unit"


class NotFinite(QuantityError):
    """NaN or infinity was given."""

    cause = "is not a finite number"


class NotAbsolute(QuantityError):
    """The value is below the least that is possible (absolute zero, a vacuum, no volume)."""

    cause = "is below the least value that is physically possible"


class GaugePressure(QuantityError):
    """A gauge pressure was given where no barometer reading is known."""

    cause = "is a gauge pressure, and no barometer reading is known here"


class TemperatureKind(QuantityError):
    """A temperature difference was given for a temperature, or the other way round."""

    cause = "is the wrong kind of temperature"


@dataclass(eq=False)
class ShapesDiffer(LostworkError, ValueError):
    """Arrays that meet in one call cannot be rows of one table."""

    where: str
    shapes: tuple[tuple[str, tuple[int, ...]], ...]

    @property
    def message(self) -> str:
        told = ", ".join(f"{name} has {_rows(shape)}" for name, shape in self.shapes)
        return _sentence(
            f"{self.where}: lists of different lengths meet: {told}",
            "Expected one length for all of them, or single values",
        )


def _rows(shape: tuple[int, ...]) -> str:
    return str(shape[0]) if len(shape) == 1 else " x ".join(str(size) for size in shape)


# --- components and compositions ----------------------------------------------------


@dataclass(eq=False)
class UnknownComponent(LostworkError, LookupError):
    """No component of this name, CAS number or formula is known."""

    name: str
    nearest: tuple[str, ...] = ()
    instead: str = "Give a name, a CAS number or a formula"

    @property
    def message(self) -> str:
        near = f"nearest matches: {', '.join(self.nearest)}" if self.nearest else ""
        return _sentence(f"component {self.name!r} is not known", near, self.instead)


@dataclass(eq=False)
class AmbiguousComponent(LostworkError, LookupError):
    """The text names several components."""

    name: str
    candidates: tuple[str, ...]

    @property
    def message(self) -> str:
        return _sentence(
            f"component {self.name!r} may mean {', '.join(self.candidates)}",
            "Give one of these names or a CAS number",
        )


@dataclass(eq=False)
class CompositionError(LostworkError, ValueError):
    """A composition is empty, negative, not finite or does not sum to one."""

    composition: str
    reason: str

    @property
    def message(self) -> str:
        return _sentence(
            f"composition {self.composition}: {self.reason}",
            "Fractions are numbers from 0 to 1 and sum to 1 within 1e-6",
        )


# --- plugins ------------------------------------------------------------------------


class PluginError(LostworkError):
    """A plugin cannot be used."""


@dataclass(eq=False)
class PluginNotFound(PluginError, LookupError):
    """No plugin of this name and kind is installed."""

    kind: str
    name: str
    installed: tuple[str, ...] = ()
    failed: tuple[str, ...] = ()

    @property
    def message(self) -> str:
        known = ", ".join(self.installed) if self.installed else "none"
        mute = f"Not loaded, so what they offer is not known: {', '.join(self.failed)}"
        return _sentence(
            f"no {self.kind} is called {self.name!r}",
            f"Installed: {known}",
            mute if self.failed else "",
        )


@dataclass(eq=False)
class PluginClash(PluginError, LookupError):
    """Two plugins offer the same name, and the caller did not choose."""

    kind: str
    name: str
    choices: tuple[str, ...]

    @property
    def message(self) -> str:
        return _sentence(
            f"{self.kind} {self.name!r} is offered by more than one plugin",
            f"Choose with {' or '.join(self.choices)}",
        )


@dataclass(eq=False)
class PluginFailed(PluginError, ImportError):
    """A plugin is installed but could not be loaded or used."""

    plugin: str
    stage: str
    reason: str
    fix: str = ""

    @property
    def message(self) -> str:
        return _sentence(f"plugin {self.plugin!r} failed at {self.stage}: {self.reason}", self.fix)


@dataclass(eq=False)
class DescriptorError(PluginError, ValueError):
    """A field of a descriptor is malformed."""

    descriptor: str
    field: str
    value: str
    expected: str

    @property
    def message(self) -> str:
        return _sentence(
            f"descriptor {self.descriptor!r}, {self.field}: {self.value} is not {self.expected}"
        )


@dataclass(eq=False)
class MissingExtra(PluginError, ImportError):
    """A plugin needs a library that is not installed."""

    plugin: str
    library: str
    install: str

    @property
    def message(self) -> str:
        return _sentence(
            f"{self.plugin!r} needs the library {self.library!r}, which is not installed",
            f"Install it with: {self.install}",
        )


@dataclass(eq=False)
class ApiVersionMismatch(PluginError, ImportError):
    """A plugin was written for another version of the plugin interface."""

    plugin: str
    written_for: int
    current: int

    @property
    def message(self) -> str:
        advice = (
            "Upgrade lostwork"
            if self.written_for > self.current
            else "Ask its author for a newer release, or install an older lostwork"
        )
        return _sentence(
            f"plugin {self.plugin!r} was written for plugin interface {self.written_for}; "
            f"this lostwork has {self.current}",
            advice,
        )


# --- properties ---------------------------------------------------------------------


class PropertyError(LostworkError, ValueError):
    """A property or a state cannot be given."""


@dataclass(eq=False)
class PairRefused(PropertyError):
    """These properties do not fix a state, or the backend cannot solve for them."""

    given: tuple[str, ...]
    reason: str
    instead: str = ""

    @property
    def message(self) -> str:
        pair = " and ".join(self.given) if self.given else "nothing"
        return _sentence(f"a state cannot be fixed by {pair}: {self.reason}", self.instead)


@dataclass(eq=False)
class OutOfLimits(PropertyError):
    """The state lies outside the range for which the equation was made."""

    fluid: str
    reason: str

    @property
    def message(self) -> str:
        return _sentence(f"{self.fluid}: {self.reason}")


@dataclass(eq=False)
class StateNotFound(PropertyError):
    """No state of this fluid has these properties, or the equation did not give one."""

    fluid: str
    given: str
    reason: str

    @property
    def message(self) -> str:
        return _sentence(f"{self.fluid} at {self.given}: {self.reason}")


@dataclass(eq=False)
class DatumMismatch(PropertyError):
    """Enthalpies or entropies on different datums were about to be subtracted."""

    first: str
    second: str
    reason: str = ""

    @property
    def message(self) -> str:
        return _sentence(
            f"h and s of {self.first} and of {self.second} are not on one datum",
            self.reason,
            "Compute both with one backend, or with backends aligned on the common datum",
        )


# --- accounting ---------------------------------------------------------------------


class BalanceError(LostworkError, ValueError):
    """A balance is ill-posed, does not close or breaks the second law."""


@dataclass(eq=False)
class BalanceNotClosed(BalanceError):
    """Mass, elements or energy do not close, so nothing is said of the second law."""

    balance: str
    reason: str

    @property
    def message(self) -> str:
        return _sentence(
            f"{self.balance} does not close: {self.reason}",
            "Correct the data, leave one heat, work or rate unknown, or state a wider closing=",
        )


@dataclass(eq=False)
class SecondLawViolation(BalanceError):
    """The step would destroy entropy: it is impossible as described."""

    balance: str
    reason: str

    @property
    def message(self) -> str:
        return _sentence(f"{self.balance} is impossible: {self.reason}")


@dataclass(eq=False)
class IllPosed(BalanceError):
    """The balance has the wrong unknowns or mixes rates with totals."""

    balance: str
    reason: str

    @property
    def message(self) -> str:
        return _sentence(f"{self.balance}: {self.reason}")


@dataclass(eq=False)
class InternalDisagreement(LostworkError, ArithmeticError):
    """The two independent routes to one figure disagree: a defect of lostwork or of a plugin."""

    what: str
    first: str
    second: str

    @property
    def message(self) -> str:
        return _sentence(
            f"{self.what}: two routes disagree, {self.first} against {self.second}",
            "This is a defect of lostwork or of a plugin; please report it with the input",
        )


@dataclass(eq=False)
class PathError(LostworkError, ValueError):
    """A path cannot be followed as described."""

    reason: str

    @property
    def message(self) -> str:
        return _sentence(self.reason)


@dataclass(eq=False)
class AuditError(LostworkError, ValueError):
    """Balances that cannot be audited together."""

    reason: str

    @property
    def message(self) -> str:
        return _sentence(self.reason)


# --- processes and cases ------------------------------------------------------------


@dataclass(eq=False)
class ProcessError(LostworkError, ValueError):
    """A process cannot run as described."""

    process: str
    reason: str

    @property
    def message(self) -> str:
        return _sentence(f"{self.process}: {self.reason}")


@dataclass(eq=False)
class FieldError(LostworkError, ValueError):
    """Fields of a process are missing, unknown or wrong; one line each."""

    process: str
    problems: tuple[tuple[str, str], ...]

    @property
    def message(self) -> str:
        return "\n".join(f"{self.process}, {name}: {text}" for name, text in self.problems)


@dataclass(eq=False)
class CaseError(LostworkError, ValueError):
    """A case file is wrong; says file, table, field and what was expected."""

    file: str
    problems: tuple[tuple[str, str, str], ...] = field(default=())

    @property
    def message(self) -> str:
        return "\n".join(
            f"{self.file}: [{table}] {name}: {text}"
            if name
            else f"{self.file}: [{table}] {text}"
            if table
            else f"{self.file}: {text}"
            for table, name, text in self.problems
        )


@dataclass(eq=False)
class CircularReference(CaseError):
    """Steps of a case feed each other in a circle."""

    circle: tuple[str, ...] = ()

    @property
    def message(self) -> str:
        return _sentence(
            f"{self.file}: steps feed each other in a circle: {' -> '.join(self.circle)}",
            "State one of the streams in this circle under [streams]",
        )
