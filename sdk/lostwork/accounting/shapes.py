"""Whether the arrays of one balance can be rows of one table."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from lostwork.accounting.entries import Entries
from lostwork.accounting.surroundings import SiSurroundings
from lostwork.errors import IllPosed

__all__ = ["Shape", "require_one_shape"]

Shape = tuple[int, ...]


def require_one_shape(name: str, entries: Entries, site: SiSurroundings) -> Shape:
    """Give the shape that all arrays of a balance broadcast to; ``()`` where there are none.

    Raises
    ------
    IllPosed
        They do not broadcast.
    """
    shapes = list(_shapes(entries, site))
    if not shapes:
        return ()
    try:
        return np.broadcast_shapes(*(shape for _, shape in shapes))
    except ValueError as error:
        told = ", ".join(f"{what} {shape}" for what, shape in shapes)
        raise IllPosed(
            balance=name,
            reason=f"arrays do not broadcast to one shape: {told}. Give arrays of one shape, or "
            "single values",
        ) from error


def _shapes(entries: Entries, site: SiSurroundings) -> Iterator[tuple[str, Shape]]:
    found: list[tuple[str, object]] = []
    for stream in (*entries.inflows, *entries.outflows):
        label, shape = stream.name or stream.state.label, stream.state.shape
        if shape:
            yield f"state of {label}", shape
        found.append((f"rate of {label}", stream.si.mass))
        found.append((f"w and z of {label}", stream.si.mechanical))
    for content in (*entries.before, *entries.after):
        label, shape = content.name or content.state.label, content.state.shape
        if shape:
            yield f"state of {label}", shape
        found.append((f"mass of {label}", content.mass_si))
        found.append((f"w and z of {label}", content.mechanical))
    for heat in entries.heat:
        found += [(f"heat {heat.name}", heat.si), (f"at= of heat {heat.name}", heat.T)]
    found += [(f"work {work.name}", work.si) for work in entries.work]
    found += [("T0", site.T), ("p0", site.p)]
    for what, column in found:
        if isinstance(column, np.ndarray) and column.shape:
            yield what, column.shape
