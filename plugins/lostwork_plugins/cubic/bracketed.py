"""Rising functions solved inside a bracket, for columns, with derivatives or without.

The unknown is T at given p; h and s rise with T there, in single phase and across the dome
alike, so a bracket with a sign change holds exactly one root.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import TypeAlias

import numpy as np
import numpy.typing as npt

__all__ = ["solve_by_values", "solve_rising"]

Vector: TypeAlias = npt.NDArray[np.float64]
Rows: TypeAlias = npt.NDArray[np.intp]

_MOST = 100
_LAST = 1e-12
_ROOT = 1e-9


def solve_rising(
    value_and_slope: Callable[[Vector, Rows], tuple[Vector, Vector]],
    target: Vector,
    low: Vector,
    high: Vector,
) -> Vector:
    """Unknown at which a rising function meets its target; NaN where the bracket does not hold it.

    Parameters
    ----------
    value_and_slope
        f(unknown, rows): value and derivative of the given rows; a slope may be NaN.
    target, low, high
        Shape (n,).  The ends of the bracket are states themselves.

    Returns
    -------
    array
        Shape (n,), to round-off.
    """
    low, high = low.copy(), high.copy()
    every = np.arange(target.size)
    at_low, _ = value_and_slope(low, every)
    at_high, _ = value_and_slope(high, every)
    slack = 1e-13 * np.maximum(np.abs(at_low), np.abs(at_high))
    with np.errstate(invalid="ignore", divide="ignore"):
        holds = (at_low - slack <= target) & (target <= at_high + slack)
        share = np.clip((target - at_low) / (at_high - at_low), 0.0, 1.0)
    root = np.where(holds, low + share * (high - low), np.nan)
    last = high - low
    active = np.flatnonzero(holds & (high > low))
    for _ in range(_MOST):
        if active.size == 0:
            break
        T = root[active]
        value, slope = value_and_slope(T, active)
        miss = value - target[active]
        low[active] = np.where(miss <= 0.0, T, low[active])
        high[active] = np.where(miss > 0.0, T, high[active])
        with np.errstate(invalid="ignore", divide="ignore"):
            step = -miss / slope
        inside = (T + step > low[active]) & (T + step < high[active])
        shrinks = np.abs(step) < 0.5 * last[active]
        newton = np.isfinite(step) & inside & shrinks
        # A Newton step this short lands within round-off.
        tiny = np.isfinite(step) & (np.abs(step) <= _LAST * T)
        half = 0.5 * (low[active] + high[active])
        following = np.where(newton | tiny, T + np.where(np.isfinite(step), step, 0.0), half)
        following = np.clip(following, low[active], high[active])
        last[active] = np.abs(following - T)
        root[active] = following
        narrow = high[active] - low[active] <= 4e-16 * T
        active = active[~tiny & ~narrow & (miss != 0.0)]
    rows = np.flatnonzero(np.isfinite(root))
    if rows.size:
        # Where the function jumps over its target the bracket closes without a root.
        value, _ = value_and_slope(root[rows], rows)
        scale = np.maximum(np.abs(at_low), np.abs(at_high))[rows]
        root[rows[np.abs(value - target[rows]) > _ROOT * scale]] = np.nan
    return root


def solve_by_values(
    value: Callable[[Vector, Rows], Vector], target: Vector, low: Vector, high: Vector
) -> Vector:
    """Unknown at which a rising function meets its target, from values alone.

    The method of Chandrupatla (1997, Adv. Eng. Softw. 28, 145).  NaN where the bracket does not
    hold the target, where a value on the way is missing, or where the function jumps over it.
    """
    every = np.arange(target.size)
    b, a = low.copy(), high.copy()
    fb, fa = value(b, every) - target, value(a, every) - target
    scale = np.maximum(np.abs(fa), np.abs(fb))
    c, fc = a.copy(), fa.copy()
    part = np.full(target.size, 0.5)
    root = np.full(target.size, np.nan)
    miss = np.full(target.size, np.inf)
    with np.errstate(invalid="ignore"):
        active = np.flatnonzero(np.sign(fa) * np.sign(fb) <= 0.0)
    for _ in range(_MOST):
        if active.size == 0:
            break
        i = active
        t = a[i] + part[i] * (b[i] - a[i])
        ft = value(t, i) - target[i]
        same = np.sign(ft) == np.sign(fa[i])
        c[i] = np.where(same, a[i], b[i])
        fc[i] = np.where(same, fa[i], fb[i])
        b[i] = np.where(same, b[i], a[i])
        fb[i] = np.where(same, fb[i], fa[i])
        a[i], fa[i] = t, ft
        better = np.abs(fb[i]) < np.abs(fa[i])
        root[i] = np.where(better, b[i], a[i])
        miss[i] = np.where(better, np.abs(fb[i]), np.abs(fa[i]))
        width = np.abs(b[i] - a[i])
        tolerance = 0.5 * 4e-16 * np.abs(root[i]) / np.where(width > 0.0, width, 1.0)
        with np.errstate(invalid="ignore", divide="ignore"):
            xi = (a[i] - b[i]) / (c[i] - b[i])
            phi = (fa[i] - fb[i]) / (fc[i] - fb[i])
            smooth = (phi**2 < xi) & ((1.0 - phi) ** 2 < 1.0 - xi)
            guess = fa[i] / (fb[i] - fa[i]) * fc[i] / (fb[i] - fc[i])
            guess += (
                (c[i] - a[i]) / (b[i] - a[i]) * fa[i] / (fc[i] - fa[i]) * fb[i] / (fc[i] - fb[i])
            )
        part[i] = np.clip(
            np.where(smooth & np.isfinite(guess), guess, 0.5), tolerance, 1 - tolerance
        )
        root[i[~np.isfinite(ft)]] = np.nan
        done = (tolerance >= 0.5) | (miss[i] == 0.0) | ~np.isfinite(ft) | (width == 0.0)
        active = i[~done]
    return np.where(miss <= 1e-7 * scale, root, np.nan)
