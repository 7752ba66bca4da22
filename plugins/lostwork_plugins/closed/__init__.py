"""Expansions, compressions and heating of a closed charge."""

from __future__ import annotations

from collections.abc import Iterable

from lostwork import ProcessDescriptor, hookimpl

_API = 1
_TYPES = (
    ("quasi-static-path", "paths:QuasiStaticPath", "A charge led slowly from state to state"),
    ("sudden-expansion", "steps:SuddenExpansion", "The load on a charge drops at once"),
    ("sudden-compression", "steps:SuddenCompression", "The load on a charge rises at once"),
    ("stepwise-expansion", "steps:StepwiseExpansion", "The load is taken off in steps"),
    ("stepwise-compression", "steps:StepwiseCompression", "The load is put on in steps"),
    ("free-expansion", "free:FreeExpansion", "A charge fills an evacuated space"),
    ("reservoir-contact", "contact:ReservoirContact", "A charge against one reservoir"),
    ("equilibration", "contact:Equilibration", "Two charges brought to equilibrium"),
)


@hookimpl
def lostwork_processes() -> Iterable[ProcessDescriptor]:
    """Offer the process types of this package."""
    return [
        ProcessDescriptor(
            name=name,
            summary=summary,
            target=f"lostwork_plugins.closed.{target}",
            api_version=_API,
        )
        for name, target, summary in _TYPES
    ]
