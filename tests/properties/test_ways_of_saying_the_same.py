"""Units, shapes and datums are ways of saying the same: no result hangs on them."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from _exploring import explore
from _materials import MATERIALS, Material, every_material
from _recipes import RECIPES, applicable, legal_fields, reshaped, row_of
from _soundness import assert_same_loss, slack_of
from hypothesis import strategies as st

import lostwork as lw
from lostwork.testing import states, surroundings

_UNITS = {
    "kelvin": ("degC", "degF", "degR", "mK"),
    "pascal": ("bar", "kPa", "psi", "MPa", "atm"),
    "kilogram / second": ("lb/h", "t/h", "g/s"),
    "kilogram": ("lb", "g", "t"),
    "meter / second": ("ft/min", "km/h"),
    "dimensionless": ("percent",),
    "joule / kilogram": ("kJ/kg", "BTU/lb"),
    "joule / kelvin / kilogram": ("kJ/kg/K", "BTU/lb/degR"),
    "meter ** 3 / kilogram": ("ft^3/lb", "L/g"),
    "meter ** 3": ("L", "ft^3"),
}
_SAME = 1e-12
_ROWS = 6
_SHAPES = ((_ROWS,), (_ROWS, 1), (2, 3))
_WITHOUT_ROWS = {"as-measured"}
"""Process types that take one unknown heat, which has no rows of its own."""


def _in_other_units(value: Any, draw: Any) -> Any:
    """Say every quantity of some fields in other units; differences stay in kelvins."""
    if isinstance(value, dict):
        return {
            name: entry if name == "minimum_approach" else _in_other_units(entry, draw)
            for name, entry in value.items()
        }
    if hasattr(value, "units") and str(value.units) in _UNITS:
        return value.to(draw(st.sampled_from(_UNITS[str(value.units)])))
    return value


@every_material()
def test_state_does_not_depend_on_units(material: Material) -> None:
    low, high = material.T
    p_low, p_high = material.p

    def run(example: Any) -> tuple[lw.State, lw.State]:
        state, data = example
        given = _in_other_units({"T": state.T, "p": state.p}, data.draw)
        return state, material.fluid.state(**given)

    def check(example: Any, found: tuple[lw.State, lw.State]) -> None:
        first, second = (state.si for state in found)
        entropy = lw.R / material.fluid.molar_mass_si
        # The conversion itself rounds T and p; a liquid or critical v may amplify that.
        assert np.isclose(first.T, second.T, rtol=_SAME, atol=0.0)
        assert np.isclose(first.p, second.p, rtol=_SAME, atol=0.0)
        assert abs(first.s - second.s) <= 1e-10 * entropy + _SAME * abs(first.s)
        assert abs(first.h - second.h) <= 1e-10 * entropy * first.T + _SAME * abs(first.h)

    strategy = st.tuples(
        states(fluid=material.fluid, T_low=low, T_high=high, p_low=p_low, p_high=p_high), st.data()
    )
    explore(f"units, {material.name}", strategy, run, check, cost=material.cost)


@pytest.mark.parametrize("kind", RECIPES)
def test_loss_of_a_step_does_not_depend_on_units(kind: str) -> None:
    quick = [m for m in MATERIALS if m.cost < 5.0 and applicable(kind, m)]

    def run(example: Any) -> tuple[lw.Balance, lw.Balance]:
        fields, site, data = example
        said_otherwise = _in_other_units(fields, data.draw)
        first = lw.process(kind, **fields).balance(site)
        return first, lw.process(kind, **said_otherwise).balance(site)

    def check(example: Any, balances: tuple[lw.Balance, lw.Balance]) -> None:
        assert_same_loss(*balances)
        assert balances[0].verdict.status == balances[1].verdict.status

    strategy = st.sampled_from(quick).flatmap(
        lambda material: st.tuples(
            legal_fields(kind=kind, material=material), surroundings(), st.data()
        )
    )
    explore(f"units, {kind}", strategy, run, check, cost=2.0)


@pytest.mark.parametrize("kind", sorted(set(RECIPES) - _WITHOUT_ROWS))
def test_rows_of_an_array_are_the_steps_one_by_one(kind: str) -> None:
    quick = [m for m in MATERIALS if m.cost < 5.0 and applicable(kind, m)]

    def run(example: Any) -> tuple[lw.Balance, list[lw.Balance | None]]:
        fields, site, shape = example
        whole = lw.process(kind, **reshaped(fields, shape)).balance(site)
        return whole, [_alone(kind, row_of(fields, row), site) for row in range(_ROWS)]

    def check(example: Any, found: tuple[lw.Balance, list[lw.Balance | None]]) -> None:
        whole, alone = found
        _, _, shape = example
        lost = np.asarray(whole.work_lost_si)
        assert lost.shape == shape
        assert whole.verdict.statuses.shape == shape
        slack = np.ravel(np.broadcast_to(slack_of(whole), shape))
        for row, balance in enumerate(alone):
            in_array = float(lost.ravel()[row])
            if balance is None:
                assert np.isnan(in_array), f"row {row} cannot run alone and is {in_array} here"
                continue
            apart = abs(in_array - float(balance.work_lost_si))
            # A column and a point may be solved in other ways, each to the noise of the backend.
            assert apart <= slack[row], f"row {row}: {in_array} against {balance!r}"
            assert whole.verdict.statuses.ravel()[row] == balance.verdict.status

    strategy = st.sampled_from(quick).flatmap(
        lambda material: st.tuples(
            legal_fields(kind=kind, material=material, rows=_ROWS),
            surroundings(),
            st.sampled_from(_SHAPES),
        )
    )
    explore(f"rows, {kind}", strategy, run, check, cost=2.0, least_accepted=0.1)


@every_material()
def test_rows_of_a_state_are_the_points_one_by_one(material: Material) -> None:
    low, high = material.T
    p_low, p_high = material.p
    one = states(fluid=material.fluid, T_low=low, T_high=high, p_low=p_low, p_high=p_high)

    def run(example: list[lw.State]) -> list[lw.State]:
        T, h, s, p = (np.array([getattr(x.si, n) for x in example]) for n in ("T", "h", "s", "p"))
        return [
            material.fluid.state_si(pair, first.reshape(shape), second.reshape(shape))
            for (pair, first, second), shape in zip(
                ((("T", "p"), T, p), (("p", "h"), p, h), (("p", "s"), p, s)), _SHAPES, strict=True
            )
        ]

    def check(example: list[lw.State], arrays: list[lw.State]) -> None:
        entropy = lw.R / material.fluid.molar_mass_si
        for array, shape in zip(arrays, _SHAPES, strict=True):
            assert array.shape == shape
            assert not array.failed
            for row, alone in enumerate(example):
                point = array.reshape(_ROWS)[row].si
                noise = float(material.fluid.noise_at(point.T, point.p))
                assert np.isclose(point.T, alone.si.T, rtol=1e-7, atol=0.0)
                assert abs(point.s - alone.si.s) <= 1e-9 * entropy + 10.0 * noise
                energy = 1e-9 * entropy + 10.0 * noise
                assert abs(point.h - alone.si.h) <= point.T * energy

    explore(
        f"rows of states, {material.name}",
        st.lists(one, min_size=_ROWS, max_size=_ROWS),
        run,
        check,
        cost=1.5 * material.cost,
        least_accepted=0.9,
    )


def _alone(kind: str, fields: Any, site: lw.Surroundings) -> lw.Balance | None:
    try:
        return lw.process(kind, **fields).balance(site)
    except (lw.ProcessError, lw.PropertyError, lw.PathError):
        return None
