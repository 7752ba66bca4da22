"""Whether a phase of a mixture is stable: the tangent plane test of Michelsen.

Michelsen (1982, Fluid Phase Equilibria 9, 1).  Trial phases start from the vapour and the liquid
that Wilson's ratios give and from every component nearly pure, which finds a second liquid too, and
go by successive substitution with a step along the dominant eigenvalue now and then.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TypeAlias

import numpy as np
import numpy.typing as npt

from lostwork_plugins.cubic.parameters import Parameters
from lostwork_plugins.cubic.phase import Substance

__all__ = ["Stability", "log_fugacity", "stability_of", "wilson"]

Vector: TypeAlias = npt.NDArray[np.float64]
Mask: TypeAlias = npt.NDArray[np.bool_]

_UNSTABLE = -1e-11
_TRIVIAL = 1e-3
_CONVERGED = 1e-9
_MOST = 300
_EVERY = 4


def wilson(of: Parameters, T: Vector, p: Vector) -> Vector:
    """Logarithm of Wilson's equilibrium ratios y/x, shape (n, components)."""
    slope = 5.373 * (1.0 + of.omega)
    return np.asarray(np.log(of.pc / p[:, None]) + slope * (1.0 - of.Tc / T[:, None]))


def log_fugacity(
    substance: Substance, T: Vector, p: Vector, x: Vector, *, root: str = "stable"
) -> tuple[Vector, Vector]:
    """Fugacity coefficients (their logarithm) and the root they belong to.

    `root` is "stable" for the one of least Gibbs energy, "low" for liquid or "high" for vapour.
    """
    of = substance.cubic.attraction(T, x)
    if root == "stable":
        Z, _, _ = substance.stable_root(T, p, of)
    else:
        low, high = substance.roots(T, p, of)
        Z = low if root == "low" else high
    return np.asarray(substance.cubic.fugacity(T, p, Z, x, of), dtype=np.float64), Z


@dataclass(frozen=True)
class Stability:
    """Outcome of the test: which rows are unstable, the trial that shows it, and its volume.

    `lighter` is true where the trial phase is less dense than the tested one.
    """

    unstable: Mask
    trial: Vector
    lighter: Mask


def stability_of(
    substance: Substance,
    of: Parameters,
    T: Vector,
    p: Vector,
    z: Vector,
    *,
    pure_only: bool = False,
) -> Stability:
    """Test the phase of composition `z`, shape (n, components), at T and p, shape (n,)."""
    log_phi, Z_feed = log_fugacity(substance, T, p, z)
    tangent = np.log(z) + log_phi
    starts = _starts(of, T, p, z, pure_only)
    count, size, width = starts.shape
    log_Y = starts.reshape(count * size, width)
    row = np.tile(np.arange(size), count)
    distance = np.zeros(count * size)
    trial, Z_trial = np.tile(z, (count, 1)), np.tile(Z_feed, count)
    active = np.arange(count * size)
    last = np.zeros_like(log_Y)
    for turn in range(1, _MOST + 1):
        at = row[active]
        Y = np.exp(log_Y[active])
        W = Y / Y.sum(-1, keepdims=True)
        log_phi, Z = log_fugacity(substance, T[at], p[at], W)
        tpd = (W * (np.log(W) + log_phi - tangent[at])).sum(-1)
        distance[active], trial[active], Z_trial[active] = tpd, W, Z
        step = tangent[at] - log_phi - log_Y[active]
        moved = step
        if turn % _EVERY == 0:
            moved = step * _stride(step, last[active])
        log_Y[active] += moved
        last[active] = step
        trivial = np.abs(np.log(W / z[at])).max(-1) < _TRIVIAL
        proven = np.zeros(size, dtype=bool)
        proven[at[tpd < _UNSTABLE]] = True
        going = (np.abs(step).max(-1) > _CONVERGED) & ~trivial & ~proven[at]
        active = active[going]
        if active.size == 0:
            break
    table = distance.reshape(count, size)
    best = table.argmin(axis=0)
    every = np.arange(size)
    chosen = trial.reshape(count, size, width)[best, every]
    return Stability(
        table[best, every] < _UNSTABLE,
        chosen,
        Z_trial.reshape(count, size)[best, every] > Z_feed,
    )


def _starts(of: Parameters, T: Vector, p: Vector, z: Vector, pure_only: bool) -> Vector:
    """Trial compositions (their logarithm), shape (trials, n, components)."""
    width = z.shape[1]
    log_z = np.log(z)
    nearly = np.log(0.01 / (width - 1) + (0.99 - 0.01 / (width - 1)) * np.eye(width))
    starts = [np.broadcast_to(one, z.shape) for one in nearly]
    if not pure_only:
        ln_k = wilson(of, T, p)
        starts = [log_z + ln_k, log_z - ln_k, *starts]
    # A trial amount is a weight: only its direction counts, and its size must not overflow.
    return np.array([one - one.max(-1, keepdims=True) for one in starts])


def _stride(step: Vector, last: Vector) -> Vector:
    """Length of a step along the dominant eigenvalue (Orbach and Crowe, 1971)."""
    with np.errstate(divide="ignore", invalid="ignore"):
        eigenvalue = (step * last).sum(-1) / (last * last).sum(-1)
        stride = 1.0 / (1.0 - eigenvalue)
    return np.where((eigenvalue > 0.0) & (eigenvalue < 0.95), stride, 1.0)[:, None]
