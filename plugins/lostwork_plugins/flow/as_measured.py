"""A step of which everything is given as measured, claimed or quoted."""

from __future__ import annotations

from typing import Any, ClassVar

import lostwork as lw
from lostwork_plugins.flow.step import FlowStep

__all__ = ["AsMeasured"]


class AsMeasured(FlowStep):
    """Streams, heat and work simply given; nothing is solved but one unknown.

    One stream may have no rate, and one heat or work may be unknown: the balance finds them.  For a
    maker's data sheet, a test run, or the results of another program (streams may have given h and
    s).  The loss is not attributed to a mechanism, since only the ends are known.

    Raises
    ------
    FieldError
        Nothing flows in or nothing flows out.
    """

    trade_name: ClassVar[str] = "as-measured"

    inflows: tuple[lw.Stream, ...]
    """Streams that enter."""
    outflows: dict[str, lw.Stream]
    """Streams that leave, by the name of the outlet."""
    heat: tuple[lw.Heat, ...] = ()
    """Heat, positive into the step, each with its boundary temperature."""
    work: tuple[lw.Work, ...] = ()
    """Work, positive into the step."""
    closing: lw.Fraction | None = None
    """Error of the instruments, as a fraction within which flows and energies count as closed."""

    def __init__(self, /, **fields: Any) -> None:
        super().__init__(**fields)
        sides = (("inflows", self.inflows), ("outflows", self.outflows))
        problems = tuple((name, "give one stream or more") for name, side in sides if not side)
        if problems:
            raise lw.FieldError(process=self.label, problems=problems)

    def solve(self) -> lw.Solution:
        """Hand on what was given."""
        outlets = {
            name: stream if stream.name else stream.replaced(name=self.stream_name(name))
            for name, stream in self.outflows.items()
        }
        return lw.Solution(outlets=outlets, heat=self.heat, work=self.work)

    def stated_closing(self) -> Any:
        """Error of the instruments, as stated."""
        return self.closing
