"""Second-law accounting for process equipment.

Is a step possible, how much work could it have given or needed at best, how much was lost, by
which mechanism and where.  Everything public is listed here and loaded at first use, so that an
import stays quick; plugins use only these names.
"""

from __future__ import annotations

import importlib
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from lostwork.errors import *  # noqa: F403
    from lostwork.properties.backend import *  # noqa: F403

__version__ = "0.1.0"

_HOMES = {
    "lostwork.properties.backend": (
        "Backend",
        "Column",
        "Columns",
        "Critical",
        "DETERMINING_PAIRS",
        "FluidSpec",
        "Limits",
        "Pair",
        "PhaseSplit",
        "PropertyModel",
        "R",
        "REFERENCE_PRESSURE",
        "REFERENCE_TEMPERATURE",
    ),
    "lostwork.properties.components": ("Component", "component"),
    "lostwork.plugins": (
        "BackendDescriptor",
        "CheckDescriptor",
        "ExporterDescriptor",
        "PLUGIN_API",
        "ProcessDescriptor",
        "hookimpl",
        "plugins",
    ),
}
_HOME_OF = {name: home for home, names in _HOMES.items() for name in names}


def __getattr__(name: str) -> Any:
    home = _HOME_OF.get(name)
    if home is None:
        errors = importlib.import_module("lostwork.errors")
        if name not in errors.__all__:
            raise AttributeError(f"module 'lostwork' has no attribute {name!r}")
        home = "lostwork.errors"
    value = getattr(importlib.import_module(home), name)
    globals()[name] = value
    return value
