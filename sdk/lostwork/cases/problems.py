"""Collecting what is wrong with a case, so that several mistakes are told at once."""

from __future__ import annotations

import difflib
import re
from collections.abc import Iterable, Mapping
from types import MappingProxyType

from lostwork.errors import (
    AmbiguousComponent,
    CaseError,
    CompositionError,
    FieldError,
    IllPosed,
    InternalDisagreement,
    LostworkError,
    OutOfLimits,
    PairRefused,
    PluginError,
    PluginNotFound,
    ProcessError,
    QuantityError,
    UnknownComponent,
)

__all__ = ["Problems", "nearest"]


class Problems:
    """The problems found in one case file, each with its table and field."""

    def __init__(self, file: str) -> None:
        self.file = file
        self._found: list[tuple[str, str, str]] = []
        self._cause: LostworkError | None = None

    def __len__(self) -> int:
        return len(self._found)

    def add(self, table: str, field: str, text: str) -> None:
        """Keep a problem found by the case itself."""
        self._found.append((table, field, text))

    def wrap(
        self,
        table: str,
        error: LostworkError,
        *,
        fields: Iterable[str] = (),
        field: str = "",
        renamed: Mapping[str, str] = MappingProxyType({}),
    ) -> None:
        """Keep an error raised by what a table describes.

        Parameters
        ----------
        table
            The table at fault.
        error
            The first one becomes the cause of the `CaseError`.
        fields
            Fields of the table; one that the message names is taken for the field at fault.
        field
            The field at fault where the error itself does not say.
        renamed
            Fields that the error knows by another name than the table does.

        Raises
        ------
        InternalDisagreement
            `error` is one: a defect, which no change of the case mends.
        """
        if isinstance(error, InternalDisagreement):
            raise error
        if self._cause is None:
            self._cause = error
        for named, text in _told(error, tuple(fields)):
            self.add(table, renamed.get(named, named) or field, text)

    def require_none(self) -> None:
        """Raise what was found.

        Raises
        ------
        CaseError
            Anything was found; chained to the first error that was wrapped.
        """
        if self._found:
            raise self.error() from self._cause

    def error(self) -> CaseError:
        """Give the error that lists what was found."""
        return CaseError(file=self.file, problems=tuple(self._found))


def nearest(name: str, known: Iterable[str]) -> str:
    """Say which known names are meant perhaps, or which there are."""
    known = sorted(known)
    if not known:
        return "none is defined"
    meant = _meant(name, known)
    if meant:
        return meant
    listed = ", ".join(repr(entry) for entry in known[:12])
    return f"expected one of {listed}" + (" ..." if len(known) > 12 else "")


def _meant(name: str, known: Iterable[str]) -> str:
    close = difflib.get_close_matches(name, list(known), n=3, cutoff=0.6)
    return f"perhaps {' or '.join(repr(entry) for entry in close)} is meant" if close else ""


def _told(error: LostworkError, fields: tuple[str, ...]) -> list[tuple[str, str]]:
    """Give field and text of every problem in an error."""
    text = error.message
    match error:
        case FieldError():
            return list(error.problems)
        case QuantityError():
            return [(error.field, text.removeprefix(f"{error.field}: "))]
        case PluginNotFound():
            meant = _meant(error.name, error.installed)
            return [(_field_at_fault(error, fields), f"{text} {meant}".strip())]
        case PairRefused():
            return [(" and ".join(error.given), text)]
        case _:
            return [(_field_at_fault(error, fields), _without_name(error))]


def _field_at_fault(error: LostworkError, fields: tuple[str, ...]) -> str:
    match error:
        case ProcessError():
            return _field_named_in(error.reason, fields)
        case IllPosed():
            return error.balance if error.balance in fields else ""
        case OutOfLimits():
            return error.fluid if error.fluid in fields else ""
        case UnknownComponent() | AmbiguousComponent() | CompositionError():
            return "components" if "components" in fields else ""
        case PluginError():
            return "backend" if "backend" in fields else ""
        case _:
            return ""


def _without_name(error: LostworkError) -> str:
    """Give the message without the name of the step or stream, which the table says already."""
    named = isinstance(error, ProcessError | IllPosed | OutOfLimits)
    return str(getattr(error, "reason", "")) if named else error.message


def _field_named_in(text: str, fields: tuple[str, ...]) -> str:
    """Give the field that a message names; one with an underscore is no word of plain text."""
    named = [field for field in fields if re.search(rf"\b{re.escape(field)}\b", text)]
    return min(named, key=lambda field: ("_" not in field, text.index(field)), default="")
