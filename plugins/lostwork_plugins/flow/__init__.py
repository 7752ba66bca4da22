"""Steady-flow equipment: valves, machines, exchangers, mixers, separators, nozzles and pipes."""

from __future__ import annotations

from lostwork import ProcessDescriptor, hookimpl

__all__ = ["lostwork_processes"]

_OFFERED = (
    ("throttling", "Adiabatic let-down across a valve or an orifice", "throttling:Throttling"),
    ("compression", "Compressor, blower or fan", "compression:Compression"),
    ("expansion", "Turbine or expander that gives work", "expansion:Expansion"),
    ("pumping", "Pump for a liquid", "pumping:Pumping"),
    ("heating", "Heating by a reservoir or by electricity", "heat_duty:Heating"),
    ("cooling", "Cooling against a reservoir", "heat_duty:Cooling"),
    ("heat-exchange", "Two streams across a wall", "exchange:HeatExchange"),
    ("mixing", "Adiabatic mixing of any number of streams", "mixing:Mixing"),
    ("splitting", "One stream into named fractions", "splitting:Splitting"),
    ("flash-separation", "Vapour and liquid apart", "separation:FlashSeparation"),
    ("nozzle", "Pressure into velocity", "nozzle:Nozzle"),
    ("diffuser", "Velocity into pressure", "nozzle:Diffuser"),
    ("pipe", "Pressure drop and heat leak along a line", "pipe:Pipe"),
    ("as-measured", "Streams, heat and work simply given", "as_measured:AsMeasured"),
)


@hookimpl
def lostwork_processes() -> list[ProcessDescriptor]:
    """Offer the equipment; each class is imported when a step of its kind is first made."""
    return [
        ProcessDescriptor(
            name=name,
            summary=summary,
            target=f"lostwork_plugins.flow.{target}",
            api_version=1,
        )
        for name, summary, target in _OFFERED
    ]
