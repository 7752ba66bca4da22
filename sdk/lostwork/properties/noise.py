"""How far a backend contradicts itself: the entropy that does not close, and where.

h, v and s of one model are followed along lines over a region (`closure`), by (T, p) and by what
the model solves itself, around closed loops, and across saturation.  Whatever does not close is
noise that no verdict may be finer than; a model whose h and v come from different equations is
convicted here.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import pint

from lostwork.errors import OutOfLimits
from lostwork.quantities import PRESSURE, TEMPERATURE, quantity, to_si

__all__ = ["Noise", "NoiseResidual", "Region"]


class Region:
    """A range of temperatures and of pressures.

    Parameters
    ----------
    T, p
        Lowest and highest, each a quantity or a string with a unit.

    Raises
    ------
    QuantityError
        A value cannot be read.
    OutOfLimits
        The lowest is not below the highest.
    """

    __slots__ = ("T", "p")

    T: tuple[float, float]
    p: tuple[float, float]

    def __init__(self, *, T: tuple[Any, Any], p: tuple[Any, Any]) -> None:
        for name, ends, dimension in (("T", T, TEMPERATURE), ("p", p, PRESSURE)):
            low, high = (float(to_si(end, dimension, name)) for end in ends)
            if not low < high:
                raise OutOfLimits(
                    fluid=name, reason=f"a region runs from the lowest to the highest; got {ends}"
                )
            object.__setattr__(self, name, (low, high))

    def __setattr__(self, name: str, value: object) -> None:
        raise AttributeError(f"a Region cannot be changed: {name}")

    def __reduce__(self) -> tuple[Any, ...]:
        return _region, (self.T, self.p)

    def __eq__(self, other: object) -> bool:
        if not isinstance(other, Region):
            return NotImplemented
        return (self.T, self.p) == (other.T, other.p)

    def __hash__(self) -> int:
        return hash((self.T, self.p))

    def __repr__(self) -> str:
        low, high = self.T
        return f"Region({low:g} to {high:g} K, {self.p[0] / 1e5:g} to {self.p[1] / 1e5:g} bar)"


def _region(T: tuple[float, float], p: tuple[float, float]) -> Region:
    return Region(
        T=(quantity(T[0], "K"), quantity(T[1], "K")), p=(quantity(p[0], "Pa"), quantity(p[1], "Pa"))
    )


@dataclass(frozen=True)
class NoiseResidual:
    """The worst of one kind of closure.

    Parameters
    ----------
    kind
        What was followed.
    entropy, truncation
        Entropy that does not close, and what the measurement itself may be wrong by, J/kg/K.
    T, p
        Where, K and Pa.
    stated
        What the model states as its noise there, J/kg/K.
    lines, left_out
        How many were followed, and how many could not be.
    reason
        Why one of those could not.
    """

    kind: str
    entropy: float
    truncation: float
    T: float
    p: float
    stated: float
    lines: int
    left_out: int
    reason: str

    @property
    def exceeds(self) -> bool:
        """Whether it is above what the model states, beyond the error of the measurement."""
        return self.entropy - self.truncation > self.stated


@dataclass(frozen=True)
class Noise:
    """What was measured of one fluid over one region."""

    fluid: str
    region: Region
    residuals: tuple[NoiseResidual, ...]

    @property
    def worst(self) -> NoiseResidual:
        """The largest residual of any kind."""
        return max(self.residuals, key=lambda residual: residual.entropy)

    @property
    def entropy(self) -> pint.Quantity[float]:
        """The largest entropy that does not close, J/kg/K."""
        return quantity(self.worst.entropy, "J/(kg*K)")

    @property
    def exceeding(self) -> tuple[NoiseResidual, ...]:
        """The kinds in which the model is worse than it states."""
        return tuple(residual for residual in self.residuals if residual.exceeds)

    def __str__(self) -> str:
        lines = [f"{self.fluid}, {self.region}: entropy that does not close, J/kg/K"]
        lines += [
            f"  {r.kind:<28} {r.entropy:9.2e}  stated {r.stated:8.1e}  "
            f"at {r.T:8.2f} K {r.p / 1e5:10.4g} bar  {r.lines} followed, {r.left_out} left out"
            for r in self.residuals
        ]
        return "\n".join(lines)
