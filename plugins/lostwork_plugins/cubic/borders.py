"""Bubble and dew points of a mixture by pressure, each found once."""

from __future__ import annotations

from typing import TypeAlias

import numpy as np
import numpy.typing as npt

from lostwork_plugins.cubic.coexistence import Unknowns
from lostwork_plugins.cubic.flash import Found, at_quality
from lostwork_plugins.cubic.parameters import Parameters
from lostwork_plugins.cubic.phase import Substance

__all__ = ["Borders"]

Vector: TypeAlias = npt.NDArray[np.float64]
Mask: TypeAlias = npt.NDArray[np.bool_]
Lines: TypeAlias = tuple[Unknowns, Unknowns, Mask]

_MOST_KEPT = 16


class Borders:
    """Where the dome of one mixture begins and ends.

    Parameters
    ----------
    substance, numbers
        The equation of state and its parameters.
    z
        Mole fractions.
    """

    def __init__(self, substance: Substance, numbers: Parameters, z: Vector) -> None:
        self._substance = substance
        self._numbers = numbers
        self._z = z
        self._kept: dict[bytes, Lines] = {}

    def at(self, p: Vector) -> Lines:
        """Bubble and dew point at each pressure (Pa), and where both are known."""
        # Calls come with many rows at few pressures: each border is found once.
        levels, back = np.unique(p, return_inverse=True)
        bubble, dew, known = self._at_levels(levels)
        return bubble.rows(back), dew.rows(back), known[back]

    def _at_levels(self, levels: Vector) -> Lines:
        # A search along an exchanger comes back to the same pressures, call after call.
        asked = levels.tobytes()
        kept = self._kept.get(asked)
        if kept is not None:
            return kept
        bubble, has_bubble = self._at_quality(levels, 0.0)
        dew, has_dew = self._at_quality(levels, 1.0)
        found = bubble, dew, has_bubble & has_dew & (dew.T >= bubble.T)
        if len(self._kept) >= _MOST_KEPT:
            self._kept.clear()
        self._kept[asked] = found
        return found

    def _at_quality(self, levels: Vector, quality: float) -> Found:
        feed = np.tile(self._z, (levels.size, 1))
        at = np.full(levels.size, quality)
        return at_quality(self._substance, self._numbers, "p", levels, at, feed, march=False)
