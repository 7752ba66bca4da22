"""Fluids asked of the backend by CoolProp's names of their components."""

from __future__ import annotations

from collections.abc import Callable

import pytest
from CoolProp.CoolProp import AbstractState, get_fluid_param_string

from lostwork import Component, FluidSpec, PropertyModel
from lostwork_plugins.coolprop.backend import CoolPropBackend


def _component(fluid: str) -> Component:
    return Component(
        cas=get_fluid_param_string(fluid, "CAS"),
        name=fluid,
        formula="",
        molar_mass=AbstractState("HEOS", fluid).molar_mass(),
        elements=(),
    )


@pytest.fixture
def spec_of() -> Callable[..., FluidSpec]:
    def build(fluid: str | dict[str, float], name: str | None = None) -> FluidSpec:
        parts = {fluid: 1.0} if isinstance(fluid, str) else fluid
        total = sum(parts.values())
        fractions = tuple(x / total for x in parts.values())
        return FluidSpec(tuple(map(_component, parts)), fractions, name)

    return build


@pytest.fixture
def model_of(spec_of: Callable[..., FluidSpec]) -> Callable[..., PropertyModel]:
    def build(
        fluid: str | dict[str, float], name: str | None = None, **options: object
    ) -> PropertyModel:
        return CoolPropBackend().open(spec_of(fluid, name), options)

    return build
