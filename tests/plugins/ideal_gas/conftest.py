from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Any

import pytest

import lostwork as lw
from lostwork_plugins.ideal_gas.backend import IdealGasBackend

# Molar masses as in the IUPAC table of standard atomic weights, kg/mol.
_GASES = {
    "nitrogen": ("7727-37-9", "N2", 0.0280134),
    "oxygen": ("7782-44-7", "O2", 0.0319988),
    "argon": ("7440-37-1", "Ar", 0.039948),
    "helium": ("7440-59-7", "He", 0.004002602),
    "carbon dioxide": ("124-38-9", "CO2", 0.0440095),
    "water": ("7732-18-5", "H2O", 0.01801528),
    "methane": ("74-82-8", "CH4", 0.01604246),
    "propane": ("74-98-6", "C3H8", 0.04409562),
    "hydrogen": ("1333-74-0", "H2", 0.00201588),
    "1,1,1,2-tetrafluoroethane": ("811-97-2", "C2H2F4", 0.1020309),
    "2-butylnaphthalene": ("1134-62-9", "C14H16", 0.18427564),
    "silicon tetrafluoride": ("7783-61-1", "F4Si", 0.10407911),
    "boron trichloride": ("10294-34-5", "BCl3", 0.11717),
}

DRY_AIR = {"nitrogen": 0.78084, "oxygen": 0.20946, "argon": 0.00934, "carbon dioxide": 0.00036}

OpenModel = Callable[..., lw.PropertyModel]


def _spec(composition: str | Mapping[str, float], name: str | None = None) -> lw.FluidSpec:
    if isinstance(composition, str):
        name, composition = name or composition, {composition: 1.0}
    components = []
    for gas in composition:
        cas, formula, molar_mass = _GASES[gas]
        components.append(
            lw.Component(cas=cas, name=gas, formula=formula, molar_mass=molar_mass, elements=())
        )
    return lw.FluidSpec(tuple(components), tuple(composition.values()), name)


@pytest.fixture(scope="session")
def spec_of() -> Callable[..., lw.FluidSpec]:
    return _spec


@pytest.fixture(scope="session")
def open_model() -> OpenModel:
    def opened(
        composition: str | Mapping[str, float], *, name: str | None = None, **options: Any
    ) -> lw.PropertyModel:
        return IdealGasBackend().open(_spec(composition, name), options)

    return opened


@pytest.fixture(scope="session")
def air(open_model: OpenModel) -> lw.PropertyModel:
    return open_model(DRY_AIR, name="air")
