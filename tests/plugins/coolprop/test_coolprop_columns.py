"""Columns of a pure fluid by p with h or s: the answers of the library, for far fewer searches."""

from __future__ import annotations

import math
import pickle
from concurrent.futures import ThreadPoolExecutor
from functools import partial

import numpy as np
import pytest
from CoolProp.CoolProp import (
    PT_INPUTS,
    AbstractState,
    DmassT_INPUTS,
    iDmass,
    iP,
    iphase_gas,
    iphase_supercritical_liquid,
    iT,
)

from lostwork_plugins.coolprop.pure import PureModel
from lostwork_plugins.coolprop.pure_columns import _evaluated
from lostwork_plugins.coolprop.rows import columns_of
from lostwork_plugins.coolprop.saturation_table import saturated_at

NAMES = ("T", "p", "v", "h", "s", "quality")
COUNT = 600
LINES = {
    "nitrogen above its critical pressure": ("Nitrogen", (120.0, 400.0), (60e5, 90e5)),
    "cold liquid water": ("Water", (290.0, 420.0), (20e5, 50e5)),
    "superheated steam": ("Water", (560.0, 900.0), (5e5, 60e5)),
    "liquid carbon dioxide": ("CarbonDioxide", (225.0, 270.0), (45e5, 90e5)),
    "propane vapour": ("n-Propane", (330.0, 450.0), (5e5, 9e5)),
    "helium": ("Helium", (6.0, 300.0), (1e5, 20e5)),
}


def _one_by_one(model, pair, p, y):
    return columns_of(partial(model._row, model._here(), pair), p, y)


def _assert_same(model, column, single):
    assert column.failed == single.failed
    assert (np.isnan(column.quality) == np.isnan(single.quality)).all()
    found = ~np.isnan(single.T)
    assert (np.isnan(column.T) == ~found).all()
    # The search of the library ends within 1e-9 of T, that is 1e-9 c_p of entropy; the columns are
    # held against (T, p) itself, and more tightly, further down.
    noise = 3 * model.noise_at(single.T[found], single.p[found])
    assert np.all(np.abs(column.T - single.T)[found] <= 3e-9 * single.T[found])
    assert np.all(np.abs(column.s - single.s)[found] <= noise)
    assert np.all(np.abs(column.h - single.h)[found] <= noise * single.T[found])


@pytest.fixture
def asked(monkeypatch):
    """Count the searches of the library and the evaluations of the equation."""
    counts = {"searches": 0, "evaluations": 0}
    row, equation = PureModel._row, _evaluated

    def counting_row(self, here, pair, x, y):
        counts["searches"] += pair[1] != "quality"
        return row(self, here, pair, x, y)

    def counting_equation(state, zero, phase, T, rho):
        counts["evaluations"] += T.size
        return equation(state, zero, phase, T, rho)

    monkeypatch.setattr(PureModel, "_row", counting_row)
    monkeypatch.setattr("lostwork_plugins.coolprop.pure_columns._evaluated", counting_equation)
    return counts


@pytest.mark.parametrize("line", LINES)
@pytest.mark.parametrize("order", ["in order", "shuffled"])
def test_neighbours_give_the_states_that_the_library_finds_one_by_one(model_of, line, order):
    fluid, T, p = LINES[line]
    model = model_of(fluid)
    T, p = np.linspace(*T, COUNT), np.linspace(*p, COUNT)
    rng = np.random.default_rng(5)
    if order == "shuffled":
        T, p = T[rng.permutation(COUNT)], p[rng.permutation(COUNT)]
    start = model.columns(("T", "p"), T, p)
    assert start.failed == {}
    for name in ("h", "s"):
        y = getattr(start, name)
        column = model.columns(("p", name), p, y)
        _assert_same(model, column, _one_by_one(model, ("p", name), p, y))
        # The way there and back: (T, p) is what the states were made from.
        assert np.max(np.abs(column.T / T - 1)) < 3e-9


@pytest.mark.parametrize("line", LINES)
def test_a_state_among_neighbours_costs_little_more_than_one_evaluation(model_of, asked, line):
    fluid, T, p = LINES[line]
    model = model_of(fluid)
    T, p = np.linspace(*T, 3000), np.linspace(*p, 3000)
    for name in ("h", "s"):
        y = getattr(model.columns(("T", "p"), T, p), name)
        asked.update(searches=0, evaluations=0)
        assert model.columns(("p", name), p, y).failed == {}
        assert asked["searches"] <= 60, asked
        assert asked["evaluations"] <= 1.5 * 3000, asked


def test_shuffled_rows_are_visited_by_way_of_their_neighbours(model_of, asked):
    model = model_of("n-Propane")
    rng = np.random.default_rng(8)
    T, p = rng.uniform(330.0, 450.0, 3000), rng.uniform(5e5, 9e5, 3000)
    h = model.columns(("T", "p"), T, p).h
    asked.update(searches=0, evaluations=0)
    model.columns(("p", "h"), p, h)
    assert asked["searches"] <= 0.08 * 3000
    assert asked["evaluations"] <= 3 * 3000


@pytest.mark.parametrize("line", LINES)
def test_density_and_temperature_found_give_back_p_h_and_s(model_of, line):
    fluid, T, p = LINES[line]
    model, raw = model_of(fluid), AbstractState("HEOS", fluid)
    T, p = np.linspace(*T, COUNT), np.linspace(*p, COUNT)
    start = model.columns(("T", "p"), T, p)
    for name in ("h", "s"):
        column = model.columns(("p", name), p, getattr(start, name))
        for i in range(COUNT):
            raw.update(DmassT_INPUTS, 1.0 / column.v[i], column.T[i])
            # The equation itself rounds a liquid's pressure to some 1e-13 of rho dp/drho.
            rounding = 2e-13 * raw.rhomass() * raw.first_partial_deriv(iP, iDmass, iT)
            assert abs(raw.p() - p[i]) <= 3e-12 * p[i] + rounding
            assert raw.hmass() == pytest.approx(column.h[i], abs=1e-6)
            assert raw.smass() == pytest.approx(column.s[i], abs=3e-9)


@pytest.mark.parametrize("fluid", ["Nitrogen", "Water", "CarbonDioxide", "n-Propane", "R134a"])
@pytest.mark.parametrize("held", [True, False], ids=["isobar", "gliding"])
def test_a_column_through_the_dome_keeps_its_phases(model_of, asked, fluid, held):
    model = model_of(fluid)
    low = model.columns(("T", "quality"), 0.8 * model.critical().T, 0.0).p
    p = np.full(COUNT, low) if held else np.geomspace(low, 0.6 * model.critical().p, COUNT)
    liquid, vapour = (model.columns(("p", "quality"), p, np.full(COUNT, q)) for q in (0.0, 1.0))
    share = np.linspace(-0.15, 1.15, COUNT)
    for name in ("h", "s"):
        bottom, top = getattr(liquid, name), getattr(vapour, name)
        y = bottom + share * (top - bottom)
        asked.update(searches=0)
        column = model.columns(("p", name), p, y)
        assert asked["searches"] <= 0.08 * COUNT
        _assert_same(model, column, _one_by_one(model, ("p", name), p, y))
        inside = (share > 1e-3) & (share < 1.0 - 1e-3)
        assert column.quality[inside] == pytest.approx(share[inside], abs=1e-11)
        # Exact for a pure fluid: ds = dh / T at one pressure.
        gained = (column.h - liquid.h)[inside] / column.T[inside]
        assert (column.s - liquid.s)[inside] == pytest.approx(gained, abs=1e-6)


def test_rows_within_a_hair_of_saturation_are_told_by_the_library(model_of):
    model = model_of("R134a")
    p = np.full(COUNT, 6e5)
    edge = model.columns(("p", "quality"), p, np.tile([0.0, 1.0], COUNT // 2))
    for off in (0.0, 1e-9, -1e-9, 1e-3, -1e-3):
        h = edge.h + off
        _assert_same(model, model.columns(("p", "h"), p, h), _one_by_one(model, ("p", "h"), p, h))


def test_bad_rows_of_a_long_column_are_marked_with_their_reason(model_of):
    model = model_of("Water")
    T = np.linspace(300.0, 500.0, COUNT)
    h, p = model.columns(("T", "p"), T, np.full(COUNT, 5e6)).h, np.full(COUNT, 5e6)
    p[3], p[77], h[40], h[500], h[501] = -1.0, math.nan, math.inf, 1e9, -3e5
    column, single = (f(model, ("p", "h"), p, h) for f in (PureModel.columns, _one_by_one))
    assert set(column.failed) == {3, 77, 40, 500, 501}
    _assert_same(model, column, single)


@pytest.mark.parametrize("fluid", ["R134a", "Methanol", "CarbonDioxide", "Water"])
def test_near_the_critical_point_a_column_misses_no_state_that_a_point_finds(model_of, fluid):
    model = model_of(fluid)
    critical, rng = model.critical(), np.random.default_rng(7)
    T = critical.T * (1 + rng.uniform(-0.02, 0.02, 400))
    p = critical.p * (1 + rng.uniform(-0.05, 0.05, 400))
    h = model.columns(("T", "p"), T, p).h
    known = ~np.isnan(h)
    T, p, h = T[known], p[known], h[known]
    column, single = model.columns(("p", "h"), p, h), _one_by_one(model, ("p", "h"), p, h)
    assert set(column.failed) <= set(single.failed)
    found = ~np.isnan(column.T)
    assert column.T[found] == pytest.approx(T[found], rel=1e-7)
    back = model.columns(("T", "v"), column.T[found], column.v[found])
    assert back.p == pytest.approx(p[found], rel=1e-7)


@pytest.mark.parametrize(
    ("fluid", "p", "T"), [("Nitrogen", 1e8, (72.0, 130.0)), ("R134a", 2e5, (430.0, 480.0))]
)
def test_a_column_that_runs_out_of_the_range_fails_from_there_on(model_of, fluid, p, T):
    """Nitrogen that freezes, R134a hotter than its equation goes."""
    model, raw = model_of(fluid), AbstractState("HEOS", fluid)
    T = np.linspace(*T, COUNT)
    h = np.empty(COUNT)
    raw.specify_phase(iphase_supercritical_liquid if p > 1e7 else iphase_gas)
    for i in range(COUNT):
        raw.update(PT_INPUTS, p, T[i])
        h[i] = raw.hmass()
    column = model.columns(("p", "h"), np.full(COUNT, p), h)
    single = _one_by_one(model, ("p", "h"), np.full(COUNT, p), h)
    assert 50 < len(column.failed) < COUNT - 50
    assert set(column.failed) == set(single.failed)
    _assert_same(model, column, single)


@pytest.mark.parametrize("fluid", ["Water", "CarbonDioxide"])
def test_the_saturation_table_repeats_the_equation(model_of, fluid):
    model = model_of(fluid)
    critical = model.critical()
    p = np.geomspace(
        1.1 * model.columns(("T", "quality"), model.limits.T_min, 0.0).p, 0.99 * critical.p, 700
    )
    row = partial(model._row, model._here(), ("p", "quality"))
    table = saturated_at(row, p)
    known = ~np.isnan(table[:, 0, 0])
    assert known.mean() > 0.95
    for index in np.flatnonzero(known)[::9]:
        for phase in (0, 1):
            T, _, v, h, s, _ = row(p[index], float(phase))
            span = abs(row(p[index], 1.0)[3] - row(p[index], 0.0)[3])
            assert table[index, phase, 0] == pytest.approx(T, rel=1e-11)
            assert table[index, phase, 1] == pytest.approx(v, rel=1e-10)
            assert table[index, phase, 2] == pytest.approx(h, abs=1e-10 * span)
            assert table[index, phase, 3] == pytest.approx(s, abs=1e-10 * span / T)


def test_long_columns_are_alike_in_every_thread_and_after_a_pickle(model_of):
    model = model_of("CarbonDioxide")
    T = np.linspace(230.0, 500.0, COUNT)
    starts = [model.columns(("T", "p"), T, np.full(COUNT, p)) for p in (2e6, 5e6, 8e6, 1.2e7)]
    alone = [model.columns(("p", "h"), start.p, start.h) for start in starts]
    with ThreadPoolExecutor(4) as pool:
        together = list(pool.map(lambda start: model.columns(("p", "h"), start.p, start.h), starts))
    again = pickle.loads(pickle.dumps(model))
    for start, one, other in zip(starts, alone, together, strict=True):
        copy = again.columns(("p", "h"), start.p, start.h)
        for name in NAMES:
            expected = getattr(one, name)
            assert np.array_equal(expected, getattr(other, name), equal_nan=True)
            assert np.array_equal(expected, getattr(copy, name), equal_nan=True)
