"""Fluids for the tests of the cubic backend, made by hand from the data library."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Any

import chemicals
import pytest

from lostwork import Component, FluidSpec, PropertyModel
from lostwork_plugins.cubic.backend import CubicBackend


def substance(name: str) -> Component:
    found = chemicals.search_chemical(name)
    elements = chemicals.simple_formula_parser(found.formula)
    return Component(
        found.CASs, name, found.formula, chemicals.MW(found.CASs) / 1000.0, tuple(elements.items())
    )


def make_spec(fractions: Mapping[str, float]) -> FluidSpec:
    return FluidSpec(tuple(substance(name) for name in fractions), tuple(fractions.values()))


@pytest.fixture
def spec_of() -> Callable[[Mapping[str, float]], FluidSpec]:
    return make_spec


@pytest.fixture
def model_of() -> Callable[..., PropertyModel]:
    def opened(fluid: str | Mapping[str, float], **options: Any) -> PropertyModel:
        fractions = {fluid: 1.0} if isinstance(fluid, str) else fluid
        return CubicBackend().open(make_spec(fractions), options)

    return opened
