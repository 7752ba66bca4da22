"""A case file as text: untrusted input, read within bounds.

Only TOML is read; nothing in it is ever evaluated.  Size and depth are bounded before anything
looks at the content.
"""

from __future__ import annotations

import re
import tomllib
from pathlib import Path
from typing import Any

from lostwork.errors import CaseError

__all__ = ["LARGEST", "read_text", "tables"]

LARGEST = 1_000_000
"""Bytes; a case is a page or two, and a long table of measurements still fits."""

_DEEPEST = 8
# The reader of the standard library takes time and memory that grow with the square of the parts
# of a dotted key, so a long one is refused before it sees the text.
_LONG_KEY = re.compile(
    r"""(?:\.[ \t]*(?:[\w-]+|"(?:[^"\\\n]|\\.)*"|'[^'\n]*')[ \t]*){9}""",
)


def read_text(path: str | Path) -> str:
    """Read a case file.

    Raises
    ------
    CaseError
        The file is missing, a directory, not readable, too large or not UTF-8.
    """
    name = str(path)
    try:
        with Path(path).open("rb") as file:
            raw = file.read(LARGEST + 1)
    except FileNotFoundError as error:
        raise _whole(
            name, "there is no such file; expected the path of a TOML case file"
        ) from error
    except IsADirectoryError as error:
        raise _whole(name, "is a directory; expected the path of a TOML case file") from error
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or error
        raise _whole(name, f"cannot be read ({reason}); expected a TOML case file") from error
    if len(raw) > LARGEST:
        raise _whole(name, f"is larger than {LARGEST} bytes; expected a TOML case file below that")
    try:
        return raw.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = raw[: error.start].count(b"\n") + 1
        raise _whole(name, f"is not UTF-8 text (line {line}); expected TOML, in UTF-8") from error


def tables(text: str, name: str) -> dict[str, Any]:
    """Read the tables of a case.

    Raises
    ------
    CaseError
        The text is empty, no TOML (the line is named), too large or nested too deep.
    """
    if len(text) > LARGEST:
        raise _whole(name, f"is longer than {LARGEST} characters; expected a case below that")
    if not text.strip():
        raise _whole(name, "is empty; expected the tables [surroundings], [fluids.*] and [steps.*]")
    long_key = _LONG_KEY.search(text)
    if long_key is not None:
        line = text[: long_key.start()].count("\n") + 1
        raise _whole(name, f"line {line} nests tables too deep; expected at most {_DEEPEST} levels")
    try:
        read = tomllib.loads(text)
    except RecursionError as error:
        raise _too_deep(name) from error
    except ValueError as error:  # also a whole number of thousands of digits
        raise _whole(name, f"is not valid TOML: {error}") from error
    if _depth(read) > _DEEPEST:
        raise _too_deep(name)
    return read


def _depth(value: Any) -> int:
    depth, level = 0, [value]
    while level:
        depth += 1
        level = [
            entry
            for outer in level
            if isinstance(outer, dict | list)
            for entry in (outer.values() if isinstance(outer, dict) else outer)
        ]
    return depth - 1


def _too_deep(name: str) -> CaseError:
    return _whole(name, f"is nested too deep; expected at most {_DEEPEST} levels of tables")


def _whole(name: str, text: str) -> CaseError:
    return CaseError(file=name, problems=(("", "", text),))
