"""The layout of a case file: its tables and what each field takes.

```toml
[case]
title = "Compressed-air station"
backend = "coolprop"

[surroundings]
T = "15 degC"
p = "1.013 bar"

[fluids.air]
components = "air"

[streams.suction]
fluid = "air"
T = "20 degC"
p = "1 bar"
rate = "2 kg/s"

[steps.compressor]
type = "compression"
inlet = "suction"
p_out = "7 barg"
isentropic_efficiency = 0.78
```

Quantities stay as written here; they are read where the state or the step is made.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Annotated, Any, Literal

from pydantic import (
    AfterValidator,
    BaseModel,
    BeforeValidator,
    ConfigDict,
    Field,
    ValidationError,
    ValidationInfo,
)

from lostwork.cases.problems import Problems, nearest
from lostwork.errors import CaseError, CompositionError, FieldError, QuantityError

__all__ = [
    "PROPERTIES",
    "CaseTable",
    "ChargeTable",
    "FluidTable",
    "Layout",
    "StreamTable",
    "read_layout",
]

PROPERTIES = ("T", "p", "v", "rho", "h", "s", "u", "quality")
"""Properties by two of which a state is given."""

_OWN_WORDS = ("self", "fluid", "backend", "basis")
_EXPECTED = {
    "string_type": "expected text in quotes",
    "bool_type": "expected true or false",
    "dict_type": "expected a table",
    "model_type": "expected a table",
    "model_attributes_type": "expected a table",
    "list_type": "expected a list",
}
_NEEDED_TABLES = {
    "surroundings": 'expected the temperature and pressure outside, for example T = "15 degC" and '
    'p = "1.013 bar"',
    "fluids": "expected a table [fluids.NAME] for each fluid",
    "steps": "expected a table [steps.NAME] for each step, at least one",
}


def _quantity_text(value: Any, info: ValidationInfo) -> Any:
    if _is_number_or_text(value):
        return value
    raise QuantityError(
        field=info.field_name or "field",
        value=f"{value!r:.60}",
        expected="a text of a number and a unit, or a list of these",
        example='"20 degC"',
    )


def _is_number_or_text(value: Any) -> bool:
    if isinstance(value, list):
        return bool(value) and all(_is_number_or_text(entry) for entry in value)
    return isinstance(value, str | int | float) and not isinstance(value, bool)


def _one_line(text: str, info: ValidationInfo) -> str:
    if text.isprintable():
        return text
    raise _bad_text(info, text, "one line of printable text")


def _printable(text: str, info: ValidationInfo) -> str:
    # A case comes from anywhere; what it says must not steer the terminal.
    if all(character.isprintable() or character in "\n\t" for character in text):
        return text
    raise _bad_text(info, text, "printable text")


def _bad_text(info: ValidationInfo, text: str, expected: str) -> FieldError:
    name = info.field_name or "field"
    return FieldError(process="case", problems=((name, f"expected {expected}, got {text!r:.60}"),))


def _composition(value: Any) -> Any:
    if isinstance(value, str) and value.strip():
        return value
    if not isinstance(value, dict) or not value:
        raise CompositionError(
            composition=f"{value!r:.60}",
            reason='expected a name such as "air", or a table such as '
            "{nitrogen = 0.78, oxygen = 0.22}",
        )
    for name, fraction in value.items():
        if isinstance(fraction, bool) or not isinstance(fraction, int | float):
            raise CompositionError(
                composition=f"{value!r:.120}", reason=f"the fraction of {name!r} is no number"
            )
    return value


def _options(value: Any) -> Any:
    if isinstance(value, dict):
        inner = [entry for entry in value.values() if isinstance(entry, dict)]
        for options in (value, *inner):
            for word in _OWN_WORDS:
                if word in options and not isinstance(options[word], dict):
                    text = f"{word!r} is no option of a backend; expected it outside of options"
                    raise FieldError(process="fluid", problems=(("options", text),))
    return value


Given = Annotated[Any, BeforeValidator(_quantity_text)]
Line = Annotated[str, AfterValidator(_one_line)]
Text = Annotated[str, AfterValidator(_printable)]


class _Table(BaseModel):
    model_config = ConfigDict(frozen=True, extra="forbid", strict=True)


class CaseTable(_Table):
    """``[case]``: what the case is, and what holds where a table says nothing else."""

    title: Line = ""
    note: Text = ""
    backend: Line | None = None
    """Of every fluid that names none."""
    closing: Given = None
    """Error of the instruments, for every step that takes one and states none."""
    agreement: Given = None
    """Fraction within which a stated stream and the outlet that it closes a loop with agree."""


class SurroundingsTable(_Table):
    """``[surroundings]``: T0 and p0; p0 is also the barometer for gauge pressures."""

    T: Given
    p: Given


class FluidTable(_Table):
    """``[fluids.NAME]``.

    An option that is a table holds options for the backend of that name and is left out under
    every other backend.  Plain options are for the backend that the file itself states.
    `instead_of` names, for a backend that cannot model this fluid, the one to take instead.
    """

    components: Annotated[Any, BeforeValidator(_composition)]
    basis: Literal["amount", "mass"] = "amount"
    backend: Line | None = None
    options: Annotated[dict[str, Any], BeforeValidator(_options)] = Field(default_factory=dict)
    instead_of: dict[str, str] = Field(default_factory=dict)
    note: Text = ""


class _MatterTable(_Table):
    fluid: Line
    T: Given = None
    p: Given = None
    v: Given = None
    rho: Given = None
    h: Given = None
    s: Given = None
    u: Given = None
    quality: Given = None
    zero: Literal["common", "backend"] = "common"
    velocity: Given = None
    elevation: Given = None
    note: Text = ""

    @property
    def properties(self) -> dict[str, Any]:
        """The properties given, as written."""
        given = {name: getattr(self, name) for name in PROPERTIES}
        return {name: value for name, value in given.items() if value is not None}


class StreamTable(_MatterTable):
    """``[streams.NAME]``: a fluid, two properties, and a rate (or a mass, for a batch).

    A loop is cut at a stream whose state is stated; `closes` names the outlet that is this stream
    come back, and the audit compares the two.
    """

    closes: Line | None = None

    rate: Given = None
    mass: Given = None


class ChargeTable(_MatterTable):
    """``[charges.NAME]``: a fluid, two properties, and how much of it stands inside."""

    mass: Given = None
    amount: Given = None
    volume: Given = None


class Layout(_Table):
    """A whole case file; steps are checked against their process types afterwards."""

    case: CaseTable = Field(default_factory=CaseTable)
    surroundings: SurroundingsTable
    fluids: dict[str, FluidTable] = Field(default_factory=dict)
    streams: dict[str, StreamTable] = Field(default_factory=dict)
    charges: dict[str, ChargeTable] = Field(default_factory=dict)
    steps: dict[str, dict[str, Any]] = Field(min_length=1)


_GROUPS = ("fluids", "streams", "charges", "steps")
_TABLES: dict[str, type[BaseModel]] = {
    "case": CaseTable,
    "surroundings": SurroundingsTable,
    "fluids": FluidTable,
    "streams": StreamTable,
    "charges": ChargeTable,
}
_EXPECTED_NAME = (
    "expected a name that begins with a letter or a digit, is printable, has no dot and at most "
    "120 characters"
)
_EXAMPLES = {
    "T": 'a temperature, for example "15 degC"',
    "p": 'an absolute pressure, for example "1.013 bar"',
    "components": 'a name such as "air", or a table of fractions',
    "fluid": "the name of a fluid from [fluids]",
}


def read_layout(tables: Mapping[str, Any], file: str) -> Layout:
    """Check the tables of a case.

    Raises
    ------
    CaseError
        Lists every table, field or name that is wrong.
    """
    try:
        layout = Layout.model_validate(dict(tables))
    except ValidationError as error:
        found = tuple(_in_our_words(entry) for entry in error.errors())
        raise CaseError(file=file, problems=found) from error
    problems = Problems(file)
    _check_names(layout, problems)
    problems.require_none()
    return layout


def _in_our_words(entry: Any) -> tuple[str, str, str]:
    """Give table, field and text of what pydantic found."""
    place = [str(part) for part in entry["loc"]]
    kind = entry["type"]
    if kind == "extra_forbidden":
        return _not_known(place)
    if kind in ("missing", "too_short") and len(place) == 1:
        said = "is empty" if kind == "too_short" else "is missing"
        return place[0], "", f"this table {said}; {_NEEDED_TABLES[place[0]]}"
    table, field = _table_and_field(place)
    return table, field, _said_of(entry, field)


def _said_of(entry: Any, field: str) -> str:
    kind, context = entry["type"], entry.get("ctx", {})
    cause, got = context.get("error"), f"got {entry['input']!r:.60}"
    if isinstance(cause, FieldError):
        return cause.problems[0][1]
    if cause is not None:
        return str(cause).removeprefix(f"{field}: ")
    if kind == "missing":
        return f"is missing; expected {_EXAMPLES.get(field, 'a value')}"
    if kind == "literal_error":
        return f"expected {context['expected']}, {got}"
    return f"{_EXPECTED.get(kind, entry['msg'])}, {got}"


def _table_and_field(place: list[str]) -> tuple[str, str]:
    depth = 2 if place[0] in _GROUPS else 1
    return ".".join(place[:depth]), ".".join(place[depth:])


def _not_known(place: list[str]) -> tuple[str, str, str]:
    *table, field = place
    if not table:
        tables = ", ".join(f"[{name}]" for name in Layout.model_fields)
        return "", "", f"{field!r} is no table of a case; expected {tables}"
    known = _TABLES[table[0]].model_fields
    return ".".join(table), field, f"is no field of this table; {nearest(field, known)}"


def _check_names(layout: Layout, problems: Problems) -> None:
    """Streams, charges and steps share one name space; a reference must mean one thing."""
    seen: dict[str, str] = {}
    for group in ("fluids", "streams", "charges", "steps"):
        for name in getattr(layout, group):
            table = f"{group}.{name}"
            if not _is_name(name):
                shown = "".join(c if c.isprintable() else "?" for c in name)
                problems.add(f"{group}.{shown:.60}", "", _EXPECTED_NAME)
            if group == "fluids":
                continue
            if name in seen:
                problems.add(
                    table,
                    "",
                    f"the name is taken by [{seen[name]}.{name}]; expected a name of its own, "
                    "since streams, charges and steps are referred to by name alone",
                )
            seen.setdefault(name, group)


def _is_name(name: str) -> bool:
    # A name goes into tables and spreadsheets, where "=" or "-" in front would be a formula.
    legal = name.isprintable() and name == name.strip() and "." not in name and len(name) <= 120
    return legal and (name[:1].isalnum() or name[:1] == "_")
