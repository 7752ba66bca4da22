"""Property backends on CoolProp: reference equations of pure fluids and mixtures; brines."""

from __future__ import annotations

from lostwork import BackendDescriptor, hookimpl

__all__ = ["lostwork_backends"]


@hookimpl
def lostwork_backends() -> list[BackendDescriptor]:
    """Offer "coolprop" and "incompressible"; CoolProp itself is imported at first use."""
    return [
        BackendDescriptor(
            name="coolprop",
            summary="Helmholtz-energy equations of pure fluids and their mixtures, by CoolProp",
            target="lostwork_plugins.coolprop.backend:CoolPropBackend",
            api_version=1,
            extra="coolprop",
            requires=("CoolProp",),
        ),
        BackendDescriptor(
            name="incompressible",
            summary="Brines, antifreeze and water as liquids of one density each T, by CoolProp",
            target="lostwork_plugins.coolprop.incompressible:IncompressibleBackend",
            api_version=1,
            extra="coolprop",
            requires=("CoolProp",),
        ),
    ]
