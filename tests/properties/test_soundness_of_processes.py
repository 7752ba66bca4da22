"""Every legal step of every built-in process type, with every backend, obeys the second law."""

from __future__ import annotations

from typing import Any

import pytest
from _exploring import explore
from _materials import MATERIALS, Material
from _recipes import RECIPES, applicable, legal_fields
from _soundness import assert_same_loss, assert_sound, booked_again
from hypothesis import strategies as st

import lostwork as lw
from lostwork.testing import surroundings

_COMBINATIONS = [
    pytest.param(kind, material, id=f"{kind}, {material.name}")
    for kind in RECIPES
    for material in MATERIALS
    if applicable(kind, material)
]
_SHIFT_H, _SHIFT_S = 123_456.0, 789.0


def test_every_built_in_process_type_has_a_recipe() -> None:
    built_in = {
        name
        for name, descriptor in lw.plugins().processes.items()
        if ":" not in name and descriptor.target.startswith("lostwork_plugins.")
    }
    assert built_in == set(RECIPES)


@pytest.mark.parametrize(("kind", "material"), _COMBINATIONS)
def test_no_legal_step_destroys_entropy(kind: str, material: Material) -> None:
    def run(example: tuple[Any, lw.Surroundings]) -> lw.Balance:
        fields, site = example
        return lw.process(kind, **fields).balance(site)

    def check(example: Any, balance: lw.Balance) -> None:
        assert_sound(balance)
        assert_same_loss(balance, booked_again(balance, backwards=True))
        if _one_composition(balance):
            assert_same_loss(balance, booked_again(balance, _given))
            assert_same_loss(balance, booked_again(balance, _given_elsewhere))

    strategy = st.tuples(legal_fields(kind=kind, material=material), surroundings())
    explore(f"{kind}, {material.name}", strategy, run, check, cost=4.0 * material.cost)


def _one_composition(balance: lw.Balance) -> bool:
    matter = (*balance.inflows, *balance.outflows, *balance.before, *balance.after)
    return len({m.state.fluid for m in matter}) == 1


def _given(state: lw.State) -> lw.GivenState:
    return lw.GivenState(h=state.h, s=state.s, T=state.T, p=state.p, v=state.v, datum="mine")


def _given_elsewhere(state: lw.State) -> lw.GivenState:
    """The same state on a datum of another author."""
    return lw.GivenState(
        h=state.h + lw.quantity(_SHIFT_H, "J/kg"),
        s=state.s - lw.quantity(_SHIFT_S, "J/(kg*K)"),
        T=state.T,
        p=state.p,
        v=state.v,
        datum="theirs",
    )
