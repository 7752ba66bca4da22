"""What a loss is called and what a step is for."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from lostwork.errors import IllPosed
from lostwork.properties.backend import Column
from lostwork.quantities import ENERGY, POWER, to_si_any

__all__ = ["MECHANISMS", "Purpose"]

MECHANISMS = (
    "friction",
    "pressure drop",
    "heat transfer",
    "mixing",
    "sudden expansion",
    "sudden compression",
    "electric dissipation",
    "reaction",
    "not attributed",
)
"""Names by which the built-in processes split their entropy generation."""


@dataclass(frozen=True)
class Purpose:
    """What a step spends and what it is for, both as exergy.

    The rational (second-law) efficiency is recovered over expended; their difference is destroyed
    or leaves unused (Kotas, The Exergy Method of Thermal Plant Analysis, 1985, ch. 3).  NaN marks
    rows where the step has no purpose to measure.
    """

    expended: Column
    recovered: Column
    expended_name: str
    recovered_name: str

    @classmethod
    def of(
        cls, *, expended: Any, recovered: Any, expended_name: str, recovered_name: str
    ) -> Purpose:
        """Make a purpose from quantities, two powers or two energies.

        Raises
        ------
        IllPosed
            One is a power and the other an energy.
        """
        spent, dimension = to_si_any(expended, (POWER, ENERGY), "expended")
        gained, other = to_si_any(recovered, (POWER, ENERGY), "recovered")
        if dimension is not other:
            raise IllPosed(
                balance="purpose",
                reason=f"{expended_name} ({expended}) and {recovered_name} ({recovered}) are not "
                "both powers or both energies",
            )
        return cls(
            expended=spent,
            recovered=gained,
            expended_name=expended_name,
            recovered_name=recovered_name,
        )
