"""The balance around the whole, as a check that the parts were put together rightly."""

from __future__ import annotations

from rich.console import RenderableType

import lostwork as lw
from lostwork_plugins.report.layout import Scale, columns, mean, paragraph

__all__ = ["whole_parts"]


def whole_parts(audit: lw.Audit) -> list[RenderableType]:
    """Show mass, energy and entropy around all steps at once, shared streams left out."""
    whole = audit.whole
    shared = len(audit.links)
    if whole is None:
        return [
            paragraph(
                "No balance can be drawn around the whole: its streams count h and s from "
                "different zeros.",
                above=True,
            )
        ]
    work, heat = mean(whole.work_total.magnitude), mean(whole.heat_total.magnitude)
    residual = mean(whole.books.energy_residual)
    parts, around = mean(audit.work_lost_si), mean(whole.work_lost_si)
    scale = Scale.of([work, heat, parts, around], audit.per_time)
    grid = columns("Balance around the whole", ("", "name"), ("", "right"), ("", "word"))
    grid.show_header = False
    for name, mass in _masses(whole):
        grid.add_row(name, lw.figure(mass), "kg/s" if audit.per_time else "kg")
    grid.add_row("work put in, net", scale.figure(work), scale.unit)
    grid.add_row("heat put in, net", scale.figure(heat), scale.unit)
    grid.add_row("energy that does not close", scale.figure(residual), scale.unit)
    grid.add_row("work lost, sum of the steps", scale.figure(parts), scale.unit)
    grid.add_row("work lost, around the whole", scale.figure(around), scale.unit)
    grid.add_row("streams shared between steps", str(shared), "")
    return [grid]


def _masses(whole: lw.Balance) -> list[tuple[str, float]]:
    """Masses that pass the boundary, and those that stand inside before and after."""
    sides = (
        ("mass in", whole.inflows),
        ("mass out", whole.outflows),
        ("mass inside before", whole.before),
        ("mass inside after", whole.after),
    )
    return [(name, sum(mean(part.mass_si) for part in parts)) for name, parts in sides if parts]
