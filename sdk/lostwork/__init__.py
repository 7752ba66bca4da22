"""Second-law accounting for process equipment.

Is a step possible, how much work could it have given or needed at best, how much was lost, by
which mechanism and where.  Everything public is listed here and loaded at first use, so that an
import stays quick; plugins use only these names.
"""

from __future__ import annotations

import importlib
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from lostwork.accounting.audit import (
        Audit,
        Finding,
        Ranked,
    )
    from lostwork.accounting.balance import (
        Balance,
    )
    from lostwork.accounting.comparison import (
        Comparison,
        StepComparison,
        StepFigures,
        compare,
    )
    from lostwork.accounting.display import (
        display_unit,
        figure,
        percent,
    )
    from lostwork.accounting.export import (
        Exporter,
        Presentation,
    )
    from lostwork.accounting.flows import (
        GRAVITY,
        Content,
        Stream,
    )
    from lostwork.accounting.joints import (
        Joints,
        Link,
    )
    from lostwork.accounting.losses import (
        MECHANISMS,
        Purpose,
    )
    from lostwork.accounting.path import (
        Path,
        Shortfall,
    )
    from lostwork.accounting.surroundings import (
        Surroundings,
    )
    from lostwork.accounting.transfers import (
        Heat,
        Work,
    )
    from lostwork.accounting.verdict import (
        Status,
        Verdict,
    )
    from lostwork.cases.case import (
        Case,
    )
    from lostwork.errors import (
        AmbiguousComponent,
        ApiVersionMismatch,
        AuditError,
        BalanceError,
        BalanceNotClosed,
        CaseError,
        CircularReference,
        CompositionError,
        DatumMismatch,
        DescriptorError,
        FieldError,
        GaugePressure,
        IllPosed,
        InternalDisagreement,
        LostworkError,
        MissingExtra,
        MissingUnit,
        NotAbsolute,
        NotFinite,
        OutOfLimits,
        PairRefused,
        PathError,
        PluginClash,
        PluginError,
        PluginFailed,
        PluginNotFound,
        ProcessError,
        PropertyError,
        QuantityError,
        SecondLawViolation,
        ShapesDiffer,
        StateNotFound,
        TemperatureKind,
        UnknownComponent,
        UnknownUnit,
        WrongDimension,
    )
    from lostwork.plugins import (
        PLUGIN_API,
        BackendDescriptor,
        CheckDescriptor,
        ExporterDescriptor,
        ProcessDescriptor,
        hookimpl,
        plugins,
    )
    from lostwork.processes.contract import (
        Process,
        Solution,
        process,
    )
    from lostwork.processes.fields import (
        Area,
        Conductance,
        Duty,
        Efficiency,
        Energy,
        Fraction,
        Length,
        Mass,
        MassRate,
        Power,
        Pressure,
        PressureDrop,
        Ratio,
        SpecificEnergy,
        Temperature,
        TemperatureDifference,
        Time,
        Velocity,
        Volume,
    )
    from lostwork.properties.backend import (
        DETERMINING_PAIRS,
        REFERENCE_PRESSURE,
        REFERENCE_TEMPERATURE,
        Backend,
        Column,
        Columns,
        Critical,
        FluidSpec,
        Limits,
        Pair,
        PhaseSplit,
        PropertyModel,
        R,
    )
    from lostwork.properties.components import (
        Component,
        component,
    )
    from lostwork.properties.datum import (
        Datum,
    )
    from lostwork.properties.fluid import (
        Fluid,
    )
    from lostwork.properties.given import (
        GivenState,
    )
    from lostwork.properties.noise import (
        Noise,
        NoiseResidual,
        Region,
    )
    from lostwork.properties.rootfinding import (
        bracketed_root,
    )
    from lostwork.properties.state import (
        Change,
        State,
    )
    from lostwork.quantities import (
        FRACTION,
        MOLAR_ENTROPY,
        MOLAR_MASS,
        PRESSURE,
        SPECIFIC_ENTROPY,
        TEMPERATURE,
        Dimension,
        in_unit,
        quantity,
        to_si,
        to_si_any,
    )

__all__ = [
    "DETERMINING_PAIRS",
    "FRACTION",
    "GRAVITY",
    "MECHANISMS",
    "MOLAR_ENTROPY",
    "MOLAR_MASS",
    "PLUGIN_API",
    "PRESSURE",
    "REFERENCE_PRESSURE",
    "REFERENCE_TEMPERATURE",
    "SPECIFIC_ENTROPY",
    "TEMPERATURE",
    "AmbiguousComponent",
    "ApiVersionMismatch",
    "Area",
    "Audit",
    "AuditError",
    "Backend",
    "BackendDescriptor",
    "Balance",
    "BalanceError",
    "BalanceNotClosed",
    "Case",
    "CaseError",
    "Change",
    "CheckDescriptor",
    "CircularReference",
    "Column",
    "Columns",
    "Comparison",
    "Component",
    "CompositionError",
    "Conductance",
    "Content",
    "Critical",
    "Datum",
    "DatumMismatch",
    "DescriptorError",
    "Dimension",
    "Duty",
    "Efficiency",
    "Energy",
    "Exporter",
    "ExporterDescriptor",
    "FieldError",
    "Finding",
    "Fluid",
    "FluidSpec",
    "Fraction",
    "GaugePressure",
    "GivenState",
    "Heat",
    "IllPosed",
    "InternalDisagreement",
    "Joints",
    "Length",
    "Limits",
    "Link",
    "LostworkError",
    "Mass",
    "MassRate",
    "MissingExtra",
    "MissingUnit",
    "Noise",
    "NoiseResidual",
    "NotAbsolute",
    "NotFinite",
    "OutOfLimits",
    "Pair",
    "PairRefused",
    "Path",
    "PathError",
    "PhaseSplit",
    "PluginClash",
    "PluginError",
    "PluginFailed",
    "PluginNotFound",
    "Power",
    "Presentation",
    "Pressure",
    "PressureDrop",
    "Process",
    "ProcessDescriptor",
    "ProcessError",
    "PropertyError",
    "PropertyModel",
    "Purpose",
    "QuantityError",
    "R",
    "Ranked",
    "Ratio",
    "Region",
    "SecondLawViolation",
    "ShapesDiffer",
    "Shortfall",
    "Solution",
    "SpecificEnergy",
    "State",
    "StateNotFound",
    "Status",
    "StepComparison",
    "StepFigures",
    "Stream",
    "Surroundings",
    "Temperature",
    "TemperatureDifference",
    "TemperatureKind",
    "Time",
    "UnknownComponent",
    "UnknownUnit",
    "Velocity",
    "Verdict",
    "Volume",
    "Work",
    "WrongDimension",
    "bracketed_root",
    "compare",
    "component",
    "display_unit",
    "figure",
    "hookimpl",
    "in_unit",
    "percent",
    "plugins",
    "process",
    "quantity",
    "to_si",
    "to_si_any",
]

__version__ = "0.1.0"

_HOMES = {
    "lostwork.accounting.audit": (
        "Audit",
        "Finding",
        "Ranked",
    ),
    "lostwork.accounting.balance": ("Balance",),
    "lostwork.accounting.comparison": (
        "Comparison",
        "StepComparison",
        "StepFigures",
        "compare",
    ),
    "lostwork.accounting.display": (
        "display_unit",
        "figure",
        "percent",
    ),
    "lostwork.accounting.export": (
        "Exporter",
        "Presentation",
    ),
    "lostwork.accounting.flows": (
        "Content",
        "GRAVITY",
        "Stream",
    ),
    "lostwork.accounting.joints": (
        "Joints",
        "Link",
    ),
    "lostwork.accounting.losses": (
        "MECHANISMS",
        "Purpose",
    ),
    "lostwork.accounting.path": (
        "Path",
        "Shortfall",
    ),
    "lostwork.accounting.surroundings": ("Surroundings",),
    "lostwork.accounting.transfers": (
        "Heat",
        "Work",
    ),
    "lostwork.accounting.verdict": (
        "Status",
        "Verdict",
    ),
    "lostwork.cases.case": ("Case",),
    "lostwork.errors": (
        "AmbiguousComponent",
        "ApiVersionMismatch",
        "AuditError",
        "BalanceError",
        "BalanceNotClosed",
        "CaseError",
        "CircularReference",
        "CompositionError",
        "DatumMismatch",
        "DescriptorError",
        "FieldError",
        "GaugePressure",
        "IllPosed",
        "InternalDisagreement",
        "LostworkError",
        "MissingExtra",
        "MissingUnit",
        "NotAbsolute",
        "NotFinite",
        "OutOfLimits",
        "PairRefused",
        "PathError",
        "PluginClash",
        "PluginError",
        "PluginFailed",
        "PluginNotFound",
        "ProcessError",
        "PropertyError",
        "QuantityError",
        "SecondLawViolation",
        "ShapesDiffer",
        "StateNotFound",
        "TemperatureKind",
        "UnknownComponent",
        "UnknownUnit",
        "WrongDimension",
    ),
    "lostwork.plugins": (
        "BackendDescriptor",
        "CheckDescriptor",
        "ExporterDescriptor",
        "PLUGIN_API",
        "ProcessDescriptor",
        "hookimpl",
        "plugins",
    ),
    "lostwork.processes.contract": (
        "Process",
        "Solution",
        "process",
    ),
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
    "lostwork.properties.components": (
        "Component",
        "component",
    ),
    "lostwork.properties.datum": ("Datum",),
    "lostwork.properties.fluid": ("Fluid",),
    "lostwork.properties.given": ("GivenState",),
    "lostwork.properties.noise": (
        "Noise",
        "NoiseResidual",
        "Region",
    ),
    "lostwork.properties.rootfinding": ("bracketed_root",),
    "lostwork.properties.state": (
        "Change",
        "State",
    ),
    "lostwork.quantities": (
        "Dimension",
        "FRACTION",
        "MOLAR_ENTROPY",
        "MOLAR_MASS",
        "PRESSURE",
        "SPECIFIC_ENTROPY",
        "TEMPERATURE",
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
        raise AttributeError(f"module 'lostwork' has no attribute {name!r}")
    module = importlib.import_module(home)
    # `plugins` is a folder and a call; the folder can be called, and is what Python binds here.
    value = module if home == f"{__name__}.{name}" else getattr(module, name)
    globals()[name] = value
    return value


def __dir__() -> list[str]:
    return [*__all__, "__version__"]
