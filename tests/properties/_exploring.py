"""Run one check over many drawn examples, counting those that a step refuses.

Steps refuse what they cannot run, and a recipe that is refused every time proves nothing, so every
exploration says what share of its examples must be accepted.
"""

from __future__ import annotations

import zlib
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from hypothesis import given, note, reject, seed, settings
from hypothesis import strategies as st

import lostwork as lw

__all__ = ["TALLIES", "explore"]

_REFUSALS = (lw.ProcessError, lw.PropertyError, lw.PathError)
_FEWEST_EXAMPLES = 2


@dataclass
class Tally:
    """Examples that were checked, and examples that were refused as they cannot be run."""

    accepted: int = 0
    refused: int = 0
    last_refusal: str = ""


TALLIES: dict[str, Tally] = {}


def explore(
    label: str,
    strategy: st.SearchStrategy[Any],
    run: Callable[[Any], Any],
    check: Callable[[Any, Any], None],
    *,
    cost: float = 1.0,
    least_accepted: float = 0.2,
) -> Tally:
    """Draw examples, run them, and check what comes out.

    Parameters
    ----------
    label
        What is explored, for the tally and for the seed of derandomised profiles.
    run
        Makes the result of an example; what it refuses is counted and left out.
    check
        Of example and result; raises where an invariant is broken.
    cost
        How many times fewer examples than the profile says, for slow models.
    least_accepted
        Share of the drawn examples that must run.
    """
    tally = TALLIES.setdefault(label, Tally())

    def one(example: Any) -> None:
        note(f"{label}: {example!r}")
        try:
            result = run(example)
        except _REFUSALS as refusal:
            tally.refused += 1
            tally.last_refusal = str(refusal)
            reject()
        tally.accepted += 1
        check(example, result)

    profile = settings.get_profile(settings.get_current_profile_name())
    count = max(_FEWEST_EXAMPLES, round(profile.max_examples / cost))
    explored = settings(profile, max_examples=count)(given(strategy)(one))
    if profile.derandomize:
        explored = seed(zlib.crc32(label.encode()))(explored)
    explored()
    drawn = tally.accepted + tally.refused
    assert tally.accepted >= least_accepted * drawn, (
        f"{label}: only {tally.accepted} of {drawn} examples run; the last refusal was: "
        f"{tally.last_refusal}"
    )
    return tally
