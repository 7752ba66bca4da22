"""Columns of mixtures: the phase is established, and the answers are those of single points."""

from __future__ import annotations

import pickle
from concurrent.futures import ThreadPoolExecutor
from functools import partial

import numpy as np
import pytest

from lostwork import R
from lostwork_plugins.coolprop.equilibrium import NoEquilibrium, equilibrium
from lostwork_plugins.coolprop.mixture_states import MixtureStates
from lostwork_plugins.coolprop.phase import PhaseEquation
from lostwork_plugins.coolprop.rows import columns_of

MIXTURES = {
    "dry air": {"Nitrogen": 0.7812, "Oxygen": 0.2096, "Argon": 0.0092},
    "natural gas": {"Methane": 0.92, "Ethane": 0.05, "n-Propane": 0.02, "Nitrogen": 0.01},
    "R407C": {"R32": 0.3811, "R125": 0.1796, "R134a": 0.4393},
    "two refrigerants that boil almost as one": {"R32": 0.7, "R125": 0.3},
    "carbon dioxide and water": {"CarbonDioxide": 0.5, "Water": 0.5},
}
# Invented, of the usual components of a natural gas.
EIGHT = {
    "Methane": 0.85,
    "Ethane": 0.06,
    "n-Propane": 0.03,
    "n-Butane": 0.01,
    "IsoButane": 0.01,
    "Nitrogen": 0.02,
    "CarbonDioxide": 0.015,
    "n-Pentane": 0.005,
}
NAMES = ("T", "p", "v", "h", "s", "quality")


def _one_by_one(model, pair, x, y):
    return columns_of(partial(model._here().row, pair), x, y)


def _assert_same(column, single):
    assert set(column.failed) == set(single.failed)
    assert (np.isnan(column.quality) == np.isnan(single.quality)).all()
    found = ~np.isnan(single.T)
    assert (np.isnan(column.T) == ~found).all()
    assert column.T[found] == pytest.approx(single.T[found], rel=1e-11)
    assert column.v[found] == pytest.approx(single.v[found], rel=1e-9)
    assert column.s[found] == pytest.approx(single.s[found], abs=2e-8)
    assert column.h[found] == pytest.approx(single.h[found], abs=5e-6)


@pytest.fixture
def counts(monkeypatch):
    """Count evaluations of the equation, rows solved from nothing, and searches for a density."""
    counted = {"evaluations": 0, "rows": 0, "densities": 0}
    evaluate, row = PhaseEquation.state_and_slopes, MixtureStates.row
    density = PhaseEquation._density

    def counting(name, function):
        def call(*arguments):
            counted[name] += 1
            return function(*arguments)

        return call

    monkeypatch.setattr(PhaseEquation, "state_and_slopes", counting("evaluations", evaluate))
    monkeypatch.setattr(MixtureStates, "row", counting("rows", row))
    monkeypatch.setattr(PhaseEquation, "_density", counting("densities", density))
    return counted


@pytest.mark.parametrize("name", MIXTURES)
def test_a_column_from_gas_through_the_dome_to_liquid_gives_the_states_of_single_points(
    model_of, name
):
    """Led on from the gas, neighbours follow the metastable branch past the dome."""
    model = model_of(MIXTURES[name])
    middle, count = model.critical().T, 90
    low = max(model.limits.T_min, 0.62 * middle)
    T, p = np.linspace(low, 1.4 * middle, count), np.full(count, 0.25 * model.critical().p)
    phases = model._here().phase_map
    phases.single(T, p)  # the map is drawn, else so short a column would do without it
    column = model.columns(("T", "p"), T, p)
    _assert_same(column, _one_by_one(model, ("T", "p"), T, p))
    known = ~np.isnan(column.T)
    p, T = p[known], T[known]
    for held in ("h", "s"):
        y = getattr(column, held)[known]
        back = model.columns(("p", held), p, y)
        if name == "carbon dioxide and water":  # two liquids on the way, which are not modelled
            back_T = back.T[~np.isnan(back.T)]
            assert back_T.size > 0.9 * T.size
            assert back_T == pytest.approx(T[~np.isnan(back.T)], rel=1e-9)
            continue
        assert back.failed == {}
        assert pytest.approx(T, rel=1e-9) == back.T
        assert (np.isnan(back.quality) == np.isnan(column.quality[known])).all()


@pytest.mark.parametrize("parts", [MIXTURES["dry air"], EIGHT], ids=["air", "natural gas"])
@pytest.mark.parametrize("held", [True, False], ids=["isobar", "gliding"])
def test_a_gas_among_neighbours_costs_one_evaluation_and_no_phase_test(
    model_of, counts, parts, held
):
    model, count = model_of(parts), 600
    T = np.linspace(330.0, 420.0, count)
    p = np.full(count, 50e5) if held else np.linspace(30e5, 60e5, count)
    model._here().phase_map.single(T, p)
    column = model.columns(("T", "p"), T, p)
    tests = model._here().phase_map.tests
    for pair in (("T", "p"), ("p", "h"), ("p", "s")):
        x, y = (getattr(column, name) for name in pair)
        counts.update(evaluations=0, rows=0, densities=0)
        again = model.columns(pair, x, y)
        assert again.failed == {}
        assert pytest.approx(T, rel=1e-12) == again.T
        assert counts["rows"] <= 15, counts
        assert counts["evaluations"] <= 1.4 * count, counts
        assert counts["densities"] <= 50 * counts["rows"], counts
    assert model._here().phase_map.tests == tests
    few = slice(None, None, 97)
    single = _one_by_one(model, ("T", "p"), T[few], p[few])
    assert column.s[few] == pytest.approx(single.s, abs=1e-9)
    assert column.h[few] == pytest.approx(single.h, abs=1e-7)


def test_no_state_of_an_eight_component_gas_fails_by_p_and_h_or_s(model_of):
    """The library's own (p, h) fails for two in five of them, measured on CoolProp 8.0.0."""
    model, rng = model_of(EIGHT), np.random.default_rng(17)
    T = np.concatenate((rng.uniform(217.0, 300.0, 30), np.linspace(300.0, 420.0, 60)))
    p = np.concatenate((np.exp(rng.uniform(np.log(1e5), np.log(1.1e7), 30)), np.full(60, 4e6)))
    T[0] = model.limits.T_min  # on the very limit
    states = model.columns(("T", "p"), T, p)
    assert states.failed == {}
    assert 5 < np.isfinite(states.quality).sum() < 30
    for name in ("h", "s"):
        back = model.columns(("p", name), p, getattr(states, name))
        assert back.failed == {}
        assert pytest.approx(T, rel=1e-8) == back.T


def test_a_state_beyond_temperatures_without_an_answer_is_found(model_of):
    """Near its critical point the phases of helium with nitrogen cannot be told everywhere."""
    model = model_of({"Helium": 0.3, "Nitrogen": 0.7})
    T, p = 78.74567742108827, 2914061.1312553077
    state = model.columns(("T", "p"), T, p)
    assert 0.0 < state.quality < 1.0
    for name in ("h", "s"):
        back = model.columns(("p", name), p, getattr(state, name))
        assert back.failed == {}
        assert pytest.approx(T, rel=1e-9) == back.T


@pytest.mark.parametrize("name", ["natural gas", "R407C", "dry air"])
def test_the_phase_map_calls_single_only_what_the_stability_test_does(model_of, name):
    model, rng = model_of(MIXTURES[name]), np.random.default_rng(23)
    critical, states = model.critical(), model._here()
    T = rng.uniform(max(model.limits.T_min, 0.6 * critical.T), 1.6 * critical.T, 150)
    p = np.exp(rng.uniform(np.log(0.05), np.log(1.5), 150)) * critical.p
    known = states.phase_map.single(T, p)
    assert known.sum() > 60
    split = 0
    for index in range(150):
        try:
            found = equilibrium(states._equation, T[index], p[index], states._z)
        except NoEquilibrium:
            assert not known[index]
            continue
        if known[index]:
            assert not hasattr(found, "vapour_fraction")
            rho = np.array([found.rho])
            assert states.phase_map.single(T[[index]], p[[index]], rho)[0]
        else:
            split += hasattr(found, "vapour_fraction")
    assert split > 0


def test_the_phase_map_does_not_take_a_supercooled_gas_for_the_liquid(model_of):
    model = model_of(MIXTURES["R407C"])
    states, p = model._here(), 0.5 * model.critical().p
    bubble = model.columns(("p", "quality"), p, 0.0).T
    T = 0.95 * bubble
    liquid = equilibrium(states._equation, T, p, states._z)
    both = np.array([liquid.rho, 1.5 * p / (R * T)])
    known = states.phase_map.single(np.full(2, T), np.full(2, p), both)
    assert known.tolist() == [True, False]


def test_columns_of_a_mixture_are_alike_in_every_thread_and_after_a_pickle(model_of):
    model = model_of(MIXTURES["dry air"])
    T = np.linspace(200.0, 500.0, 120)
    starts = [model.columns(("T", "p"), T, np.full(120, p)) for p in (1e5, 2e6, 5e6, 2e7)]
    alone = [model.columns(("p", "h"), start.p, start.h) for start in starts]
    with ThreadPoolExecutor(4) as pool:
        together = list(pool.map(lambda start: model.columns(("p", "h"), start.p, start.h), starts))
    again = pickle.loads(pickle.dumps(model))
    for start, one, other in zip(starts, alone, together, strict=True):
        copy = again.columns(("p", "h"), start.p, start.h)
        for name in NAMES:
            # A search from nothing sets out from the last state of its thread.
            for twin in (other, copy):
                expected, found = getattr(one, name), getattr(twin, name)
                assert found == pytest.approx(expected, rel=1e-12, nan_ok=True)
