"""Bubble and dew points of a mixture: the T at a given p, or the p at a given T, where it begins.

At a bubble point the liquid has the overall composition z and sum z K = 1; at a dew point the
vapour has it and sum z / K = 1.  The inner loop settles the composition of the incipient phase, the
outer one moves T or ln p by secant steps.  CoolProp's own answer serves as the first guess only.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from typing import Any

from CoolProp.CoolProp import (
    PQ_INPUTS,
    QT_INPUTS,
)

from lostwork_plugins.coolprop.bounds import Bounds
from lostwork_plugins.coolprop.equilibrium import NoEquilibrium, TwoPhases, splits
from lostwork_plugins.coolprop.phase import GAS, LIQUID, Phase, PhaseEquation

__all__ = ["saturated"]

_STEPS = 40
_INNER_STEPS = 300
_INNER_CLOSE = 1e-13
_CLOSE = 1e-11
_GOOD = 1e-10
_TRIVIAL = 1e-3
_LEAST_PRESSURE = 1e-3
_FAR_LN_P, _FAR_T = 1.0, 0.15


def saturated(
    equation: PhaseEquation,
    native: Any,
    z: Sequence[float],
    held: str,
    value: float,
    quality: int,
    bounds: Bounds,
) -> tuple[float, float, TwoPhases]:
    """Give T (K), p (Pa) and the two phases at quality 0 (bubble) or 1 (dew).

    Parameters
    ----------
    native
        An object of CoolProp with the same composition, asked for a first guess.
    held, value
        "T" (K) or "p" (Pa).
    bounds
        Range within which to look.

    Raises
    ------
    NoEquilibrium
        There is no such point, or the search did not find it.
    """
    unknown = _first_guess(equation, native, z, held, value, quality)
    ln_K: list[float] | None = None
    found: TwoPhases | None = None

    def place(unknown: float) -> tuple[float, float]:
        return (value, math.exp(unknown)) if held == "T" else (unknown, value)

    def misfit(unknown: float) -> float:
        nonlocal ln_K, found
        T, p = place(unknown)
        found, ln_sum = _incipient(equation, T, p, z, quality, ln_K)
        ln_K = found.ln_K
        return ln_sum

    low, high = (
        (bounds.T_min, bounds.T_max)
        if held == "p"
        else (math.log(_LEAST_PRESSURE), math.log(bounds.p_max))
    )
    if not low <= unknown <= high:
        unknown = low if unknown < low else high
    unknown = _secant(misfit, unknown, low, high, most=0.1 * unknown if held == "p" else 0.5)
    if abs(misfit(unknown)) > _GOOD or found is None:
        raise NoEquilibrium("the saturation line was not found")
    T, p = place(unknown)
    if splits(equation, T, p, z):
        raise NoEquilibrium("no state of this quality: the mixture splits otherwise there")
    return T, p, found


def _incipient(
    equation: PhaseEquation,
    T: float,
    p: float,
    z: Sequence[float],
    quality: int,
    ln_K: Sequence[float] | None,
) -> tuple[TwoPhases, float]:
    """Settle the incipient phase at T and p; also the logarithm of its sum of amounts."""
    held_kind, other_kind, sign = (LIQUID, GAS, 1.0) if quality == 0 else (GAS, LIQUID, -1.0)
    held = equation.phase(T, p, z, held_kind)
    if held is None:
        raise NoEquilibrium(f"the mixture has no {held_kind} there")
    ratios = list(ln_K) if ln_K is not None else equation.cubic.wilson(T, p)
    other = held
    rho: float | None = None
    for _ in range(_INNER_STEPS):
        logs = [math.log(x) + sign * k for x, k in zip(z, ratios, strict=True)]
        top = max(logs)
        amounts = [math.exp(log - top) for log in logs]
        total = sum(amounts)
        incipient = equation.phase(T, p, [a / total for a in amounts], other_kind, rho)
        if incipient is None:
            raise NoEquilibrium(f"the incipient phase has no {other_kind} density root")
        other = incipient
        rho = other.rho
        new = [sign * (a - b) for a, b in zip(held.ln_phi, other.ln_phi, strict=True)]
        moved = max(abs(a - b) for a, b in zip(new, ratios, strict=True))
        ratios = new
        if max(map(abs, ratios)) < _TRIVIAL:
            raise NoEquilibrium("liquid and vapour become one: too close to a critical point")
        if moved < _INNER_CLOSE:
            break
    ln_sum = top + math.log(total)
    return _two_phases(quality, held, other), ln_sum


def _two_phases(quality: int, held: Phase, other: Phase) -> TwoPhases:
    liquid, vapour = (held, other) if quality == 0 else (other, held)
    return TwoPhases(float(quality), liquid, vapour)


def _secant(
    misfit: Callable[[float], float], x: float, low: float, high: float, *, most: float
) -> float:
    f = misfit(x)
    nudge = 1e-4 * max(abs(x), 1.0) * (1.0 if x < high else -1.0)
    slope = (misfit(x + nudge) - f) / nudge
    for _ in range(_STEPS):
        if slope == 0.0 or not math.isfinite(slope):
            break
        step = min(max(-f / slope, -most), most)
        before, f_before = x, f
        x = min(max(x + step, low), high)
        if x == before and abs(f) > _CLOSE:
            raise NoEquilibrium("the saturation line lies outside the range of the equation")
        f = misfit(x)
        if abs(f) < _CLOSE or abs(step) < 1e-13 * abs(x):
            return x
        if f != f_before:
            slope = (f - f_before) / (x - before)
    raise NoEquilibrium("the search for the saturation line did not converge")


def _first_guess(
    equation: PhaseEquation, native: Any, z: Sequence[float], held: str, value: float, quality: int
) -> float:
    rough = _wilson_guess(equation, z, held, value, quality)
    try:
        if held == "T":
            native.update(QT_INPUTS, quality, value)
            guess, apart = math.log(native.p()), _FAR_LN_P
        else:
            native.update(PQ_INPUTS, value, quality)
            guess, apart = float(native.T()), _FAR_T * rough
    except (ValueError, RuntimeError):
        return rough
    # Far off, CoolProp has found a retrograde point or none at all.
    return guess if abs(guess - rough) < apart else rough


def _wilson_guess(
    equation: PhaseEquation, z: Sequence[float], held: str, value: float, quality: int
) -> float:
    sign = 1.0 if quality == 0 else -1.0

    def total(T: float, p: float) -> float:
        ratios = equation.cubic.wilson(T, p)
        return math.log(sum(x * math.exp(sign * k) for x, k in zip(z, ratios, strict=True)))

    if held == "T":
        return sign * total(value, 1.0)
    low, high = 0.2 * min(equation.critical_temperatures), max(equation.critical_temperatures)
    for _ in range(60):
        middle = 0.5 * (low + high)
        if sign * total(middle, value) > 0.0:
            high = middle
        else:
            low = middle
    return 0.5 * (low + high)
