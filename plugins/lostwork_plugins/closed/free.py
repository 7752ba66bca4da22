"""A charge that fills an evacuated space."""

from __future__ import annotations

from typing import ClassVar

import numpy as np

from lostwork import Content, Process, ProcessError, Ratio, Solution, Volume
from lostwork_plugins.closed.paths import state_of

__all__ = ["FreeExpansion"]


class FreeExpansion(Process):
    """Adiabatic expansion into an evacuated space: u stays, the volume grows, no work is done.

    Give `volume_ratio` (volume after over volume before) or `volume_end`.  Joule (1845); the end
    state is that of (v, u), so that a real gas changes its temperature.
    """

    trade_name: ClassVar[str] = "free-expansion"

    charge: Content
    volume_ratio: Ratio | None = None
    volume_end: Volume | None = None

    def solve(self) -> Solution:
        """End state at the larger volume."""
        start = state_of(self.charge, self.label)
        mass = self.charge.mass_si
        if (self.volume_ratio is None) == (self.volume_end is None):
            raise ProcessError(process=self.label, reason="give either volume_ratio or volume_end")
        if self.volume_ratio is not None:
            ratio = self.si.volume_ratio
        else:
            ratio = self.si.volume_end / (mass * start.si.v)
        if np.any(np.asarray(ratio) < 1.0):
            raise ProcessError(
                process=self.label, reason=f"the volume must grow; the ratio given is {ratio}"
            )
        end = start.fluid.state_si(("v", "u"), ratio * start.si.v, start.si.u)
        return Solution(
            after={"charge": Content.from_si(end, mass, name=self.stream_name("charge"))},
            remainder="sudden expansion",
        )
