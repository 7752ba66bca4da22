"""Heat and work of a step as a case writes them: a text, or a table with an amount."""

from __future__ import annotations

from typing import Any

from lostwork.accounting.transfers import Heat, Work
from lostwork.errors import QuantityError

__all__ = ["heat_of", "work_of"]

_UNKNOWN = "unknown"
_HEAT = '{amount = "-30 kW", at = "80 degC"}'
_WORK = '"150 kW" or {amount = "150 kW", name = "motor"}'


def heat_of(value: Any, field: str) -> Heat:
    """Read a heat: a table of an amount (or "unknown"), the boundary temperature and a name.

    Raises
    ------
    QuantityError
        It is no such table, or a value cannot be read.
    """
    table = _table(value, field, ("amount", "at", "name"), "a table of a heat", _HEAT)
    if "at" not in table:
        raise QuantityError(
            field=f"{field}.at",
            value="nothing",
            expected="the temperature of the boundary where the heat crosses",
            example='at = "80 degC"',
        )
    name = _name(table, field)
    try:
        if table.get("amount", _UNKNOWN) == _UNKNOWN:
            return Heat.unknown(table["at"], name)
        return Heat(table["amount"], table["at"], name)
    except QuantityError as error:
        raise _placed(error, field, "heat") from error


def work_of(value: Any, field: str) -> Work:
    """Read a work: a power or an energy, "unknown", or a table of an amount and a name.

    Raises
    ------
    QuantityError
        It is none of these, or cannot be read.
    """
    table = (
        _table(value, field, ("amount", "name"), "a table of a work", _WORK)
        if isinstance(value, dict)
        else {"amount": value}
    )
    name = _name(table, field)
    try:
        if table.get("amount", _UNKNOWN) == _UNKNOWN:
            return Work.unknown(name)
        return Work(table["amount"], name)
    except QuantityError as error:
        raise _placed(error, field, "work") from error


def _table(
    value: Any, field: str, known: tuple[str, ...], expected: str, example: str
) -> dict[str, Any]:
    if not isinstance(value, dict):
        raise QuantityError(field=field, value=f"{value!r:.60}", expected=expected, example=example)
    unknown = [key for key in value if key not in known]
    if unknown:
        raise QuantityError(
            field=f"{field}.{unknown[0]}",
            value=f"{value[unknown[0]]!r:.60}",
            expected=f"only {', '.join(known)}",
            example=example,
        )
    return value


def _name(table: dict[str, Any], field: str) -> str:
    name = table.get("name", "")
    if not isinstance(name, str) or not name.isprintable():
        raise QuantityError(
            field=f"{field}.name", value=f"{name!r:.60}", expected="one line of printable text"
        )
    return name


def _placed(error: QuantityError, field: str, word: str) -> QuantityError:
    """Give the same error under the name of the field in the case."""
    part = error.field.replace(word, "amount", 1) if error.field.startswith(word) else error.field
    return type(error)(
        field=f"{field}.{part}",
        value=error.value,
        expected=error.expected,
        example=error.example,
        hint=error.hint,
    )
