"""Pumping of a liquid."""

from __future__ import annotations

from typing import ClassVar

import numpy as np

from lostwork_plugins.flow.compression import Driven
from lostwork_plugins.flow.rows import Refusals
from lostwork_plugins.flow.step import Inflow

__all__ = ["Pumping"]

_PUMPED = ("liquid", "saturated liquid", "supercritical")


class Pumping(Driven):
    """A pump: a liquid, or a dense fluid above its critical point, is brought to a higher pressure.

    w = (h_s - h_1) / eta, h_s - h_1 being close to v (p_2 - p_1).  The fields are those of a
    compression; T_out is the thermodynamic measurement of pump efficiency (ISO 9906 names the
    hydraulic one, which for a liquid hardly differs).

    Raises
    ------
    ProcessError
        Vapour enters: a pump would cavitate.  The outlet pressure is below the inlet pressure.

    Notes
    -----
    A liquid shut in behind a pump can burst a line when it warms; protection against that follows
    local codes and licensed practice, not this figure.
    """

    trade_name: ClassVar[str] = "pumping"

    def refuse_inlet(self, refusals: Refusals, feed: Inflow) -> None:
        """Refuse vapour."""
        refusals.add(
            ~np.isin(np.asarray(feed.state.phase), (*_PUMPED, "no state")),
            "vapour enters the pump ({T:.6g} K, {p:.6g} Pa); subcool the inlet, raise its "
            "pressure, or take a compression step",
            T=feed.T,
            p=feed.p,
        )
