"""The error of a fluid or an option for which there is no ideal-gas model."""

from __future__ import annotations

from dataclasses import dataclass

from lostwork import PropertyError

__all__ = ["NoIdealGasModel"]


@dataclass(eq=False)
class NoIdealGasModel(PropertyError):
    """The fluid cannot be modelled as an ideal gas in the way asked for."""

    fluid: str
    reason: str
    advice: str = ""

    @property
    def message(self) -> str:
        """What is missing or wrong, and what to do."""
        parts = (f"{self.fluid} as an ideal gas: {self.reason}", self.advice)
        return " ".join(part.rstrip(".") + "." for part in parts if part)
