"""The backend "coolprop": which model a fluid gets."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from lostwork import Backend, FluidSpec, PropertyModel
from lostwork_plugins.coolprop.mixture import MixtureModel
from lostwork_plugins.coolprop.names import (
    fluid_name,
    predefined_composition,
    pseudo_pure_name,
)
from lostwork_plugins.coolprop.pseudo_pure import PseudoPureModel
from lostwork_plugins.coolprop.pure import PureModel
from lostwork_plugins.coolprop.refusal import NoModel

__all__ = ["CoolPropBackend", "reopen"]

_OPTIONS = ("equation", "pseudo_pure")


class CoolPropBackend(Backend):
    """Models on the Helmholtz-energy equations of CoolProp.

    Options
    -------
    equation : str
        "HEOS", the only one offered: CoolProp's cubic equations contradict themselves for a pure
        fluid.
    pseudo_pure : bool
        Whether a blend asked for by name ("air", "R410A") is modelled by its own pseudo-pure
        equation (the default) or as a mixture of its components.
    """

    def open(self, spec: FluidSpec, options: Mapping[str, Any]) -> PropertyModel:
        """Open a model of a pure fluid, a pseudo-pure one or a mixture."""
        shown = spec.name or " + ".join(component.name for component in spec.components)
        _check_options(shown, options)
        if len(spec.components) == 1:
            return PureModel(fluid_name(spec.components[0], spec.name), spec, options)
        blend = pseudo_pure_name(spec.name) if options.get("pseudo_pure", True) else None
        if blend is not None:
            return PseudoPureModel(blend, spec, options)
        return MixtureModel(tuple(fluid_name(part) for part in spec.components), spec, options)

    def composition(self, name: str) -> Mapping[str, float] | None:
        """Mole fractions by CAS number of a mixture that CoolProp predefines."""
        return predefined_composition(name)


def reopen(spec: FluidSpec, options: Mapping[str, Any]) -> PropertyModel:
    """Open a model again in another process."""
    return CoolPropBackend().open(spec, options)


def _check_options(shown: str, options: Mapping[str, Any]) -> None:
    for name, value in options.items():
        if name not in _OPTIONS:
            raise NoModel(
                fluid=shown,
                reason=f"there is no option {name!r}",
                advice=f"Options are {', '.join(_OPTIONS)}",
            )
        if name == "equation" and value != "HEOS":
            raise NoModel(
                fluid=shown,
                reason=f"there is no equation {value!r}",
                advice='The only one is "HEOS"; cubic equations have a backend of their own',
            )
        if name == "pseudo_pure" and not isinstance(value, bool):
            raise NoModel(fluid=shown, reason=f"pseudo_pure is true or false, not {value!r}")
