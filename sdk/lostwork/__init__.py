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
    from lostwork.plugins import PLUGIN_API as PLUGIN_API
    from lostwork.plugins import BackendDescriptor as BackendDescriptor
    from lostwork.plugins import CheckDescriptor as CheckDescriptor
    from lostwork.plugins import ExporterDescriptor as ExporterDescriptor
    from lostwork.plugins import ProcessDescriptor as ProcessDescriptor
    from lostwork.plugins import hookimpl as hookimpl
    from lostwork.plugins import plugins as plugins
    from lostwork.properties.backend import *  # noqa: F403

__version__ = "0.1.0"

_HOMES = {
    "lostwork.accounting.audit": ("Audit", "Finding", "Link", "Ranked"),
    "lostwork.accounting.balance": ("Balance",),
    "lostwork.accounting.comparison": ("Comparison", "compare"),
    "lostwork.accounting.flows": ("GRAVITY", "Content", "Heat", "Stream", "Work"),
    "lostwork.accounting.losses": ("MECHANISMS", "Purpose"),
    "lostwork.accounting.path": ("Path", "Shortfall"),
    "lostwork.accounting.surroundings": ("Surroundings",),
    "lostwork.accounting.verdict": ("Status", "Verdict"),
    "lostwork.plugins": (
        "PLUGIN_API",
        "BackendDescriptor",
        "CheckDescriptor",
        "ExporterDescriptor",
        "ProcessDescriptor",
        "hookimpl",
        "plugins",
    ),
    "lostwork.processes.contract": ("Process", "Solution", "process"),
    "lostwork.processes.fields": (
        "Area",
        "Conductance",
        "Duty",
        "Efficiency",
        "Energy",
        "Fraction",
        "Length",
        "Mass",
        "MassRate",
        "Power",
        "Pressure",
        "PressureDrop",
        "Ratio",
        "SpecificEnergy",
        "Temperature",
        "TemperatureDifference",
        "Time",
        "Velocity",
        "Volume",
    ),
    "lostwork.properties.backend": (
        "DETERMINING_PAIRS",
        "REFERENCE_PRESSURE",
        "REFERENCE_TEMPERATURE",
        "Backend",
        "Column",
        "Columns",
        "Critical",
        "FluidSpec",
        "Limits",
        "Pair",
        "PhaseSplit",
        "PropertyModel",
        "R",
    ),
    "lostwork.properties.components": ("Component", "component"),
    "lostwork.properties.datum": ("Datum",),
    "lostwork.properties.fluid": ("Fluid",),
    "lostwork.properties.given": ("GivenState",),
    "lostwork.properties.rootfinding": ("bracketed_root",),
    "lostwork.properties.state": ("Change", "State"),
    "lostwork.quantities": (
        "FRACTION",
        "MOLAR_ENTROPY",
        "MOLAR_MASS",
        "PRESSURE",
        "SPECIFIC_ENTROPY",
        "TEMPERATURE",
        "Dimension",
        "in_unit",
        "quantity",
        "to_si",
        "to_si_any",
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
    module = importlib.import_module(home)
    # `plugins` is a folder and a call; the folder can be called, and is what Python binds here.
    value = module if home == f"{__name__}.{name}" else getattr(module, name)
    globals()[name] = value
    return value
