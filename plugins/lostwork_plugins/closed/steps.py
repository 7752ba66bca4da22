"""The load on a charge changed at once, in one step or in several.

Against a constant outer pressure the charge gives W = p_outer (V2 - V1).  Adiabatic, that is all
the change of its energy; held at T, heat comes from a reservoir at T.  Planck, Treatise on
Thermodynamics (1903), sec. 59 to 70; Callen, Thermodynamics (2nd ed. 1985), ch. 4.

Sudden release of pressure can hurt people: such steps are for accounting, not for the design or
the relief of vessels; local codes and licensed practice decide there.
"""

from __future__ import annotations

from abc import abstractmethod
from typing import Any, ClassVar, Literal

import numpy as np
from pydantic import PositiveInt

from lostwork import (
    Balance,
    Content,
    Heat,
    Path,
    Pressure,
    Process,
    ProcessError,
    Purpose,
    Solution,
    Work,
)
from lostwork_plugins.closed.paths import state_of
from lostwork_plugins.closed.worth import given_by_expansion, taken_by_compression

__all__ = [
    "StepwiseCompression",
    "StepwiseExpansion",
    "SuddenCompression",
    "SuddenExpansion",
]


class _Stepped(Process):
    charge: Content
    held: Literal["T", "adiabatic"] = "adiabatic"

    _rising: ClassVar[bool]

    @abstractmethod
    def _schedule(self) -> dict[str, Any]:
        """Arguments of the schedule of outer pressures."""

    def path(self) -> Path:
        """Give the path: rests between the steps, work and heat per kilogram."""
        state = state_of(self.charge, self.label)
        path = Path.stepwise(state, held="T" if self.held == "T" else None, **self._schedule())
        p = np.asarray(path.states.si.p)
        with np.errstate(invalid="ignore"):
            wrong = np.diff(p, axis=0) * (1.0 if self._rising else -1.0) < 0.0
        if np.any(wrong):
            raise ProcessError(
                process=self.label,
                reason="its outer pressures must "
                + ("rise" if self._rising else "fall")
                + f" step by step from {np.ravel(p)[0]:.6g} Pa; "
                + f"use {'an expansion' if self._rising else 'a compression'} otherwise",
            )
        return path

    def solve(self) -> Solution:
        """End state, boundary work and heat from the reservoir."""
        path = self.path()
        mass = self.charge.mass_si
        heat: tuple[Heat, ...] = ()
        if self.held == "T":
            q = mass * path.heat.magnitude
            heat = (Heat.from_si(q, path.start.si.T, per_time=False, name="reservoir"),)
        return Solution(
            after={"charge": Content.from_si(path.end, mass, name=self.stream_name("charge"))},
            heat=heat,
            work=(Work.from_si(mass * path.work.magnitude, per_time=False, name="boundary"),),
            remainder="sudden compression" if self._rising else "sudden expansion",
        )

    def purpose(self, balance: Balance) -> Purpose | None:
        """Useful work from the exergy of the charge, or the other way round."""
        return taken_by_compression(balance) if self._rising else given_by_expansion(balance)


class _Sudden(_Stepped):
    p_outer: Pressure

    def _schedule(self) -> dict[str, Any]:
        return {"p_end": self.p_outer, "steps": 1}


class _Stepwise(_Stepped):
    p_end: Pressure | None = None
    steps: PositiveInt | None = None
    spacing: Literal["ratio", "decrement"] = "ratio"
    pressures: Pressure | None = None

    def _schedule(self) -> dict[str, Any]:
        return {
            "p_end": self.p_end,
            "steps": self.steps,
            "spacing": self.spacing,
            "pressures": self.pressures,
        }


class SuddenExpansion(_Sudden):
    """The load drops to `p_outer` at once and the charge comes to rest against it.

    `held` is "adiabatic" or "T": in a reservoir at the temperature of the start.
    """

    trade_name: ClassVar[str] = "sudden-expansion"
    _rising: ClassVar[bool] = False


class SuddenCompression(_Sudden):
    """The load rises to `p_outer` at once and the charge comes to rest under it."""

    trade_name: ClassVar[str] = "sudden-compression"
    _rising: ClassVar[bool] = True


class StepwiseExpansion(_Stepwise):
    """The load is taken off in steps down to `p_end`.

    `steps` and `spacing` ("ratio" for equal ratios, "decrement" for equal decrements) lay out the
    outer pressures, or `pressures` gives them one by one.
    """

    trade_name: ClassVar[str] = "stepwise-expansion"
    _rising: ClassVar[bool] = False


class StepwiseCompression(_Stepwise):
    """The load is put on in steps up to `p_end`; see the expansion for the schedule."""

    trade_name: ClassVar[str] = "stepwise-compression"
    _rising: ClassVar[bool] = True
