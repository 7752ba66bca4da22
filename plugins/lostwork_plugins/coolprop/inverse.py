"""States of a mixture from other pairs than T and p: by a bracketed search over T or ln p.

At one pressure h and s rise with T without a break, through the dome too (a mixture boils over a
range of T), so there is one root.  The search first takes the mixture for a single phase, which is
quick, and believes the result only if a phase test at the end confirms it.
"""

from __future__ import annotations

import math
from collections.abc import Callable

from lostwork_plugins.coolprop.bracketing import root_between
from lostwork_plugins.coolprop.equilibrium import NoEquilibrium

__all__ = ["root_from"]

_FIRST_STEP = 0.03
_GROWTH = 1.8
_ROUNDING = 1e3


def root_from(
    f: Callable[[float], float],
    start: float,
    low: float,
    high: float,
    *,
    rising: bool,
    f_tolerance: float,
    first_step: float,
) -> float:
    """Find x within `low` to `high` with f(x) = 0 for a monotone f, looking outwards from `start`.

    Raises
    ------
    NoEquilibrium
        No sign change within the limits, or only a jump over zero.
    """
    a = min(max(start, low), high)
    fa = f(a)
    if abs(fa) <= f_tolerance:
        return a
    upwards = (fa < 0.0) == rising
    step = first_step
    while True:
        b = min(a + step, high) if upwards else max(a - step, low)
        if b == a:
            if abs(fa) <= _ROUNDING * f_tolerance:
                return a  # the state is on the limit itself
            raise NoEquilibrium("no state within the limits of the equation has these values")
        fb = f(b)
        if (fb > 0.0) != (fa > 0.0) or fb == 0.0:
            break
        a, fa = b, fb
        step *= _GROWTH
    x = root_between(f, a, fa, b, fb, x_tolerance=2e-16, f_tolerance=f_tolerance)
    left = abs(f(x))
    if not left <= max(1e4 * f_tolerance, 1e-9 * abs(fb - fa)) or math.isnan(left):
        raise NoEquilibrium("the search ended at a jump of the equation, not at a state")
    return x
