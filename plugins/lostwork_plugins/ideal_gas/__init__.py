"""Property backend of ideal gases: published heat capacities, or a constant one of the caller's."""

from __future__ import annotations

from lostwork import BackendDescriptor, hookimpl

__all__ = ["lostwork_backends"]


@hookimpl
def lostwork_backends() -> list[BackendDescriptor]:
    """Offer the backend "ideal-gas"; the tables of coefficients are read at first use."""
    return [
        BackendDescriptor(
            name="ideal-gas",
            summary="Ideal gases and their mixtures, with published or constant heat capacity",
            target="lostwork_plugins.ideal_gas.backend:IdealGasBackend",
            api_version=1,
            requires=("chemicals",),
        )
    ]
