"""One table of rows: whether arrays that meet have one shape."""

from __future__ import annotations

from collections.abc import Iterable

import numpy as np

from lostwork.errors import ShapesDiffer

__all__ = ["Shape", "common_shape"]

Shape = tuple[int, ...]


def common_shape(where: str, columns: Iterable[tuple[str, object]]) -> Shape:
    """Give the shape that columns broadcast to; ``()`` where all of them are single values.

    Parameters
    ----------
    where
        What they belong to, for the message.
    columns
        Each by its name: floats, arrays, or anything with a shape.

    Raises
    ------
    ShapesDiffer
        They do not broadcast.
    """
    shapes = tuple((name, shape) for name, column in columns if (shape := _shape(column)))
    if not shapes:
        return ()
    try:
        return np.broadcast_shapes(*(shape for _, shape in shapes))
    except ValueError as error:
        raise ShapesDiffer(where=where, shapes=shapes) from error


def _shape(column: object) -> Shape:
    shape: Shape = getattr(column, "shape", ())
    return shape
