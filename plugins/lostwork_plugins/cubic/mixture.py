"""A mixture: single phase, two phases and what lies on their border, all rows at once."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any, TypeAlias

import numpy as np
import numpy.typing as npt

from lostwork import (
    Column,
    Columns,
    Critical,
    FluidSpec,
    Limits,
    Pair,
    PhaseSplit,
    PropertyModel,
    R,
    StateNotFound,
)
from lostwork_plugins.cubic.borders import Borders
from lostwork_plugins.cubic.bracketed import solve_by_values, solve_rising
from lostwork_plugins.cubic.coexistence import Given, Unknowns, both_phases, solve
from lostwork_plugins.cubic.flash import at_quality, at_temperature_and_pressure
from lostwork_plugins.cubic.parameters import Parameters
from lostwork_plugins.cubic.phase import Substance
from lostwork_plugins.cubic.stability import Stability, stability_of
from lostwork_plugins.cubic.table import Rows, Table, answer

__all__ = ["MixtureModel"]

Vector: TypeAlias = npt.NDArray[np.float64]
Mask: TypeAlias = npt.NDArray[np.bool_]

# A phase with less room than this many covolumes is a liquid (Pedersen and Christensen, 2007).
_LIQUID_ROOM = 1.75

_TWO_LIQUIDS = "the equation splits this mixture into two liquids here, which this model leaves out"
_NO_SPLIT = "the equation gives two phases here, but their compositions could not be found"
_NO_SATURATION = (
    "no state of this quality was found at this {name}: it lies beyond the critical region, or the "
    "mixture has no such bubble or dew point"
)


class MixtureModel(PropertyModel):
    """Several components of fixed overall composition; see `PropertyModel` for the rules."""

    native_pairs: frozenset[Pair] = frozenset(
        {("T", "p"), ("p", "h"), ("p", "s"), ("T", "quality"), ("p", "quality")}
    )
    two_phase = True
    # Measured: 2e-11 in single phase, 1e-9 across domes, narrow ones included.
    entropy_noise = 1e-8

    def __init__(
        self,
        substance: Substance,
        numbers: Parameters,
        limits: Limits,
        notes: tuple[str, ...],
        recipe: tuple[FluidSpec, Mapping[str, Any]],
    ) -> None:
        self.limits = limits
        self.notes = notes
        self._substance = substance
        self._numbers = numbers
        self._recipe = recipe
        self._z = np.array(recipe[0].mole_fractions)
        self._z = self._z / self._z.sum()
        self.molar_mass = float(self._z @ substance.molar_mass)
        self._borders = Borders(substance, numbers, self._z)

    def __reduce__(self) -> tuple[Any, ...]:
        from lostwork_plugins.cubic.backend import reopen  # noqa: PLC0415

        spec, options = self._recipe
        return reopen, (spec, dict(options))

    def columns(self, pair: Pair, x: Column, y: Column) -> Columns:
        """State columns for two columns of `pair`."""
        return answer(self.native_pairs, self.limits, self._fill, pair, x, y)

    def ideal_gas_limit(self) -> tuple[float, float]:
        """Zero of the enthalpy, and the entropy of mixing at 298.15 K and 1 bar."""
        mixing = -R * float(self._z @ np.log(self._z))
        return 0.0, mixing / self.molar_mass

    def critical(self) -> Critical:
        """Pseudo-critical point by the rule of Kay (1936): means of T and p over the amounts."""
        T, p = float(self._z @ self._numbers.Tc), float(self._z @ self._numbers.pc)
        return Critical(T, p, self._substance.cubic.form.Z_critical * R * T / p / self.molar_mass)

    def split(self, T: float, p: float) -> PhaseSplit:
        """Phases at T (K) and p (Pa) inside the dome.

        Raises
        ------
        StateNotFound
            One phase only, two liquids, or T or p outside the limits.
        """
        columns = self.columns(("T", "p"), T, p)
        given = f"T = {T:.6g} K, p = {p:.6g} Pa"
        fluid = " + ".join(part.name for part in self._recipe[0].components)
        if columns.failed:
            raise StateNotFound(fluid, given, columns.failed[0])
        if np.isnan(columns.quality):
            raise StateNotFound(fluid, given, "there is one phase only")
        at_T, at_p = np.array([T]), np.array([p])
        found, _ = self._split(at_T, at_p, self._stability(at_T, at_p))
        pair = both_phases(self._substance, self._feed(1), found)
        share = min(max(float(found.share[0]), 0.0), 1.0)
        return PhaseSplit(
            share, tuple(map(float, pair.x[0].real)), tuple(map(float, pair.y[0].real))
        )

    # --- one pair of properties each ------------------------------------------------

    def _fill(self, pair: Pair, table: Table, x: Vector, y: Vector) -> None:
        rows = table.rows
        x, y = x[rows], y[rows]
        if pair == ("T", "p"):
            self._at_temperature_and_pressure(table, rows, x, y)
        elif pair[1] == "quality":
            held = pair[0]
            found, done = at_quality(self._substance, self._numbers, held, x, y, self._feed(x.size))
            self._wet(table, rows[done], found.rows(done), y[done])
            table.fail(rows, _NO_SATURATION.format(name=held))
        else:
            self._at_pressure(table, rows, pair[1], x, y)

    def _at_temperature_and_pressure(self, table: Table, rows: Rows, T: Vector, p: Vector) -> None:
        test = self._stability(T, p)
        single = ~test.unstable
        self._dry(table, rows[single], T[single], p[single])
        wet = np.flatnonzero(test.unstable)
        if wet.size:
            found, done = self._split(T[wet], p[wet], _rows_of(test, wet))
            self._wet(table, rows[wet[done]], found.rows(done))
            table.fail(rows[wet[~done]], _NO_SPLIT)

    def _at_pressure(self, table: Table, rows: Rows, name: str, p: Vector, y: Vector) -> None:
        """(p, h) and (p, s): as one phase, else between the borders of the dome, else by trial."""
        T = self._single_temperature(name, p, y)
        found = np.flatnonzero(np.isfinite(T))
        if found.size:
            # h and s rise with T, so a stable phase that has them is the only state that does.
            sound = found[~self._stability(T[found], p[found]).unstable]
            self._dry(table, rows[sound], T[sound], p[sound])
        self._between_borders(table, rows, name, p, y)
        self._by_trial(table, rows, name, p, y)

    def _between_borders(self, table: Table, rows: Rows, name: str, p: Vector, y: Vector) -> None:
        """Newton on both phases from between the bubble and the dew point."""
        left = np.flatnonzero(table.open[rows])
        if left.size == 0:
            return
        bubble, dew, known = self._borders.at(p[left])
        at_bubble, at_dew = self._molar_of(name, bubble), self._molar_of(name, dew)
        molar = y[left] * self.molar_mass
        with np.errstate(invalid="ignore"):
            inside = np.flatnonzero(known & (molar >= at_bubble) & (molar <= at_dew))
        if inside.size == 0:
            return
        start = _between(
            bubble.rows(inside), dew.rows(inside), at_bubble[inside], at_dew[inside], molar[inside]
        )
        given = Given("p", p[left][inside]), Given(name, molar[inside])
        both, done = solve(self._substance, self._feed(inside.size), given, start)
        done &= (both.share > -1e-9) & (both.share < 1.0 + 1e-9)
        done &= ~self._two_liquids(both)
        self._wet(table, rows[left[inside[done]]], both.rows(done))

    def _by_trial(self, table: Table, rows: Rows, name: str, p: Vector, y: Vector) -> None:
        """Trial of T with the phase equilibrium at each; slow, and sure."""
        left = np.flatnonzero(table.open[rows])
        if left.size == 0:
            return

        def value(T: Vector, of: Rows) -> Vector:
            return self._equilibrium_value(name, T, p[left][of])

        ends = (np.full(left.size, T) for T in (self.limits.T_min, self.limits.T_max))
        T = solve_by_values(value, y[left], *ends)
        found = np.flatnonzero(np.isfinite(T))
        if found.size:
            self._at_temperature_and_pressure(table, rows[left[found]], T[found], p[left[found]])
        reason = (
            f"no state of one vapour and one liquid between {self.limits.T_min:.6g} and "
            f"{self.limits.T_max:.6g} K has this {name}"
        )
        table.fail(rows, reason)

    def _equilibrium_value(self, name: str, T: Vector, p: Vector) -> Vector:
        """Enthalpy or entropy per kg at T and p in one phase or two, two liquids included."""
        test = self._stability(T, p)
        _, h, s = self._single(T, p)
        value = (h if name == "h" else s).copy()
        wet = np.flatnonzero(test.unstable)
        if wet.size:
            found, done = self._split(T[wet], p[wet], _rows_of(test, wet))
            value[wet] = np.where(done, self._molar_of(name, found) / self.molar_mass, np.nan)
        return value

    # --- what they stand on ---------------------------------------------------------

    def _feed(self, size: int) -> Vector:
        return np.tile(self._z, (size, 1))

    def _stability(self, T: Vector, p: Vector) -> Stability:
        return stability_of(self._substance, self._numbers, T, p, self._feed(T.size))

    def _split(self, T: Vector, p: Vector, test: Stability) -> tuple[Unknowns, Mask]:
        return at_temperature_and_pressure(self._substance, T, p, self._feed(T.size), test)

    def _molar_of(self, name: str, at: Unknowns) -> Vector:
        with np.errstate(all="ignore"):
            pair = both_phases(self._substance, self._feed(at.T.size), at)
        return np.asarray((pair.h if name == "h" else pair.s).real)

    def _single_temperature(self, name: str, p: Vector, y: Vector) -> Vector:
        """T at which the whole as one phase has this h or s; stable or not."""

        def value_and_slope(T: Vector, of: Rows) -> tuple[Vector, Vector]:
            attraction = self._substance.cubic.attraction(T, self._z)
            Z, _, _ = self._substance.stable_root(T, p[of], attraction)
            cp = self._substance.heat_capacity(T, p[of], self._z, Z, attraction) / self.molar_mass
            value = self._substance.named(name, T, p[of], self._z, Z, attraction)
            return np.real(value) / self.molar_mass, cp if name == "h" else cp / T

        ends = (np.full(p.size, T) for T in (self.limits.T_min, self.limits.T_max))
        return solve_rising(value_and_slope, y, *ends)

    def _single(self, T: Vector, p: Vector) -> tuple[Vector, Vector, Vector]:
        """Volume, enthalpy and entropy per kg of the whole as one phase."""
        of = self._substance.cubic.attraction(T, self._z)
        Z, _, _ = self._substance.stable_root(T, p, of)
        molar = self._substance.molar(T, p, self._z, Z, of)
        v, h, s = (np.asarray(c / self.molar_mass) for c in (molar.v, molar.h, molar.s))
        return v, h, s

    def _two_liquids(self, at: Unknowns) -> Mask:
        """Whether the lighter phase is a liquid, or the heavier one would split again."""
        pair = both_phases(self._substance, self._feed(at.T.size), at)
        x, y, Z_vapour = pair.x.real, pair.y.real, pair.Z_vapour.real
        room = Z_vapour * R * at.T / at.p / (y @ self._substance.cubic.b)
        liquids = ~(room >= _LIQUID_ROOM)
        rows = np.flatnonzero(~liquids)
        if rows.size:
            # An amount below the smallest float would have no logarithm.
            heavier = np.maximum(x[rows], 1e-300)
            third = stability_of(
                self._substance, self._numbers, at.T[rows], at.p[rows], heavier, pure_only=True
            )
            liquids[rows] = third.unstable
        return np.asarray(liquids)

    def _dry(self, table: Table, rows: Rows, T: Vector, p: Vector) -> None:
        if rows.size:
            table.put(rows, T, p, *self._single(T, p))

    def _wet(self, table: Table, rows: Rows, at: Unknowns, quality: Vector | None = None) -> None:
        """Fill rows of two phases, after a look for a second liquid."""
        if rows.size == 0:
            return
        pair = both_phases(self._substance, self._feed(rows.size), at)
        liquids = self._two_liquids(at)
        table.fail(rows[liquids], _TWO_LIQUIDS)
        share = pair.quality.real if quality is None else quality
        # A row on the line itself comes out within round-off of 0 or 1.
        share = np.where(
            np.abs(share) < 1e-12, 0.0, np.where(np.abs(share - 1.0) < 1e-12, 1.0, share)
        )
        keep = ~liquids
        v, h, s = (c.real / self.molar_mass for c in (pair.v, pair.h, pair.s))
        table.put(rows[keep], at.T[keep], at.p[keep], v[keep], h[keep], s[keep], share[keep])


def _rows_of(test: Stability, rows: Rows) -> Stability:
    return Stability(test.unstable[rows], test.trial[rows], test.lighter[rows])


def _between(
    bubble: Unknowns, dew: Unknowns, at_bubble: Vector, at_dew: Vector, target: Vector
) -> Unknowns:
    """Start of a row in the dome, between its bubble and its dew point."""
    with np.errstate(invalid="ignore", divide="ignore"):
        share = np.clip((target - at_bubble) / (at_dew - at_bubble), 0.0, 1.0)
    share = np.where(np.isfinite(share), share, 0.5)
    ln_k = (1.0 - share)[:, None] * bubble.ln_k + share[:, None] * dew.ln_k
    return Unknowns(ln_k, share, (1.0 - share) * bubble.T + share * dew.T, bubble.p)
