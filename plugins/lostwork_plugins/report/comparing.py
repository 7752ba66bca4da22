"""The table of one case under several backends."""

from __future__ import annotations

from rich.console import RenderableType
from rich.text import Text

import lostwork as lw
from lostwork_plugins.report.layout import Scale, add_total, columns, grave, paragraph

__all__ = ["comparison_parts"]

_GRAVE = (lw.Status.impossible, lw.Status.unbalanced)


def comparison_parts(comparison: lw.Comparison) -> list[RenderableType]:
    """Give the parts of a report on a comparison, in the order of reading."""
    totals = list(comparison.totals.values())
    losses = [f.work_lost for step in comparison.steps for f in step.figures.values()]
    scale = Scale.of([*losses, *totals], comparison.per_time)
    grid = columns(
        f"Work lost in {scale.unit}, by property backend",
        ("step", "name"),
        *((name, "right") for name in comparison.backends),
        ("spread\n%", "right"),
        ("verdict", "name"),
    )
    for step in comparison.steps:
        gravest = next((f.status for f in step.figures.values() if f.status in _GRAVE), None)
        grid.add_row(
            Text(step.name),
            *(scale.figure(f.work_lost, exact=f.status in _GRAVE) for f in step.figures.values()),
            lw.percent(step.relative_spread),
            Text(_verdicts(step)),
            style=None if gravest is None else grave(gravest),
        )
    add_total(grid, "all steps", *(scale.figure(total) for total in totals), "", "")
    return [grid, *_efficiencies(comparison), *_said(comparison)]


def _verdicts(step: lw.StepComparison) -> str:
    words = {name: _word(figures.status) for name, figures in step.figures.items()}
    if not step.verdict_changes:
        return next(iter(words.values()))
    return "CHANGES: " + ", ".join(f"{word} ({name})" for name, word in words.items())


def _word(status: lw.Status) -> str:
    return status.value.upper() if status in _GRAVE else status.value


def _efficiencies(comparison: lw.Comparison) -> list[RenderableType]:
    measured = [
        step
        for step in comparison.steps
        if any(figures.efficiency is not None for figures in step.figures.values())
    ]
    if not measured:
        return []
    grid = columns(
        "Efficiency in %, by property backend",
        ("step", "name"),
        *((name, "right") for name in comparison.backends),
    )
    for step in measured:
        grid.add_row(
            Text(step.name), *(lw.percent(figures.efficiency) for figures in step.figures.values())
        )
    return [grid]


def _said(comparison: lw.Comparison) -> list[RenderableType]:
    lines: list[RenderableType] = []
    for name, error in comparison.failures.items():
        lines.append(paragraph(f"{name} could not compute this case:", "yellow", above=True))
        lines.append(paragraph("\n".join(f"  {line}" for line in str(error).splitlines())))
    changed = [step.name for step in comparison.changed]
    if len(comparison.backends) < 2:
        closing = "Only one backend could compute this case, so nothing is compared."
    elif changed:
        closing = f"!! The verdict hangs on the backend for: {', '.join(changed)}."
    else:
        closing = f"The verdicts are the same under {', '.join(comparison.backends)}."
    return [*lines, paragraph(closing, "bold", above=True)]
