"""Property backend on cubic equations of state: Peng-Robinson and Soave-Redlich-Kwong."""

from __future__ import annotations

from lostwork import BackendDescriptor, hookimpl

__all__ = ["lostwork_backends"]


@hookimpl
def lostwork_backends() -> list[BackendDescriptor]:
    """Offer the backend "cubic"; the data library is imported at first use."""
    return [
        BackendDescriptor(
            name="cubic",
            summary="Peng-Robinson and Soave-Redlich-Kwong equations, pure fluids and mixtures",
            target="lostwork_plugins.cubic.backend:CubicBackend",
            api_version=1,
            extra="cubic",
            requires=("thermo",),
        )
    ]
