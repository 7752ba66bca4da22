"""Two phases of a mixture at given T and p, and its bubble, dew and inner points.

Both start by successive substitution, which is slow but hard to throw off, and end by Newton on
all unknowns at once.
"""

from __future__ import annotations

from dataclasses import replace
from typing import TypeAlias

import numpy as np
import numpy.typing as npt

from lostwork_plugins.cubic.coexistence import Given, Unknowns, solve
from lostwork_plugins.cubic.parameters import Parameters
from lostwork_plugins.cubic.phase import Substance
from lostwork_plugins.cubic.rachford_rice import vapour_share
from lostwork_plugins.cubic.stability import Stability, log_fugacity, wilson

__all__ = ["Found", "at_quality", "at_temperature_and_pressure"]

Vector: TypeAlias = npt.NDArray[np.float64]
Mask: TypeAlias = npt.NDArray[np.bool_]
Found: TypeAlias = tuple[Unknowns, Mask]

_SUBSTITUTIONS = 12
_PATIENT = 400
_MARCH = 60
_SHORT = 10
_SHORTEST = 3e-3


def at_temperature_and_pressure(
    substance: Substance, T: Vector, p: Vector, z: Vector, unstable: Stability
) -> Found:
    """Split rows that the stability test found unstable; `z` of shape (n, components)."""
    ln_k = np.log(unstable.trial / z)
    ln_k = np.where(unstable.lighter[:, None], ln_k, -ln_k)
    given = Given("T", T), Given("p", p)
    start = _substituted(substance, T, p, z, ln_k, _SUBSTITUTIONS)
    found, done = solve(substance, z, given, start)
    done &= _inside(found.share)
    again = np.flatnonzero(~done)
    if again.size:
        start = _substituted(substance, T[again], p[again], z[again], ln_k[again], _PATIENT)
        here = Given("T", T[again]), Given("p", p[again])
        second, good = solve(substance, z[again], here, start)
        found = merged(found, second, again)
        done[again] = good & _inside(second.share)
    return found, done


def at_quality(
    substance: Substance,
    of: Parameters,
    held: str,
    at: Vector,
    quality: Vector,
    z: Vector,
    *,
    march: bool = True,
) -> Found:
    """Points of a given mass fraction of vapour at given T or p.

    On the branch that is reached from low pressure: of two dew points at one T or p, the one that a
    thin gas meets first.  Rows that are lost from afar are followed up from low pressure, which
    takes long; `march` says whether.
    """
    start = _ideal_start(of, held, at, quality, z)
    start = _walked(substance, of, held, start, quality, z)
    found, done = solve(substance, z, (Given(held, at), Given("quality", quality)), start)
    lost = np.flatnonzero(~done)
    if lost.size and march:
        second, good = _marched(substance, of, held, at[lost], quality[lost], z[lost])
        found = merged(found, second, lost)
        done[lost] = good
    return found, done


def merged(first: Unknowns, second: Unknowns, rows: npt.NDArray[np.intp]) -> Unknowns:
    """Put the rows of `second` into `first`."""
    columns = {}
    for name in ("ln_k", "share", "T", "p"):
        column = getattr(first, name).copy()
        column[rows] = getattr(second, name)
        columns[name] = column
    return replace(first, **columns)


def _inside(share: Vector) -> Mask:
    return np.asarray((share > -1e-12) & (share < 1.0 + 1e-12))


def _substituted(
    substance: Substance, T: Vector, p: Vector, z: Vector, ln_k: Vector, turns: int
) -> Unknowns:
    """Successive substitution at given T and p."""
    share = np.full(T.size, 0.5)
    with np.errstate(all="ignore"):
        for _ in range(turns):
            K = np.exp(ln_k)
            share = vapour_share(z, K)
            x = z / (1.0 + share[:, None] * (K - 1.0))
            y = K * x
            liquid, _ = log_fugacity(substance, T, p, x / x.sum(-1, keepdims=True))
            vapour, _ = log_fugacity(substance, T, p, y / y.sum(-1, keepdims=True))
            following = liquid - vapour
            # A row that has lost its two phases keeps its last ratios.
            ln_k = np.where(np.isfinite(following), following, ln_k)
        share = vapour_share(z, np.exp(ln_k))
    return Unknowns(ln_k, share, T, p)


def _ideal_start(of: Parameters, held: str, at: Vector, quality: Vector, z: Vector) -> Unknowns:
    """Solve T or p for the share by Wilson's ratios; mass stands for amount in this start."""
    other = np.full(at.size, 1e5 if held == "T" else float(z[0] @ of.Tc) * 0.7)
    T, p = (at, other) if held == "T" else (other, at)
    with np.errstate(all="ignore"):
        for _ in range(60):
            ln_k = wilson(of, T, p)
            T, p, moved = _towards_share(of, held, T, p, ln_k, quality, z)
            if not np.any(np.abs(moved) > 1e-6):
                break
        return Unknowns(wilson(of, T, p), quality.copy(), T, p)


def _towards_share(
    of: Parameters, held: str, T: Vector, p: Vector, ln_k: Vector, share: Vector, z: Vector
) -> tuple[Vector, Vector, Vector]:
    """Move the free one of T and p so that the ratios, moving as Wilson's do, give `share`."""
    slope = 5.373 * (1.0 + of.omega) * of.Tc
    total = np.zeros(T.size)
    inverse = 1.0 / T
    for _ in range(8):
        if held == "T":
            now, by = ln_k - total[:, None], -np.ones_like(ln_k)
        else:
            now, by = ln_k - slope * total[:, None], -slope * np.ones_like(ln_k)
        K = np.exp(np.clip(now, -300.0, 300.0))
        below = 1.0 + share[:, None] * (K - 1.0)
        # In logarithms of both ends the balance is nearly a line in ln p and 1/T.
        first = np.log((z * K / below).sum(-1)) - np.log((z / below).sum(-1))
        gain = (z * K * by / below**2 * (1.0 - share[:, None])).sum(-1) / (z * K / below).sum(-1)
        gain += (z * K * by * share[:, None] / below**2).sum(-1) / (z / below).sum(-1)
        step = -first / gain
        bound = 2.0 if held == "T" else 0.2 * inverse
        total += np.clip(step, -bound, bound)
    if held == "T":
        return T, p * np.exp(total), total
    following = np.clip(inverse + total, 0.6 * inverse, 1.6 * inverse)
    return 1.0 / following, p, following / inverse - 1.0


def _walked(
    substance: Substance, of: Parameters, held: str, start: Unknowns, quality: Vector, z: Vector
) -> Unknowns:
    """Substitution in which the free one of T and p follows the ratios."""
    T, p, ln_k, share = start.T, start.p, start.ln_k, quality.copy()
    mass = of.molar_mass
    with np.errstate(all="ignore"):
        for _ in range(_SUBSTITUTIONS):
            K = np.exp(ln_k)
            x = z / (1.0 + share[:, None] * (K - 1.0))
            y = K * x
            x, y = x / x.sum(-1, keepdims=True), y / y.sum(-1, keepdims=True)
            liquid, _ = log_fugacity(substance, T, p, x, root="low")
            vapour, _ = log_fugacity(substance, T, p, y, root="high")
            following = liquid - vapour
            ln_k = np.where(np.isfinite(following), following, ln_k)
            share = quality / (quality + (1.0 - quality) * (y @ mass) / (x @ mass))
            T_next, p_next, _ = _towards_share(of, held, T, p, ln_k, share, z)
            shift = wilson(of, T_next, p_next) - wilson(of, T, p)
            sound = np.isfinite(T_next) & np.isfinite(p_next) & (np.abs(shift).max(-1) < 5.0)
            T, p = np.where(sound, T_next, T), np.where(sound, p_next, p)
            ln_k = np.where(sound[:, None], ln_k + shift, ln_k)
    return Unknowns(ln_k, share, T, p)


def _marched(
    substance: Substance, of: Parameters, held: str, at: Vector, quality: Vector, z: Vector
) -> Found:
    """Follow the line of constant quality from where the substitution works up to the target.

    Each row steps in ln of the held property, extrapolates from its last two points and halves its
    step where Newton fails.
    """
    target = np.log(at)
    here = np.log(0.5 * float(z[0] @ of.Tc) if held == "T" else 2e4) * np.ones(at.size)
    here = np.minimum(here, target - 0.05)
    start = _ideal_start(of, held, np.exp(here), quality, z)
    start = _walked(substance, of, held, start, quality, z)
    given = Given(held, np.exp(here)), Given("quality", quality)
    now, alive = solve(substance, z, given, start)
    before = now
    before_at = here.copy()
    stride = (target - here) / 10.0
    for _ in range(_MARCH):
        short = np.abs(stride) > _SHORTEST * np.abs(target - np.log(at * 0.5))
        rows = np.flatnonzero(alive & (here < target) & short)
        if rows.size == 0:
            break
        following = np.minimum(here[rows] + stride[rows], target[rows])
        known = here[rows] > before_at[rows]
        gap = np.where(known, here[rows] - before_at[rows], 1.0)
        reach = np.where(known, (following - here[rows]) / gap, 0.0)
        X = now.rows(rows).packed()
        guess = X + reach[:, None] * (X - before.rows(rows).packed())
        c = guess.shape[1] - 3
        start = Unknowns(
            guess[:, :c], guess[:, c], np.exp(guess[:, c + 1]), np.exp(guess[:, c + 2])
        )
        given = Given(held, np.exp(following)), Given("quality", quality[rows])
        found, done = solve(substance, z[rows], given, start, most=_SHORT)
        # A leap onto another branch is no step along this one.
        jump = np.abs(found.packed() - guess).max(axis=1)
        done &= jump < 1.0
        good = rows[done]
        before = merged(before, now.rows(good), good)
        before_at[good] = here[good]
        now = merged(now, found.rows(done), good)
        here[good] = following[done]
        stride[good] *= 1.3
        stride[rows[~done]] *= 0.4
    return now, alive & (here >= target)
