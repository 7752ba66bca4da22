"""The errors of a fluid this backend cannot model and of an option it does not have."""

from __future__ import annotations

from dataclasses import dataclass

from lostwork import PropertyError

__all__ = ["MissingParameters", "OptionRefused"]


@dataclass(eq=False)
class MissingParameters(PropertyError):
    """A number the equation needs is not known."""

    fluid: str
    missing: tuple[str, ...]
    advice: str = ""

    @property
    def message(self) -> str:
        """What is not known, and what to do."""
        text = f"a cubic equation of {self.fluid} needs {', '.join(self.missing)}"
        parts = (f"{text}, for which no published value is at hand", self.advice)
        return " ".join(part.rstrip(".") + "." for part in parts if part)


@dataclass(eq=False)
class OptionRefused(PropertyError):
    """An option is not known, or its value cannot be used."""

    option: str
    reason: str
    known: str

    @property
    def message(self) -> str:
        """What is wrong with the option, and what is known."""
        return f"cubic backend, option {self.option!r}: {self.reason}. {self.known}."
