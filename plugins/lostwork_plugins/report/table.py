"""The ranked table, to be read in a terminal, a pipe or a file."""

from __future__ import annotations

import io
import textwrap
from collections.abc import Iterable
from typing import Any

import numpy as np
from rich.console import Console, RenderableType
from rich.text import Text

import lostwork as lw
from lostwork_plugins.report.comparing import comparison_parts
from lostwork_plugins.report.layout import (
    Scale,
    add_total,
    columns,
    grave,
    heading,
    mean,
    paragraph,
)
from lostwork_plugins.report.whole import whole_parts

__all__ = ["table"]

_UNBOUNDED = 100_000
_NARROWEST = 60
_GRAVE = (lw.Status.impossible, lw.Status.unbalanced)
_ROWS_SHOWN = 6
_PROSE = 96
_HANGING: dict[str, Any] = {
    "initial_indent": "  ",
    "subsequent_indent": "    ",
    "break_long_words": False,
}


def table(subject: lw.Audit | lw.Comparison, presentation: lw.Presentation) -> str:
    """Write an audit, or a comparison, as tables for people."""
    parts = (
        comparison_parts(subject)
        if isinstance(subject, lw.Comparison)
        else audit_parts(subject, presentation.width)
    )
    return _written([*heading(presentation), *parts], presentation)


def audit_parts(audit: lw.Audit, width: int | None) -> list[RenderableType]:
    """Give the parts of a report on an audit, in the order of reading."""
    ranking = audit.ranking()
    scale = Scale.of([ranked.work_lost for ranked in ranking], audit.per_time)
    return [
        _frame(audit),
        *_ranked(audit, ranking, scale),
        *_by_mechanism(audit, scale),
        *_remarks(audit.findings, width),
        *whole_parts(audit),
        *_judgement(audit),
    ]


def _written(parts: Iterable[RenderableType], presentation: lw.Presentation) -> str:
    width = _UNBOUNDED if presentation.width is None else max(presentation.width, _NARROWEST)
    console = Console(
        file=io.StringIO(),
        width=width,
        force_terminal=presentation.colour,
        color_system="standard" if presentation.colour else None,
        markup=False,
        highlight=False,
        emoji=False,
        legacy_windows=False,
    )
    with console.capture() as captured:
        for part in parts:
            console.print(part)
    return "\n".join(line.rstrip() for line in captured.get().splitlines()) + "\n"


def _frame(audit: lw.Audit) -> Text:
    T0, p0 = audit.surroundings.si.T, audit.surroundings.si.p
    kind = "running steadily" if audit.per_time else "totals of a batch"
    sizes = {balance.shape for balance in audit.balances} - {()}
    text = (
        f"Surroundings {_span(np.asarray(T0) - 273.15, 'degC')}, "
        f"{_span(np.asarray(p0) / 1e5, 'bar')}; {kind}."
    )
    if sizes:
        points = ", ".join(str(int(np.prod(shape))) for shape in sorted(sizes))
        text += f" Figures are means over {points} rows; rows are counted from 0."
    return paragraph(text)


def _span(values: object, unit: str) -> str:
    array = np.asarray(values, dtype=np.float64)
    low, high = float(array.min()), float(array.max())
    return f"{low:.4g} {unit}" if low == high else f"{low:.4g} to {high:.4g} {unit}"


def _ranked(audit: lw.Audit, ranking: tuple[lw.Ranked, ...], scale: Scale) -> list[RenderableType]:
    grid = columns(
        "Work lost, step by step",
        ("", "right"),
        ("step", "name"),
        (f"work lost\n{scale.unit}", "right"),
        ("share\n%", "right"),
        ("efficiency\n%", "right"),
        ("verdict", "word"),
        ("mostly by", "name"),
    )
    for ranked in ranking:
        status = ranked.verdict.status
        alarming = status in _GRAVE
        grid.add_row(
            "!!" if alarming else str(ranked.rank),
            Text(ranked.name),
            # What makes a step impossible is shown in full, however small.
            scale.figure(ranked.work_lost, exact=alarming),
            lw.percent(ranked.share),
            lw.percent(ranked.efficiency),
            _verdict(ranked.verdict),
            Text("-" if status is lw.Status.reversible else ranked.mechanism),
            style=grave(status),
        )
    total = mean(audit.work_lost_si)
    share = 1.0 if total > 0.0 else None
    add_total(grid, "", "all steps", scale.figure(total), lw.percent(share), "", "", "")
    return [grid]


def _verdict(verdict: lw.Verdict) -> str:
    status = verdict.status
    word = status.value.upper() if status in _GRAVE else status.value
    if not verdict.statuses.shape or status is lw.Status.possible:
        return word
    rows = verdict.rows(status)
    if len(rows) == verdict.statuses.size:
        return f"{word} (all rows)"
    shown = ", ".join(str(row) for row in rows[:_ROWS_SHOWN])
    more = f" and {len(rows) - _ROWS_SHOWN} more" if len(rows) > _ROWS_SHOWN else ""
    return f"{word} (rows {shown}{more})"


def _differ(count: int) -> str:
    which = "1 shared stream differs" if count == 1 else f"{count} shared streams differ"
    return f"{which} between the step it leaves and the step it enters"


def _by_mechanism(audit: lw.Audit, scale: Scale) -> list[RenderableType]:
    grid = columns(
        "Work lost, by mechanism",
        ("mechanism", "name"),
        (f"work lost\n{scale.unit}", "right"),
        ("share\n%", "right"),
    )
    total = mean(audit.work_lost_si)
    for mechanism, part in audit.losses_si.items():
        lost = mean(part)
        share = lost / total if total > 0.0 else None
        grid.add_row(Text(mechanism), scale.figure(lost), lw.percent(share))
    return [grid]


def _remarks(findings: tuple[lw.Finding, ...], width: int | None) -> list[Text]:
    if not findings:
        return []
    # Prose is wrapped in a file too, where the tables are as wide as they need.
    folded = min(_PROSE, max(width or _PROSE, _NARROWEST))
    lines = [paragraph("Remarks", style="bold", above=True)]
    for finding in findings:
        place = ", ".join(part for part in (finding.step, finding.check) if part)
        lines.append(paragraph(textwrap.fill(f"{place}: {finding.text}", folded, **_HANGING)))
    return lines


def _judgement(audit: lw.Audit) -> list[Text]:
    """Close with what cannot be: the last lines are what a reader sees first in a terminal."""
    unfit = [balance for balance in audit.balances if not balance.verdict.acceptable]
    apart = [link for link in audit.links if link.mismatch]
    undecided = [b for b in audit.balances if b.verdict.status is lw.Status.undecided]
    lines = [
        paragraph(f"!! {b.verdict.status.value.upper()}: {b.name}: {b.verdict.reason}", "bold red")
        for b in unfit
    ]
    lines += [
        paragraph(
            f"!! DIFFERS: {link.name}, from {link.leaves} to {link.enters}: {link.mismatch}",
            "bold red",
        )
        for link in apart
    ]
    lines += [paragraph(f" ? undecided: {b.name}: {b.verdict.reason}") for b in undecided]
    count = len(audit.balances)
    steps = "The one step" if count == 1 else f"The {count} steps"
    if unfit or apart:
        said = [f"{len(unfit)} of {count} steps cannot stand as described"] if unfit else []
        said += [_differ(len(apart))] if apart else []
        lines.append(paragraph(f"!! {'; '.join(said)}.", "bold red"))
    elif undecided:
        lines.append(
            paragraph(f"No step is impossible, {len(undecided)} of {count} are undecided.")
        )
    else:
        lines.append(paragraph(f"{steps} can run as described.", "bold"))
    lines[0].plain = "\n" + lines[0].plain
    return lines
