"""Two phases of a mixture in equilibrium, by one Newton iteration for every pair of properties.

Unknowns of a row are ln K of each component, the share of vapour by amount, ln T and ln p;
equations are equal fugacities, the balance of Rachford and Rice, and two given properties out of
T, p, the mass fraction of vapour, h and s.  Derivatives come from a complex step (Squire and
Trapp, 1998, SIAM Rev. 40, 110), exact to round-off.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TypeAlias

import numpy as np
import numpy.typing as npt

from lostwork import R
from lostwork_plugins.cubic.phase import Substance

__all__ = ["Coexisting", "Given", "Unknowns", "both_phases", "solve"]

Vector: TypeAlias = npt.NDArray[np.float64]
Values: TypeAlias = npt.NDArray[np.inexact]

_STEP = 1e-40
_MOST = 40
_CONVERGED = 2e-13
_ACCEPTED = 1e-10
# Phases nearer to each other than this are one: the iteration has run into the trivial solution.
_DISTINCT = 1e-3
_LARGEST = (1.5, 0.5, 0.08, 0.4)


@dataclass(frozen=True)
class Unknowns:
    """Rows of unknowns; `ln_k` of shape (n, components), the others (n,)."""

    ln_k: Vector
    share: Vector
    T: Vector
    p: Vector

    def rows(self, chosen: npt.NDArray[np.generic]) -> Unknowns:
        """Give the chosen rows."""
        return Unknowns(self.ln_k[chosen], self.share[chosen], self.T[chosen], self.p[chosen])

    def packed(self) -> Vector:
        """One array of shape (n, components + 3)."""
        return np.column_stack([self.ln_k, self.share, np.log(self.T), np.log(self.p)])


@dataclass(frozen=True)
class Given:
    """A given property ("T", "p", "quality", "h", "s") and its molar or mass-fraction value."""

    name: str
    value: Vector


@dataclass(frozen=True)
class Coexisting:
    """Both phases: compositions, roots and molar properties of liquid and vapour, and the mixture.

    `quality` is the mass fraction of the vapour; v, h, s are molar, of the whole.
    """

    x: Values
    y: Values
    Z_liquid: Values
    Z_vapour: Values
    quality: Values
    v: Values
    h: Values
    s: Values
    imbalance: Values
    """ln of the fugacity of each component in the vapour over that in the liquid."""


def solve(
    substance: Substance,
    z: Vector,
    given: tuple[Given, Given],
    start: Unknowns,
    *,
    most: int = _MOST,
) -> tuple[Unknowns, npt.NDArray[np.bool_]]:
    """Solve every row from its start; also tells which rows have converged to two phases.

    Given T and p the phases may be two liquids; with any other pair the first phase is held on the
    root of a liquid and the second on that of a vapour.
    """
    X = start.packed()
    size, width = X.shape
    done = np.zeros(size, dtype=bool)
    active = np.flatnonzero(np.isfinite(X).all(axis=1))
    for _ in range(most):
        if active.size == 0:
            break
        here = tuple(Given(one.name, one.value[active]) for one in given)
        F, J = _linearised(substance, z[active], here, X[active])
        with np.errstate(invalid="ignore"):
            error = np.abs(F).max(axis=1)
        step = _solved(J, -F)
        sound = np.isfinite(error) & np.isfinite(step).all(axis=1)
        step = _shortened(np.where(sound[:, None], step, 0.0))
        X[active] += step
        small = np.abs(step).max(axis=1) < 1e-13
        ready = sound & ((error < _CONVERGED) | (small & (error < _ACCEPTED)))
        done[active[ready]] = True
        active = active[sound & ~ready]
    # What still creeps has met its floor of round-off, or has not converged.
    if active.size:
        here = tuple(Given(one.name, one.value[active]) for one in given)
        F, _ = _linearised(substance, z[active], here, X[active])
        with np.errstate(invalid="ignore"):
            done[active] = np.abs(F).max(axis=1) < _ACCEPTED
    c = width - 3
    with np.errstate(over="ignore"):
        found = Unknowns(X[:, :c], X[:, c], np.exp(X[:, c + 1]), np.exp(X[:, c + 2]))
    return found, done & (np.abs(found.ln_k).max(axis=1) > _DISTINCT)


def both_phases(substance: Substance, z: Vector, at: Unknowns) -> Coexisting:
    """Phases and properties of solved unknowns."""
    with np.errstate(all="ignore"):
        real = _roots(substance, z, at.ln_k, at.share, at.T, at.p)
        return _pair(substance, z, at.ln_k, at.share, at.T, at.p, real)


def compositions(z: Vector, ln_k: Values, share: Values) -> tuple[Values, Values]:
    """Mole fractions of liquid and vapour."""
    K = np.exp(ln_k)
    x = z / (1.0 + share[:, None] * (K - 1.0))
    y = K * x
    return x / x.sum(-1, keepdims=True), y / y.sum(-1, keepdims=True)


def _roots(
    substance: Substance,
    z: Vector,
    ln_k: Vector,
    share: Vector,
    T: Vector,
    p: Vector,
    *,
    outer: bool = False,
) -> tuple[Vector, Vector]:
    """Roots of both phases: those of least Gibbs energy, or the outer ones whatever it says."""
    x, y = compositions(z, ln_k, share)
    liquid, low, _ = substance.stable_root(T, p, substance.cubic.attraction(T, x))
    vapour, _, high = substance.stable_root(T, p, substance.cubic.attraction(T, y))
    return (low, high) if outer else (liquid, vapour)


def _pair(
    substance: Substance,
    z: Vector,
    ln_k: Values,
    share: Values,
    T: Values,
    p: Values,
    real_roots: tuple[Vector, Vector],
    *,
    caloric: bool = True,
) -> Coexisting:
    cubic = substance.cubic
    x, y = compositions(z, ln_k, share)
    of_x, of_y = cubic.attraction(T, x), cubic.attraction(T, y)
    Z_x = substance.carried(T, p, real_roots[0], of_x)
    Z_y = substance.carried(T, p, real_roots[1], of_y)
    imbalance = ln_k + cubic.fugacity(T, p, Z_y, y, of_y) - cubic.fugacity(T, p, Z_x, x, of_x)
    M_x, M_y = x @ substance.molar_mass, y @ substance.molar_mass
    quality = share * M_y / ((1.0 - share) * M_x + share * M_y)
    if not caloric:
        return Coexisting(x, y, Z_x, Z_y, quality, T, T, T, imbalance)
    liquid = substance.molar(T, p, x, Z_x, of_x)
    vapour = substance.molar(T, p, y, Z_y, of_y)
    v, h, s = (
        (1.0 - share) * a + share * b
        for a, b in ((liquid.v, vapour.v), (liquid.h, vapour.h), (liquid.s, vapour.s))
    )
    return Coexisting(x, y, Z_x, Z_y, quality, v, h, s, imbalance)


def _linearised(
    substance: Substance, z: Vector, given: tuple[Given, ...], X: Vector
) -> tuple[Vector, Vector]:
    """Residuals (n, m) and their Jacobian (n, m, m)."""
    size, width = X.shape
    c = width - 3
    with np.errstate(all="ignore"):
        outer = {one.name for one in given} != {"T", "p"}
        T, p = np.exp(X[:, c + 1]), np.exp(X[:, c + 2])
        roots = _roots(substance, z, X[:, :c], X[:, c], T, p, outer=outer)
        stepped = X[None, :, :] + 1j * _STEP * np.eye(width)[:, None, :]
        flat = stepped.reshape(width * size, width)
        T, p = np.exp(flat[:, c + 1]), np.exp(flat[:, c + 2])
        tiled = np.tile(roots[0], width), np.tile(roots[1], width)
        caloric = any(one.name in ("h", "s") for one in given)
        feed = np.tile(z, (width, 1))
        pair = _pair(substance, feed, flat[:, :c], flat[:, c], T, p, tiled, caloric=caloric)
        K = np.exp(flat[:, :c])
        balance = (feed * (K - 1.0) / (1.0 + flat[:, c : c + 1] * (K - 1.0))).sum(-1)
        closures = [_closure(one, pair, flat, c, width) for one in given]
        F = np.column_stack([pair.imbalance, balance, *closures]).reshape(width, size, width)
    return F[0].real.copy(), np.moveaxis(F.imag / _STEP, 0, 2)


def _closure(given: Given, pair: Coexisting, flat: Values, c: int, copies: int) -> Values:
    """Residual of one given property, scaled to order one."""
    target = np.tile(given.value, copies)
    if given.name == "T":
        return np.asarray(flat[:, c + 1] - np.log(target))
    if given.name == "p":
        return np.asarray(flat[:, c + 2] - np.log(target))
    if given.name == "quality":
        return np.asarray(pair.quality - target)
    if given.name == "h":
        return np.asarray((pair.h - target) / (R * np.exp(flat[:, c + 1].real)))
    return np.asarray((pair.s - target) / R)


def _solved(J: Vector, F: Vector) -> Vector:
    """Solve row by row; a singular row gets NaN and does not spoil the others."""
    sound = np.isfinite(J).all(axis=(1, 2)) & np.isfinite(F).all(axis=1)
    step = np.full(F.shape, np.nan)
    try:
        step[sound] = np.linalg.solve(J[sound], F[sound][:, :, None])[:, :, 0]
    except np.linalg.LinAlgError:
        for row in np.flatnonzero(sound):
            try:
                step[row] = np.linalg.solve(J[row], F[row])
            except np.linalg.LinAlgError:
                continue
    return step


def _shortened(step: Vector) -> Vector:
    """Shorten each step as a whole until no unknown moves further than its largest stride."""
    c = step.shape[1] - 3
    bounds = np.array([_LARGEST[0]] * c + list(_LARGEST[1:]))
    excess = np.max(np.abs(step) / bounds, axis=1)
    return np.asarray(step / np.maximum(1.0, excess)[:, None])
