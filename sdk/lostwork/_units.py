"""The grammar of a quantity in words: a number, then a unit.

The text may come from an untrusted file, so nothing is evaluated: the number is matched by one
expression, the unit is taken apart by the small descent below, and every length and exponent is
bounded.  What a name means is decided elsewhere.

    unit    = product { "/" | "per"  product-step }
    product = factor { ["*" | "·" | "." | " "] factor }      read from left to right
    factor  = (name | "(" unit ")") [ ["^" | "**"] integer ]
"""

from __future__ import annotations

import math
import re
import unicodedata
from typing import Final

from lostwork.errors import NotFinite, QuantityError, UnknownUnit

__all__ = ["LONGEST", "UnitTerms", "parse_unit", "shortened", "split_number", "tidy"]

LONGEST: Final = 120
"""Longest text that is read, in characters."""

_LARGEST_EXPONENT: Final = 9

UnitTerms = tuple[tuple[str, int], ...]
"""Names of units with their exponents, each name once, in the order written."""

_SUPERSCRIPTS: Final = str.maketrans("⁺⁻⁰¹²³⁴⁵⁶⁷⁸⁹", "+-0123456789")
_SUPERSCRIPT: Final = re.compile(r"[⁺⁻]?[⁰¹²³⁴⁵⁶⁷⁸⁹]+")
_THIN_SPACE: Final = re.compile(r"(?<=[0-9])[\u2009\u202f](?=[0-9])")
_SPACED_DEGREE: Final = re.compile(r"(?:(?<![^\W\d_])deg|°)\s+(?=[CFR](?!\w))")
_NUMBER: Final = re.compile(
    r"[+-]?(?:[0-9]+(?:_[0-9]+)*(?:\.(?:[0-9]+(?:_[0-9]+)*)?)?|\.[0-9]+(?:_[0-9]+)*)"
    r"(?:[eE][+-]?[0-9]{1,4}(?![0-9]))?"
)
_NOT_A_NUMBER: Final = re.compile(r"[+-]?(?:nan|inf(?:inity)?)(?![^\W_])", re.IGNORECASE)
_TOKEN: Final = re.compile(
    r"(?P<name>(?:[^\W\d_]|[°%‰_])[\w°]*|%)"
    r"|(?P<power>\*\*|\^)"
    r"|(?P<integer>[+-]?[0-9]+)"
    r"|(?P<operator>[*·⋅×./()])"
    r"|(?P<space>\s+)"
)


def shortened(value: object) -> str:
    """Say a value in at most about sixty characters."""
    if isinstance(value, str) and len(value) > LONGEST:
        return f"{value[:30]!r}... ({len(value)} characters)"
    try:
        text = f"{value!r}" if isinstance(value, str | bytes) else f"{value}"
    except Exception:  # a caller's own class may fail to print; the error must still be told
        text = f"a {type(value).__name__}"
    text = " ".join(text.split())
    return text if len(text) <= 60 else f"{text[:45]}... ({len(text)} characters)"


def _unreadable(text: str, hint: str) -> UnknownUnit:
    return UnknownUnit(field="", value=shortened(text), hint=hint)


def tidy(text: str) -> str:
    """Write look-alike signs (superscripts, ℃, º, minus, thin spaces) in one way."""
    if text.isascii() and "deg " not in text:
        return text.strip()
    text = _SUPERSCRIPT.sub(lambda m: "^" + m[0].translate(_SUPERSCRIPTS), text)
    text = _THIN_SPACE.sub("", text).replace("º", "°").replace("\u2212", "-")
    return _SPACED_DEGREE.sub("deg", unicodedata.normalize("NFKC", text)).strip()


def split_number(text: str) -> tuple[float, str]:
    """Part a text into its number and the unit behind it ("" if there is none).

    Raises
    ------
    UnknownUnit
        The text is too long or does not start with a number.
    NotFinite
        The number is NaN, infinite or too large for a float.
    """
    if len(text) > LONGEST:
        raise _unreadable(text, f"A quantity has at most {LONGEST} characters")
    tidied = tidy(text)
    found = _NUMBER.match(tidied)
    if found is None:
        if _NOT_A_NUMBER.match(tidied):
            raise NotFinite(field="", value=shortened(text))
        raise _unreadable(text, "Write a number, then a unit")
    rest = tidied[found.end() :]
    unit = rest.strip()
    if unit.startswith((",", "'")):
        raise _unreadable(text, "Write a decimal point, and nothing between the thousands")
    if unit[:1].isdigit() or unit.startswith(("*", "+", "-", "/", "^", ".", "_", "·", "×")):
        raise _unreadable(text, "Only one number and a unit are read; nothing is computed")
    number = float(found[0].replace("_", ""))
    if not math.isfinite(number):
        raise NotFinite(field="", value=shortened(text))
    return number, unit


def parse_unit(text: str) -> UnitTerms:
    """Take a unit apart into names and integer exponents.

    Raises
    ------
    UnknownUnit
        The text is no product of names, or an exponent is beyond 9.
    """
    if len(text) > LONGEST:
        raise _unreadable(text, f"A unit has at most {LONGEST} characters")
    tidied = tidy(text)
    if not tidied:
        return ()
    descent = _Descent(text, _tokens(text, tidied))
    terms = descent.unit()
    if descent.kind:
        raise _unreadable(text, f"{descent.token!r} is out of place")
    return tuple((name, exponent) for name, exponent in terms.items() if exponent)


def _tokens(text: str, tidied: str) -> list[tuple[str, str]]:
    tokens: list[tuple[str, str]] = []
    at = 0
    while at < len(tidied):
        found = _TOKEN.match(tidied, at)
        if found is None or found.lastgroup is None:
            raise _unreadable(text, f"{tidied[at]!r} is out of place")
        tokens.append((found.lastgroup, found[0]))
        at = found.end()
    return tokens


class _Descent:
    """One walk through the tokens of a unit."""

    def __init__(self, text: str, tokens: list[tuple[str, str]]) -> None:
        self.text = text
        self.tokens = tokens
        self.at = 0

    @property
    def kind(self) -> str:
        return self.tokens[self.at][0] if self.at < len(self.tokens) else ""

    @property
    def token(self) -> str:
        return self.tokens[self.at][1] if self.at < len(self.tokens) else ""

    def refuse(self) -> QuantityError:
        where = f"{self.token!r} is out of place" if self.kind else "the unit breaks off"
        return _unreadable(self.text, where)

    def skip_space(self) -> None:
        while self.kind == "space":
            self.at += 1

    def unit(self) -> dict[str, int]:
        self.skip_space()
        terms: dict[str, int] = {}
        self.multiply(terms, self.factor(), 1)
        while True:
            self.skip_space()
            sign = 1
            if self.token == "/" or (self.kind == "name" and self.token == "per"):
                sign = -1
                self.at += 1
            elif self.kind == "operator" and self.token not in "()":
                self.at += 1
            elif self.kind != "name" and self.token != "(":
                return terms
            self.skip_space()
            self.multiply(terms, self.factor(), sign)

    def multiply(self, terms: dict[str, int], more: dict[str, int], power: int) -> None:
        for name, exponent in more.items():
            total = terms.get(name, 0) + exponent * power
            if abs(total) > _LARGEST_EXPONENT:
                raise _unreadable(self.text, f"An exponent is at most {_LARGEST_EXPONENT}")
            terms[name] = total

    def factor(self) -> dict[str, int]:
        if self.kind == "name":
            inner = {self.token: 1}
            self.at += 1
        elif self.token == "(":
            self.at += 1
            inner = self.unit()
            if self.token != ")":
                raise self.refuse()
            self.at += 1
        else:
            raise self.refuse()
        terms: dict[str, int] = {}
        self.multiply(terms, inner, self.exponent())
        return terms

    def exponent(self) -> int:
        before = self.at
        self.skip_space()
        raised = self.kind == "power"
        if raised:
            self.at += 1
            self.skip_space()
        else:
            self.at = before
        if self.kind != "integer":
            if raised:
                raise self.refuse()
            return 1
        if len(self.token) > 2 or self.token.lstrip("+-") not in "0123456789":
            raise _unreadable(self.text, f"An exponent is at most {_LARGEST_EXPONENT}")
        exponent = int(self.token)
        self.at += 1
        if self.kind == "power":
            raise self.refuse()
        return exponent
