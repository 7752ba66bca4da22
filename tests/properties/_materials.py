"""One fluid for every kind of model that ships, and where its states are drawn.

The regions keep off melting lines and the density maximum of water, where v with p has two roots.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from functools import cache
from typing import Any

import pytest

import lostwork as lw

__all__ = ["BY_NAME", "MATERIALS", "Material", "every_material"]


@dataclass(frozen=True)
class Material:
    """A fluid, the range of its states (K, Pa), and how slow it is against the fastest."""

    name: str
    fluid_of: str | Mapping[str, float]
    backend: str
    T: tuple[float, float]
    p: tuple[float, float]
    cost: float = 1.0
    options: Mapping[str, Any] = field(default_factory=dict)
    coldest_liquid: float = 0.0
    """K; above the density maximum of water, where s hardly tells the pressure."""

    @property
    def fluid(self) -> lw.Fluid:
        """The fluid itself, opened once."""
        return _opened(self.name)

    @property
    def two_phases(self) -> bool:
        """Whether vapour and liquid are known."""
        return self.backend != "ideal-gas"

    @property
    def pseudo_pure(self) -> bool:
        """Whether it is one fluid to its backend and several to everyone else."""
        return self.backend == "coolprop" and self.fluid_of == "air"

    @property
    def mixture(self) -> bool:
        """Whether it is a mixture to its backend."""
        return isinstance(self.fluid_of, Mapping)

    @property
    def lowest_boiling(self) -> float | None:
        """Saturation pressure of a pure fluid at the foot of the range of temperatures, Pa."""
        critical = self.fluid.critical_point
        if not self.two_phases or self.mixture or critical is None or self.T[0] >= critical.T:
            return None
        return float(self.fluid.state_si(("T", "quality"), self.T[0], 0.0).si.p)

    def other(self) -> lw.Fluid:
        """Give a fluid of another composition behind the same backend and options."""
        name = "carbon dioxide" if self.backend != "ideal-gas" else "argon"
        options = {k: v for k, v in self.options.items() if k != "cp"}
        if "cp" in self.options:
            options["cp"] = "520.3 J/kg/K"
        return lw.Fluid(name, backend=self.backend, **options)


_NATURAL_GAS = {"methane": 0.7, "ethane": 0.2, "propane": 0.1}
_SYNGAS = {"methane": 0.7, "carbon dioxide": 0.2, "nitrogen": 0.1}

MATERIALS = (
    Material("ideal nitrogen", "nitrogen", "ideal-gas", (150.0, 1500.0), (1e3, 1e7)),
    Material("ideal natural gas", _NATURAL_GAS, "ideal-gas", (250.0, 1200.0), (1e3, 1e7)),
    Material(
        "ideal air of constant cp",
        "air",
        "ideal-gas",
        (150.0, 1500.0),
        (1e3, 1e7),
        options={"cp": "1005 J/kg/K"},
    ),
    Material(
        "water by HEOS",
        "water",
        "coolprop",
        (290.0, 1100.0),
        (2e3, 2e7),
        1.5,
        coldest_liquid=282.0,
    ),
    Material("propane by HEOS", "propane", "coolprop", (200.0, 600.0), (2e4, 1e7), 1.5),
    Material(
        "carbon dioxide by HEOS", "carbon dioxide", "coolprop", (230.0, 900.0), (1e5, 2e7), 1.5
    ),
    Material("pseudo-pure air", "air", "coolprop", (140.0, 1200.0), (1e4, 1e7), 4.0),
    Material("natural gas by HEOS", _NATURAL_GAS, "coolprop", (240.0, 550.0), (5e4, 5e6), 12.0),
    Material("propane by PR", "propane", "cubic", (200.0, 800.0), (2e4, 1e7), 8.0),
    Material(
        "nitrogen by SRK", "nitrogen", "cubic", (100.0, 900.0), (2e4, 1e7), 8.0, {"eos": "SRK"}
    ),
    Material("natural gas by PR", _NATURAL_GAS, "cubic", (220.0, 700.0), (5e4, 6e6), 12.0),
    Material("syngas by SRK", _SYNGAS, "cubic", (220.0, 700.0), (5e4, 6e6), 12.0, {"eos": "SRK"}),
)

BY_NAME = {material.name: material for material in MATERIALS}


def every_material(
    where: Callable[[Material], bool] = lambda material: True,
) -> pytest.MarkDecorator:
    """Parametrise a test by the materials, or by those of one kind."""
    chosen = [material for material in MATERIALS if where(material)]
    return pytest.mark.parametrize("material", chosen, ids=lambda material: material.name)


@cache
def _opened(name: str) -> lw.Fluid:
    material = BY_NAME[name]
    return lw.Fluid(material.fluid_of, backend=material.backend, **material.options)
