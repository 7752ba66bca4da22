"""The contract of an exporter: an audit or a comparison in, a text out."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Protocol

from lostwork.accounting.audit import Audit
from lostwork.accounting.comparison import Comparison

__all__ = ["Exporter", "Presentation"]


@dataclass(frozen=True)
class Presentation:
    """How a text is to be presented; an exporter takes of it what it has use for.

    Later versions may add fields, each with a default.
    """

    title: str = ""
    note: str = ""
    width: int | None = None
    """Columns of the terminal; ``None`` for as many as the text needs (a file or a pipe)."""
    colour: bool = False
    """Whether the text is shown where colour is understood; nothing hangs on colour alone."""


class Exporter(Protocol):
    """What the target of an `ExporterDescriptor` is: a function, or an object that is called.

    1. It gives a text and writes nowhere.
    2. Figures come from the audit; it derives none of the second law itself.
    3. A figure that is not there (an efficiency without a purpose, a share of nothing) is left
       out or marked, never filled in.
    4. A step that is impossible or unbalanced cannot be missed, without colour too.
    5. What it cannot present (a comparison, an axis too many) it refuses with a `LostworkError`.
    """

    def __call__(self, subject: Audit | Comparison, presentation: Presentation) -> str:
        """Give the text."""
