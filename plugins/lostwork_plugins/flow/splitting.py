"""One stream parted into several of the same state."""

from __future__ import annotations

from typing import Any, ClassVar

import numpy as np

import lostwork as lw
from lostwork_plugins.flow.step import FlowStep

__all__ = ["Splitting"]

_CLOSING = 1e-6


class Splitting(FlowStep):
    """A tee or a header: every outlet has the state of the inlet and a fraction of its flow.

    Nothing is generated; a pressure drop in the branches belongs to a pipe or a throttling step.

    Raises
    ------
    FieldError
        Fewer than two fractions, or fractions that do not sum to one within 1e-6.
    """

    trade_name: ClassVar[str] = "splitting"

    inlet: lw.Stream
    """The stream that enters."""
    fractions: dict[str, lw.Fraction]
    """Fraction of the flow by the name of the outlet."""

    def __init__(self, /, **fields: Any) -> None:
        super().__init__(**fields)
        total = sum(np.asarray(fraction.magnitude) for fraction in self.fractions.values())
        if len(self.fractions) < 2:
            problem = "give two or more outlets with their fractions"
        elif np.any(np.abs(total - 1.0) > _CLOSING):
            problem = f"they sum to {total}; the fractions of all outlets sum to 1 within 1e-6"
        else:
            return
        raise lw.FieldError(process=self.label, problems=(("fractions", problem),))

    def solve(self) -> lw.Solution:
        """Share out the flow."""
        feed = self.inflow(self.inlet)
        shares = {name: fraction.magnitude for name, fraction in self.fractions.items()}
        total = sum(shares.values())
        return lw.Solution(
            outlets={
                name: self.stream(name, feed.state, feed, mass=feed.mass * share / total)
                for name, share in shares.items()
            },
            mechanisms={"pressure drop": feed.s * 0.0},
            remainder="pressure drop",
        )
