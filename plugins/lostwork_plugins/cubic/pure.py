"""A pure fluid: single phase, saturation and dome by the cubic equation, all rows at once."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any, TypeAlias

import numpy as np
import numpy.typing as npt

from lostwork import Column, Columns, Critical, FluidSpec, Limits, Pair, PropertyModel, R
from lostwork_plugins.cubic.bracketed import solve_rising
from lostwork_plugins.cubic.equation import Attraction
from lostwork_plugins.cubic.phase import Substance
from lostwork_plugins.cubic.saturation import Saturated, Saturation
from lostwork_plugins.cubic.table import Rows, Table, answer

__all__ = ["PureModel"]

Vector: TypeAlias = npt.NDArray[np.float64]

_ONE = np.ones(1)
# Within this fraction of the saturation pressure T and p do not tell liquid from vapour.
SATURATION_WIDTH = 1e-6
_SATURATED = (
    "at T = {T:.9g} K the saturation pressure is {p:.9g} Pa, so T and p do not fix the state: "
    "give the quality, or h with p"
)
_NO_SATURATION = "there is no saturation there: the critical point is {T:.6g} K and {p:.6g} Pa"


class PureModel(PropertyModel):
    """One component; see `PropertyModel` for the rules."""

    native_pairs: frozenset[Pair] = frozenset(
        {("T", "p"), ("T", "v"), ("p", "h"), ("p", "s"), ("T", "quality"), ("p", "quality")}
    )
    two_phase = True
    # Measured: 7e-11 in single phase and after (p, h) and (p, s), 2e-9 along saturation.
    entropy_noise = 1e-8

    def __init__(
        self,
        substance: Substance,
        critical: tuple[float, float],
        limits: Limits,
        notes: tuple[str, ...],
        recipe: tuple[FluidSpec, Mapping[str, Any]],
    ) -> None:
        self.molar_mass = float(substance.molar_mass[0])
        self.limits = limits
        self.notes = notes
        self._substance = substance
        self._Tc, self._pc = critical
        self._saturation = Saturation(substance, *critical)
        self._recipe = recipe

    def __reduce__(self) -> tuple[Any, ...]:
        from lostwork_plugins.cubic.backend import reopen  # noqa: PLC0415

        spec, options = self._recipe
        return reopen, (spec, dict(options))

    def columns(self, pair: Pair, x: Column, y: Column) -> Columns:
        """State columns for two columns of `pair`."""
        return answer(self.native_pairs, self.limits, self._fill, pair, x, y)

    def ideal_gas_limit(self) -> tuple[float, float]:
        """Enthalpy and entropy at 298.15 K and 1 bar: the zero of this model."""
        return 0.0, 0.0

    def critical(self) -> Critical:
        """Critical point of the equation; its volume is the equation's, not the measured one."""
        v = self._substance.cubic.form.Z_critical * R * self._Tc / self._pc / self.molar_mass
        return Critical(self._Tc, self._pc, v)

    def _fill(self, pair: Pair, table: Table, x: Vector, y: Vector) -> None:
        rows = table.rows
        x, y = x[rows], y[rows]
        if pair == ("T", "p"):
            self._at_temperature_and_pressure(table, rows, x, y)
        elif pair == ("T", "v"):
            self._at_temperature_and_volume(table, rows, x, y)
        elif pair[1] == "quality":
            at = self._saturation.at_temperature if pair[0] == "T" else self._saturation.at_pressure
            self._wet(table, rows, at(x), quality=y)
            table.fail(rows, _NO_SATURATION.format(T=self._Tc, p=self._pc))
        else:
            self._at_pressure(table, rows, pair[1], x, y)

    def _at_temperature_and_pressure(self, table: Table, rows: Rows, T: Vector, p: Vector) -> None:
        of = self._substance.cubic.attraction(T, _ONE)
        stable, low, high = self._substance.stable_root(T, p, of)
        liquid, vapour = (self._substance.cubic.residual(T, p, Z, of) for Z in (low, high))
        mismatch = np.abs((liquid.h - vapour.h) / T - (liquid.s - vapour.s)) / R
        # d ln(f_liquid/f_vapour)/d ln p is the difference of the roots.
        at_saturation = (high > low) & (mismatch < SATURATION_WIDTH * (high - low))
        wet = np.flatnonzero(at_saturation)
        if wet.size:
            line = self._saturation.at_temperature(T[wet])
            table.fail(rows[wet], lambda k: _SATURATED.format(T=T[wet][k], p=line.p[k]))
        dry = ~at_saturation
        table.put(rows[dry], T[dry], p[dry], *(c[dry] for c in self._mass(T, p, stable)))

    def _at_temperature_and_volume(self, table: Table, rows: Rows, T: Vector, v: Vector) -> None:
        of = self._substance.cubic.attraction(T, _ONE)
        molar_v = v * self.molar_mass
        line = self._saturation.at_temperature(T)
        v_liquid, v_vapour = (Z * R * T / line.p for Z in (line.liquid, line.vapour))
        with np.errstate(invalid="ignore", divide="ignore"):
            quality = (molar_v - v_liquid) / (v_vapour - v_liquid)
            wet = (quality >= 0.0) & (quality <= 1.0)
            p = np.real(self._substance.cubic.pressure(T, molar_v, of))
            single = ~wet & (molar_v > of.b) & (p > 0.0)
        at = Saturated(*(c[wet] for c in (line.T, line.p, line.liquid, line.vapour)))
        self._wet(table, rows[wet], at, quality=quality[wet])
        T, p, molar_v = T[single], p[single], molar_v[single]
        _, h, s = self._mass(T, p, p * molar_v / (R * T))
        table.put(rows[single], T, p, v[single], h, s)
        table.fail(rows, "no state at a pressure above 0 has this T and v")

    def _at_pressure(self, table: Table, rows: Rows, name: str, p: Vector, y: Vector) -> None:
        """(p, h) and (p, s): by the lever rule in the dome, by Newton in T beside it."""
        line = self._saturation.at_pressure(p)
        liquid = self._named(name, line.T, p, line.liquid)
        vapour = self._named(name, line.T, p, line.vapour)
        with np.errstate(invalid="ignore", divide="ignore"):
            quality = (y - liquid) / (vapour - liquid)
            wet = (quality >= 0.0) & (quality <= 1.0)
            below, above = quality < 0.0, quality > 1.0
        at = Saturated(*(c[wet] for c in (line.T, line.p, line.liquid, line.vapour)))
        self._wet(table, rows[wet], at, quality=quality[wet])
        dry = np.flatnonzero(~wet)
        low = np.where(above, line.T, self.limits.T_min)[dry]
        high = np.where(below, line.T, self.limits.T_max)[dry]
        side = np.select([below[dry], above[dry]], [-1, 1], 0)
        p, y, rows = p[dry], y[dry], rows[dry]

        def value_and_slope(T: Vector, of: Rows) -> tuple[Vector, Vector]:
            attraction = self._substance.cubic.attraction(T, _ONE)
            Z = self._root_on(side[of], T, p[of], attraction)
            cp = self._substance.heat_capacity(T, p[of], _ONE, Z, attraction) / self.molar_mass
            value = self._substance.named(name, T, p[of], _ONE, Z, attraction) / self.molar_mass
            return np.real(value), cp if name == "h" else cp / T

        T = solve_rising(value_and_slope, y, low, high)
        found = np.isfinite(T)
        rows, T, p, side = rows[found], T[found], p[found], side[found]
        attraction = self._substance.cubic.attraction(T, _ONE)
        table.put(rows, T, p, *self._mass(T, p, self._root_on(side, T, p, attraction)))
        reason = (
            f"{name} is beyond that at the ends of the range of this model, "
            f"{self.limits.T_min:.6g} and {self.limits.T_max:.6g} K"
        )
        table.fail(table.rows, reason)

    def _root_on(self, side: npt.NDArray[np.intp], T: Vector, p: Vector, of: Attraction) -> Vector:
        """Root on the side of the dome: -1 liquid, 1 vapour, 0 above the critical pressure."""
        if side.all():
            low, high = self._substance.roots(T, p, of)
            return np.where(side < 0, low, high)
        stable, low, high = self._substance.stable_root(T, p, of)
        return np.select([side < 0, side > 0], [low, high], stable)

    def _wet(self, table: Table, rows: Rows, line: Saturated, *, quality: Vector) -> None:
        """Fill rows in the dome; one component, so mass and amount fractions are the same."""
        liquid = self._mass(line.T, line.p, line.liquid)
        vapour = self._mass(line.T, line.p, line.vapour)
        v, h, s = ((1.0 - quality) * a + quality * b for a, b in zip(liquid, vapour, strict=True))
        table.put(rows, line.T, line.p, v, h, s, quality)

    def _named(self, name: str, T: Vector, p: Vector, Z: Vector) -> Vector:
        with np.errstate(invalid="ignore"):
            of = self._substance.cubic.attraction(T, _ONE)
            value = self._substance.named(name, T, p, _ONE, Z, of)
        return np.real(value) / self.molar_mass

    def _mass(self, T: Vector, p: Vector, Z: Vector) -> tuple[Vector, Vector, Vector]:
        """Volume, enthalpy and entropy per kg of the phase with the root `Z`."""
        with np.errstate(invalid="ignore"):
            of = self._substance.cubic.attraction(T, _ONE)
            molar = self._substance.molar(T, p, _ONE, Z, of)
        v, h, s = (np.asarray(c / self.molar_mass) for c in (molar.v, molar.h, molar.s))
        return v, h, s
