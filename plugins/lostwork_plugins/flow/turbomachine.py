"""End states of adiabatic machines, for any equation of state.

Isentropic: the state at the outlet pressure and the inlet entropy.

Polytropic, of constant small-stage efficiency: every stage obeys dh = v dp / eta (compression) or
dh = eta v dp (expansion).  With T ds = dh - v dp both become

    ds / d(ln p) = k p v / T,      k = 1/eta - 1  or  eta - 1.

p v / T hardly changes along the path (it is R of an ideal gas), so the integral over entropy
converges far quicker than one over enthalpy.  It is taken by Gauss-Legendre collocation: the
entropies at all nodes are corrected together until they stand still.  Where the path crosses the
edge of the two-phase region, p v / T has a kink; the crossing is located and made the border of a
panel, so that the order is kept (the small-stage definition: Dixon and Hall, Fluid Mechanics and
Thermodynamics of Turbomachinery, ch. 1; Huntington, J. Eng. Gas Turbines Power 107, 1985, 872).
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

import lostwork as lw
from lostwork_plugins.flow.rows import Refusals, point_or_array
from lostwork_plugins.flow.step import Inflow

__all__ = ["isentropic_enthalpy", "polytropic_entropy"]

_Array = npt.NDArray[np.float64]

_NODES = 8
_MOST_CORRECTIONS = 60
_STANDSTILL = 1e-13
_CROSSING_HALVINGS = 26
_PANEL_LENGTH = 2.4


def isentropic_enthalpy(refusals: Refusals, feed: Inflow, p_out: lw.Column) -> lw.Column:
    """Enthalpy, J/kg, at the end of an isentropic change to `p_out` (Pa)."""
    h: lw.Column = refusals.state(feed.fluid, ("p", "s"), p_out, feed.s).si.h
    return h


def polytropic_entropy(
    refusals: Refusals, feed: Inflow, p_out: lw.Column, stage_factor: lw.Column
) -> lw.Column:
    """Entropy, J/kg/K, at the end of a polytropic change of constant small-stage efficiency.

    Parameters
    ----------
    refusals
        Of the step; its rows and those that fail on the way end as NaN.
    feed
        The stream that enters.
    p_out
        Outlet pressure, Pa.
    stage_factor
        k above: 1/eta - 1 for compression, eta - 1 for expansion.
    """
    p_in, p_end, s_in, k = np.broadcast_arrays(
        *(np.asarray(x, dtype=np.float64) for x in (feed.p, p_out, feed.s, stage_factor))
    )
    path = _Path(refusals, feed.fluid, np.log(p_in), np.log(p_end), s_in, k)
    end = path.end()
    refusals.add_rows(path.reasons, p_in.shape)
    return point_or_array(end)


class _Path:
    """The path of every row, as entropies at the nodes of its panels; nodes run along axis 0."""

    def __init__(
        self,
        refusals: Refusals,
        fluid: lw.Fluid,
        start: _Array,
        stop: _Array,
        s_in: _Array,
        k: _Array,
    ) -> None:
        self._refusals, self._fluid = refusals, fluid
        self._start, self._stop, self._s_in, self._k = start, stop, s_in, k
        self.reasons: dict[int, str] = {}
        """Why a row failed on the way, by its flat index."""

    def end(self) -> _Array:
        """Entropy at the end."""
        span = float(np.nanmax(np.abs(self._stop - self._start), initial=0.0))
        panels = max(1, int(np.ceil(span / _PANEL_LENGTH)))
        share = np.linspace(0.0, 1.0, panels + 1).reshape(-1, *(1,) * self._start.ndim)
        borders = self._start + share * (self._stop - self._start)
        log_p, s, wet, end = self._follow(borders)
        crossings = self._crossings(log_p, s, wet)
        if crossings is None:
            return end
        # Sorted along the path, so that every crossing is a border between two panels.
        direction = np.where(self._stop >= self._start, 1.0, -1.0)
        refined = np.sort(np.concatenate([borders, crossings]) * direction, axis=0) * direction
        return self._follow(refined)[3]

    def _follow(self, borders: _Array) -> tuple[_Array, _Array, npt.NDArray[np.bool_], _Array]:
        """Solve all panels together: nodes, their entropies, whether wet, and the end."""
        places, weights, cumulative = _collocation()
        ones = (1,) * self._start.ndim
        lengths = np.diff(borders, axis=0)
        panels = lengths.shape[0]
        log_p = borders[:-1, None] + places.reshape(1, -1, *ones) * lengths[:, None]
        s = np.broadcast_to(self._s_in, log_p.shape).copy()
        end = self._s_in
        for _ in range(_MOST_CORRECTIONS):
            # The refusals speak for rows; the nodes of a row share them by broadcasting.
            state = self._refusals.state(self._fluid, ("p", "s"), np.exp(log_p), s)
            for place, reason in state.failed.items():
                # The nodes run along the first axes, so a row is what is left of the index.
                row = place % max(self._start.size, 1)
                self.reasons.setdefault(row, f"the polytropic path leaves the model: {reason}")
            slope = self._k * state.si.p * state.si.v / state.si.T
            within = np.einsum("ij,pj...->pi...", cumulative, slope) * lengths[:, None]
            whole = np.einsum("j,pj...->p...", weights, slope) * lengths
            before = np.concatenate([np.zeros_like(whole[:1]), np.cumsum(whole, axis=0)])
            corrected = self._s_in + before[:-1, None] + within
            moved = np.abs(corrected - s)
            size = np.abs(slope) + np.abs(self._s_in)
            s, end = corrected, self._s_in + before[-1]
            with np.errstate(invalid="ignore"):
                if not np.any(moved > _STANDSTILL * size):
                    break
        flat = (panels * _NODES, *self._start.shape)
        wet = np.isfinite(state.si.quality)
        return log_p.reshape(flat), s.reshape(flat), np.reshape(wet, flat), end

    def _crossings(self, log_p: _Array, s: _Array, wet: npt.NDArray[np.bool_]) -> _Array | None:
        """Where each row enters or leaves the two-phase region; ``None`` if no row does.

        At most two crossings a row are found; a row with fewer repeats its start, which makes an
        empty panel.
        """
        changes = wet[1:] != wet[:-1]
        if not self._fluid.knows_two_phases or not changes.any():
            return None
        order = np.cumsum(changes, axis=0)
        found = []
        for which in (1, 2):
            here = changes & (order == which)
            has = here.any(axis=0)
            if not has.any():
                break
            at = np.argmax(here, axis=0)[None]
            near = [np.take_along_axis(a, at, axis=0)[0] for a in (log_p, s)]
            far = [np.take_along_axis(a, at + 1, axis=0)[0] for a in (log_p, s)]
            wet_near = np.take_along_axis(wet, at, axis=0)[0]
            found.append(np.where(has, self._bisected(near, far, wet_near), self._start))
        return np.stack(found)

    def _bisected(
        self, near: list[_Array], far: list[_Array], wet_near: npt.NDArray[np.bool_]
    ) -> _Array:
        low, high = np.zeros_like(near[0]), np.ones_like(near[0])
        for _ in range(_CROSSING_HALVINGS):
            middle = 0.5 * (low + high)
            log_p = near[0] + middle * (far[0] - near[0])
            s = near[1] + middle * (far[1] - near[1])
            state = self._refusals.state(self._fluid, ("p", "s"), np.exp(log_p), s)
            same = np.isfinite(state.si.quality) == wet_near
            low, high = np.where(same, middle, low), np.where(same, high, middle)
        return np.asarray(near[0] + 0.5 * (low + high) * (far[0] - near[0]))


def _collocation() -> tuple[_Array, _Array, _Array]:
    """Gauss-Legendre places and weights on 0 to 1, and the integrals from 0 up to each place."""
    x, w = np.polynomial.legendre.leggauss(_NODES)
    places, weights = 0.5 * (x + 1.0), 0.5 * w
    cumulative = np.empty((_NODES, _NODES))
    for j in range(_NODES):
        others = np.delete(places, j)
        lagrange = np.poly1d(others, r=True) / float(np.prod(places[j] - others))
        integral = lagrange.integ()
        cumulative[:, j] = integral(places) - integral(0.0)
    return places, weights, cumulative
