"""The fluids and recipes of this folder, importable by its tests; a tally of what was tried."""

from __future__ import annotations

import json
import os
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest

_HERE = str(Path(__file__).parent)
if _HERE not in sys.path:
    sys.path.insert(0, _HERE)


@pytest.fixture(scope="session", autouse=True)
def _tally() -> Iterator[None]:
    """Write the number of examples, accepted and refused, where PROPERTIES_TALLY says so."""
    import _exploring

    yield
    place = os.environ.get("PROPERTIES_TALLY")
    if place:
        rows = {label: [t.accepted, t.refused] for label, t in _exploring.TALLIES.items()}
        Path(place).write_text(json.dumps(rows, indent=1))
