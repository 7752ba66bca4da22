"""Pairs, zero, mixing entropy, failed rows and sharing of ideal-gas models."""

from __future__ import annotations

import math
import pickle
from concurrent.futures import ThreadPoolExecutor

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import lostwork as lw

NATIVE = sorted(pair for pair in lw.DETERMINING_PAIRS if "quality" not in pair)
FLUIDS = ["air", "nitrogen", "water", "hydrogen", "argon", "constant", "Shomate", "wet mixture"]


@pytest.fixture(scope="session")
def models(open_model, air):
    return {
        "air": air,
        "nitrogen": open_model("nitrogen"),
        "water": open_model("water"),
        "hydrogen": open_model("hydrogen"),
        "argon": open_model("argon"),
        "constant": open_model("nitrogen", gamma=1.4),
        "Shomate": open_model("methane", correlation="Shomate"),
        "wet mixture": open_model({"water": 0.1, "methane": 0.6, "helium": 0.3}),
    }


def _properties(columns):
    u = columns.h - columns.p * columns.v
    return {**{name: getattr(columns, name) for name in "Tpvhs"}, "u": u}


@pytest.mark.parametrize("pair", NATIVE, ids="-".join)
@pytest.mark.parametrize("fluid", FLUIDS)
@settings(max_examples=30, deadline=None)
@given(place=st.floats(0.0, 1.0), log_p=st.floats(-2.0, 8.0))
def test_every_pair_of_a_state_leads_back_to_it(models, fluid, pair, place, log_p):
    model = models[fluid]
    T = model.limits.T_min + place * (model.limits.T_max - model.limits.T_min)
    state = _properties(model.columns(("T", "p"), T, 10.0**log_p))
    found = model.columns(pair, state[pair[0]], state[pair[1]])
    assert not found.failed
    # u = h - p v has lost the digits that h had; the rounding of h is worth eps * h / cp.
    assert pytest.approx(T, rel=1e-12) == found.T
    assert found.p == pytest.approx(state["p"], rel=1e-11)
    assert found.v == pytest.approx(state["v"], rel=1e-11)
    assert math.isnan(found.quality)
    assert isinstance(found.T, float)


@pytest.mark.parametrize("pair", NATIVE, ids="-".join)
@pytest.mark.parametrize("fluid", FLUIDS)
def test_an_array_holds_what_its_points_give_alone(models, fluid, pair):
    model = models[fluid]
    rng = np.random.default_rng(7)
    T = rng.uniform(model.limits.T_min, model.limits.T_max, 40)
    state = _properties(model.columns(("T", "p"), T, 10 ** rng.uniform(0, 8, 40)))
    x, y = state[pair[0]], state[pair[1]]
    together = model.columns(pair, x, y)
    assert not together.failed
    for row in range(40):
        alone = model.columns(pair, float(x[row]), float(y[row]))
        for name in "Tpv":
            assert getattr(alone, name) == pytest.approx(getattr(together, name)[row], rel=3e-14)
        assert alone.h == pytest.approx(together.h[row], rel=1e-13, abs=1e-8)
        assert alone.s == pytest.approx(together.s[row], rel=1e-13, abs=1e-10)


@pytest.mark.parametrize("fluid", FLUIDS)
def test_closed_loops_leave_less_entropy_than_the_stated_noise(models, fluid):
    model = models[fluid]
    rng = np.random.default_rng(3)
    T = rng.uniform(model.limits.T_min, model.limits.T_max, 3000)
    start = model.columns(("T", "p"), T, 10 ** rng.uniform(0, 8, 3000))
    state = _properties(start)
    for pair in NATIVE:
        found = model.columns(pair, state[pair[0]], state[pair[1]])
        again = model.columns(("T", "p"), found.T, found.p)
        assert np.max(np.abs(again.s - start.s)) < 0.1 * model.entropy_noise
    assert model.entropy_noise < 1e-8


@pytest.mark.parametrize("fluid", FLUIDS)
@pytest.mark.parametrize("end", ["T_min", "T_max"])
@pytest.mark.parametrize("pair", NATIVE, ids="-".join)
def test_the_ends_of_the_range_belong_to_it_for_every_pair(models, fluid, end, pair):
    model = models[fluid]
    T = getattr(model.limits, end)
    state = _properties(model.columns(("T", "p"), T, 2e5))
    assert pytest.approx(T, rel=1e-12) == model.columns(pair, state[pair[0]], state[pair[1]]).T


def test_the_gas_law_and_the_joule_law_hold(models):
    model = models["air"]
    T, p = np.array([100.0, 300.0, 2000.0]), np.array([1.0, 1e5, 1e8])
    columns = model.columns(("T", "p"), T, p)
    assert columns.v == pytest.approx(lw.R * T / p / model.molar_mass, rel=1e-15)
    assert model.columns(("T", "p"), T, p * 7).h == pytest.approx(columns.h, rel=1e-15)


def test_entropy_falls_by_R_ln_of_the_pressure_ratio(models):
    low, high = (models["water"].columns(("T", "p"), 500.0, p) for p in (1e5, 3e6))
    assert low.s - high.s == pytest.approx(
        lw.R / models["water"].molar_mass * math.log(30.0), rel=1e-13
    )


def test_mixing_at_one_T_and_p_generates_minus_R_sum_x_ln_x(open_model):
    composition = {"nitrogen": 0.5, "oxygen": 0.3, "carbon dioxide": 0.2}
    mixture = open_model(composition)
    T, p = 420.0, 3e5
    mixed = mixture.columns(("T", "p"), T, p)
    h = s = 0.0
    for gas, x in composition.items():
        pure = open_model(gas)
        part = pure.columns(("T", "p"), T, p)
        h += x * part.h * pure.molar_mass
        s += x * part.s * pure.molar_mass
    mixing = -lw.R * sum(x * math.log(x) for x in composition.values())
    assert mixed.h * mixture.molar_mass == pytest.approx(h, rel=1e-12)
    assert mixed.s * mixture.molar_mass == pytest.approx(s + mixing, rel=1e-12)
    assert mixture.ideal_gas_limit()[1] * mixture.molar_mass == pytest.approx(mixing, rel=1e-12)


@pytest.mark.parametrize("fluid", FLUIDS)
def test_the_ideal_gas_limit_is_the_state_at_298_K_and_1_bar(models, fluid):
    model = models[fluid]
    state = model.columns(("T", "p"), lw.REFERENCE_TEMPERATURE, lw.REFERENCE_PRESSURE)
    h, s = model.ideal_gas_limit()
    assert h == pytest.approx(state.h, abs=1e-8)
    assert s == pytest.approx(state.s, abs=1e-10)


def test_a_correlation_that_starts_above_298_K_has_no_common_datum(open_model):
    steam = open_model("water", correlation="Shomate")
    assert steam.limits.T_min == 500.0
    assert steam.ideal_gas_limit() is None
    assert steam.columns(("T", "p"), 600.0, 1e5).h > 0.0


def test_a_mixture_is_bounded_by_its_narrowest_component(open_model):
    model = open_model({"nitrogen": 0.9, "propane": 0.1}, name="blanket")
    assert (model.limits.T_min, model.limits.T_max) == (50.0, 1500.0)
    reason = model.columns(("T", "p"), 1600.0, 1e5).failed[0]
    for said in ("1600 K", "1500 K", "TRC", "propane", "blanket"):
        assert said in reason


def test_bad_rows_are_named_and_the_others_computed(models):
    T = np.array([40.0, 300.0, 6000.0, np.nan, 300.0, 300.0, np.inf, 400.0])
    p = np.array([1e5, 1e5, 1e5, 1e5, -1.0, 1e12, 1e5, 1e5])
    columns = models["nitrogen"].columns(("T", "p"), T, p)
    assert sorted(columns.failed) == [0, 2, 3, 4, 5, 6]
    assert "below 50 K" in columns.failed[0]
    assert "above 5000 K" in columns.failed[2]
    assert "not a finite number" in columns.failed[3]
    assert "not above zero" in columns.failed[4]
    assert "p = 1e+12 Pa is outside" in columns.failed[5]
    for name in "Tpvhs":
        column = getattr(columns, name)
        assert np.isnan(column[[0, 2, 3, 4, 5, 6]]).all()
        assert np.isfinite(column[[1, 7]]).all()


@pytest.mark.parametrize(
    ("pair", "x", "y"),
    [
        (("p", "h"), 1e5, -1e7),
        (("p", "h"), 1e5, 1e9),
        (("p", "h"), 0.0, 0.0),
        (("p", "s"), 1e5, 1e6),
        (("p", "s"), -1e5, 0.0),
        (("v", "s"), 0.0, 0.0),
        (("v", "s"), 1.0, -1e7),
        (("v", "u"), 0.0, 0.0),
        (("v", "h"), math.inf, 0.0),
        (("T", "v"), 300.0, 0.0),
        (("T", "s"), 300.0, -1e9),
        (("h", "s"), 0.0, -1e9),
        (("h", "s"), math.nan, 0.0),
        (("s", "u"), 0.0, 1e12),
        (("p", "v"), 1e5, 1e9),
        (("p", "u"), math.nan, 0.0),
    ],
)
@pytest.mark.parametrize("fluid", ["nitrogen", "constant"])
def test_what_has_no_state_fails_alike_alone_and_in_an_array(models, fluid, pair, x, y):
    model = models[fluid]
    alone = model.columns(pair, x, y)
    assert list(alone.failed) == [0]
    assert math.isnan(alone.T)
    assert math.isnan(alone.s)
    together = model.columns(pair, np.array([x, x]), np.array([y, y]))
    assert together.failed == {0: alone.failed[0], 1: alone.failed[0]}
    assert np.isnan(together.h).all()


def test_an_empty_array_has_no_states(models):
    columns = models["air"].columns(("p", "h"), np.empty(0), np.empty(0))
    assert columns.T.shape == (0,)
    assert not columns.failed


@pytest.mark.parametrize("pair", [("T", "h"), ("T", "u"), ("h", "u"), ("p", "quality")])
def test_a_pair_that_fixes_no_gas_is_refused(models, pair):
    with pytest.raises(lw.PairRefused):
        models["air"].columns(pair, 1.0, 1.0)


def test_there_are_no_phases(models):
    assert not models["water"].two_phase
    assert models["water"].critical() is None
    with pytest.raises(lw.PairRefused):
        models["air"].split(300.0, 1e5)


@pytest.mark.parametrize("fluid", FLUIDS)
def test_a_model_pickles_as_its_recipe(models, fluid):
    model = models[fluid]
    data = pickle.dumps(model)
    assert len(data) < 4000
    again = pickle.loads(data)
    assert again.limits == model.limits
    assert again.notes == model.notes
    assert again.columns(("p", "h"), 1e5, 1e5).s == model.columns(("p", "h"), 1e5, 1e5).s


def test_threads_share_a_model(models):
    model = models["air"]
    T = np.linspace(100.0, 2000.0, 500)
    p = np.full_like(T, 1e5)
    h = model.columns(("T", "p"), T, p).h

    def invert(_):
        found = model.columns(("p", "h"), p, h)
        point = model.columns(("p", "h"), 1e5, float(h[7]))
        return np.max(np.abs(found.T / T - 1.0)), abs(point.T / T[7] - 1.0)

    with ThreadPoolExecutor(8) as pool:
        errors = np.array(list(pool.map(invert, range(200))))
    assert errors.max() < 1e-14


def test_what_is_given_is_handed_back_and_stays_the_callers(models):
    p, h = np.array([1e5, 2e5]), np.array([1e5, 3e5])
    columns = models["air"].columns(("p", "h"), p, h)
    assert np.array_equal(columns.h, h)
    p[0] = 7.0
    assert columns.p[0] == 1e5
