"""For tests: strategies that draw thermodynamic input, for plugin authors and for our own tests.

Needs hypothesis, from the extra `testing`.
"""

from __future__ import annotations

from lostwork.testing.strategies import (
    compositions,
    contents,
    fractions,
    given_states,
    pressures,
    processes,
    ratios,
    rows_of_states,
    states,
    streams,
    surroundings,
    temperatures,
    wet_states,
)

__all__ = [
    "compositions",
    "contents",
    "fractions",
    "given_states",
    "pressures",
    "processes",
    "ratios",
    "rows_of_states",
    "states",
    "streams",
    "surroundings",
    "temperatures",
    "wet_states",
]
