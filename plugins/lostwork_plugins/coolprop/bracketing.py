"""Root of a function of one variable between two ends of opposite sign.

Source of the step: T. R. Chandrupatla, Adv. Eng. Software 28 (1997) 145-149.
"""

from __future__ import annotations

from collections.abc import Callable

__all__ = ["root_between"]

_STEPS = 100


def root_between(
    f: Callable[[float], float],
    a: float,
    fa: float,
    b: float,
    fb: float,
    *,
    x_tolerance: float = 1e-14,
    f_tolerance: float = 0.0,
) -> float:
    """Find x with f(x) = 0 for fa = f(a) and fb = f(b) of opposite sign.

    Bisection and inverse quadratic interpolation in turn; ends when the bracket is within
    `x_tolerance` (relative) or abs(f) within `f_tolerance`.
    """
    if fa == 0.0:
        return a
    if fb == 0.0:
        return b
    c, fc = a, fa
    share = fa / (fa - fb)
    best = a if abs(fa) < abs(fb) else b
    for _ in range(_STEPS):
        x = a + share * (b - a)
        fx = f(x)
        if (fx > 0.0) == (fa > 0.0):
            c, fc = a, fa
        else:
            c, fc, b, fb = b, fb, a, fa
        a, fa = x, fx
        best = a if abs(fa) < abs(fb) else b
        if abs(fx) <= f_tolerance or fx == 0.0:
            return x
        least = 2.0 * abs(best) * x_tolerance
        smallest = least / abs(b - a)
        if smallest > 0.5:
            return best
        xi, phi = (a - b) / (c - b), (fa - fb) / (fc - fb)
        if phi * phi < xi and (1 - phi) * (1 - phi) < 1 - xi:
            share = fa / (fb - fa) * fc / (fb - fc) + (c - a) / (b - a) * fa / (fc - fa) * fb / (
                fc - fb
            )
        else:
            share = 0.5
        share = min(max(share, smallest), 1.0 - smallest)
    return best
