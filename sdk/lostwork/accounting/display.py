"""Figures as people read them: one unit for a column, four significant digits."""

from __future__ import annotations

from collections.abc import Iterable

import numpy as np

__all__ = ["display_unit", "figure", "percent"]

_STEPS = ((1e9, "G"), (1e6, "M"), (1e3, "k"), (1.0, ""))
_NEXT_TO_NOTHING = 1e-6

NOTHING = "-"
"""Stands where there is no figure."""


def display_unit(values: Iterable[float], per_time: bool) -> tuple[float, str]:
    """Choose one unit for a column of powers (or energies), W to GW, by its largest value.

    Returns
    -------
    size, unit
        Size of the unit in W (or J), and its name.
    """
    known = [abs(value) for value in values if np.isfinite(value)]
    largest = max(known, default=0.0)
    base = "W" if per_time else "J"
    for size, prefix in _STEPS:
        if largest >= size:
            return size, prefix + base
    return 1.0, base


def figure(value: float | None, largest: float = 0.0) -> str:
    """Write a number with four significant digits.

    Parameters
    ----------
    value
        ``None`` and NaN are written "-".
    largest
        Largest of the column; what is a millionth of it or less is written "~0", so that round-off
        does not look like a result.
    """
    if value is None or not np.isfinite(value):
        return NOTHING
    if value == 0.0:
        return "0"
    if abs(value) <= _NEXT_TO_NOTHING * largest:
        return "~0"
    text = f"{value:#.4g}"
    return f"{value:.4g}" if "e" in text else text.rstrip(".")


def percent(value: float | None) -> str:
    """Write a fraction in per cent with one decimal; ``None`` and NaN are written "-"."""
    if value is None or not np.isfinite(value):
        return NOTHING
    return f"{100.0 * value:.1f}"
