"""How our tables are set: columns, rules, one unit, and what is grave."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np
from rich import box
from rich.console import RenderableType
from rich.table import Table
from rich.text import Text

import lostwork as lw

__all__ = ["Scale", "add_total", "columns", "grave", "heading", "mean", "paragraph"]

# Plain hyphens, so that the rules survive every terminal, mail and ticket.
_RULES = box.Box("    \n    \n -- \n    \n -- \n -- \n    \n    \n", ascii=True)


@dataclass(frozen=True)
class Scale:
    """One unit for a column, and its largest figure."""

    size: float
    unit: str
    largest: float

    @classmethod
    def of(cls, values: Iterable[float], per_time: bool) -> Scale:
        """Choose the unit for these powers or energies."""
        listed = [float(value) for value in values]
        size, unit = lw.display_unit(listed, per_time)
        return cls(size, unit, max((abs(v) for v in listed if np.isfinite(v)), default=0.0))

    def figure(self, value: float, *, exact: bool = False) -> str:
        """Write a value of the column; `exact` keeps what is next to nothing."""
        return lw.figure(value / self.size, 0.0 if exact else self.largest / self.size)


def columns(title: str, *heads: tuple[str, str]) -> Table:
    """Make a table; a head is a text and a manner: "right" (numbers), "word" or "name".

    Only names are folded where the terminal is narrow.
    """
    grid = Table(
        title=Text(f"\n{title}", style="bold"),
        title_justify="left",
        box=_RULES,
        show_edge=False,
        pad_edge=False,
        padding=(0, 1),
        header_style="",
    )
    for text, manner in heads:
        if manner == "name":
            grid.add_column(text, overflow="fold", min_width=8, vertical="top")
        else:
            grid.add_column(text, justify="right" if manner == "right" else "left", no_wrap=True)
    return grid


def add_total(grid: Table, *cells: str) -> None:
    """Close a table with a ruled line of totals."""
    grid.add_section()
    grid.add_row(*cells, style="bold")


def grave(status: lw.Status) -> str | None:
    """Style of a row of this status; colour only adds to what the words say."""
    if status in (lw.Status.impossible, lw.Status.unbalanced):
        return "bold red"
    return "yellow" if status is lw.Status.undecided else None


def heading(presentation: lw.Presentation) -> list[RenderableType]:
    """Title and note above everything."""
    lines: list[RenderableType] = []
    if presentation.title:
        lines.append(paragraph(presentation.title, "bold"))
    if presentation.note:
        lines.append(paragraph(presentation.note.strip()))
    return lines


def paragraph(text: str, style: str = "", *, above: bool = False) -> Text:
    """Give a text of its own, with an empty line above it where asked."""
    return Text(f"\n{text}" if above else text, style=style)


def mean(values: object) -> float:
    """Mean over the rows that are known; NaN where none is."""
    array = np.asarray(values, dtype=np.float64)
    known = array[np.isfinite(array)]
    return float(known.mean()) if known.size else float("nan")
