"""Share of vapour by amount from equilibrium ratios: the equation of Rachford and Rice (1952)."""

from __future__ import annotations

from typing import TypeAlias

import numpy as np
import numpy.typing as npt

__all__ = ["vapour_share"]

Vector: TypeAlias = npt.NDArray[np.float64]

_MOST = 100


def vapour_share(z: Vector, K: Vector) -> Vector:
    """Solve sum z (K - 1)/(1 + b (K - 1)) = 0 for b between its poles; outside 0 to 1 is meant.

    A share outside 0 to 1 is a phase that is not there yet, which lets a substitution start outside
    the dome and walk in.  NaN where all K lie on one side of 1.

    Parameters
    ----------
    z, K
        Feed and ratios y/x, shape (n, components).
    """
    with np.errstate(divide="ignore", invalid="ignore"):
        high = 1.0 / (1.0 - K.min(-1))
        low = 1.0 / (1.0 - K.max(-1))
        sound = (K.min(-1) < 1.0) & (K.max(-1) > 1.0)
        low, high = np.where(sound, low, np.nan), np.where(sound, high, np.nan)
        share = np.clip(0.5, low + 1e-12 * (high - low), high - 1e-12 * (high - low))
        for _ in range(_MOST):
            part = (K - 1.0) / (1.0 + share[:, None] * (K - 1.0))
            value = (z * part).sum(-1)
            slope = -(z * part**2).sum(-1)
            low = np.where(value > 0.0, share, low)
            high = np.where(value <= 0.0, share, high)
            following = share - value / slope
            outside = ~((following > low) & (following < high))
            following = np.where(outside & sound, 0.5 * (low + high), following)
            moved = np.abs(following - share)
            share = following
            if not np.any(moved > 1e-15 * np.maximum(1.0, np.abs(share))):
                break
    return np.asarray(share, dtype=np.float64)
