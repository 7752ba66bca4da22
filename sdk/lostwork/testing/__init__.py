"""For tests: strategies that draw thermodynamic input, for plugin authors and for our own tests.

Needs hypothesis, from the extra `testing`.
"""

from __future__ import annotations

from lostwork.testing.strategies import (
    compositions,
    contents,
    pressures,
    states,
    streams,
    surroundings,
    temperatures,
)

__all__ = [
    "compositions",
    "contents",
    "pressures",
    "states",
    "streams",
    "surroundings",
    "temperatures",
]
