"""The error of a fluid or an option for which this backend has no model."""

from __future__ import annotations

from dataclasses import dataclass

from lostwork import PropertyError

__all__ = ["NoModel"]


@dataclass(eq=False)
class NoModel(PropertyError):
    """A fluid that this backend cannot model as asked."""

    fluid: str
    reason: str
    advice: str = ""

    @property
    def message(self) -> str:
        """What is missing and what to do."""
        parts = (f"coolprop has no model of {self.fluid}: {self.reason}", self.advice)
        return " ".join(part.rstrip(".") + "." for part in parts if part)
