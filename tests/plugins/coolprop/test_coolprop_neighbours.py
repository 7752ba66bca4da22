"""Neighbours as guides: near ones cost one evaluation, misleading ones are refused."""

from __future__ import annotations

import math
from functools import partial

import numpy as np
import pytest
from CoolProp.CoolProp import iphase_not_imposed

from lostwork_plugins.coolprop.neighbours import solve_neighbours, tour
from lostwork_plugins.coolprop.pure_columns import _evaluated

R, C_V = 297.0, 743.0


def _perfect_gas(T, rho, *, p_rho=1.0, c_v=1.0):
    """A gas that has every root one asks for, with slopes that may be of the wrong sign."""
    h, s = (C_V + R) * T, C_V * np.log(T) - R * np.log(rho)
    ones = np.ones(T.shape)
    return np.stack((rho * R * T, h, s, p_rho * R * T, rho * R, c_v * C_V * ones), axis=1)


@pytest.mark.parametrize("far", [0.5, 0.85, 1.15, 2.0])
def test_a_root_that_leaps_from_its_neighbours_is_left_to_a_search_from_nothing(far):
    T, p = np.linspace(280.0, 300.0, 400), np.full(400, 60e5)
    T[[57, 203, 301]] *= far
    searched = []

    def cold(index):
        searched.append(index)
        # The search knows better: what the neighbours lead to is not the state.
        factor = 1.01 if index in (57, 203, 301) else 1.0
        return T[index] * factor, p[index], R * T[index] / p[index], 0.0, 0.0, math.nan

    table, _ = solve_neighbours(_perfect_gas, cold, "h", p, (C_V + R) * T, 400)
    assert np.isnan(table[[57, 203, 301], 0]).all()
    others = np.delete(np.arange(400), [57, 203, 301])
    assert table[others, 0] == pytest.approx(T[others], rel=1e-12)
    assert len(searched) <= 20


@pytest.mark.parametrize("slopes", [{"p_rho": -1.0}, {"c_v": -1.0}, {"p_rho": math.nan}])
def test_an_unstable_root_is_no_answer(slopes):
    T, p = np.linspace(280.0, 300.0, 400), np.full(400, 60e5)

    def unstable_in_the_middle(T, rho):
        stable, bad = _perfect_gas(T, rho), _perfect_gas(T, rho, **slopes)
        return np.where(((T > 288.0) & (T < 292.0))[:, None], bad, stable)

    def cold(index):
        return T[index], p[index], R * T[index] / p[index], 0.0, 0.0, math.nan

    table, _ = solve_neighbours(unstable_in_the_middle, cold, "h", p, (C_V + R) * T, 400)
    middle = (T > 288.0) & (T < 292.0)
    assert np.isnan(table[middle, 0]).all()
    assert table[~middle, 0] == pytest.approx(T[~middle], rel=1e-12)


def test_two_phases_are_no_evaluation_of_one(model_of):
    model = model_of("n-Propane")
    T, wet = 300.0, model.columns(("T", "quality"), 300.0, 0.3)
    dry = model.columns(("T", "quality"), 300.0, 1.0)
    rho = np.array([1.0 / wet.v, 0.9 / dry.v])
    slopes = _evaluated(model._here()[0], (0.0, 0.0), iphase_not_imposed, np.full(2, T), rho)[:, 3]
    assert np.isnan(slopes[0])
    assert slopes[1] > 0.0


def test_a_metastable_root_is_no_answer(model_of):
    """Vapour led on along its own branch into the dome, where the pressure still rises with rho."""
    model = model_of("n-Propane")
    state, dh, ds = model._here()
    p = np.full(400, 8e5)
    dew = model.columns(("p", "quality"), 8e5, 1.0)
    h = np.linspace(dew.h + 6e4, dew.h - 1.5e4, 400)
    wet = h < dew.h
    equation = partial(_evaluated, state, (dh, ds), iphase_not_imposed)

    def cold(index):
        return model._row((state, dh, ds), ("p", "h"), p[index], h[index])

    table, _ = solve_neighbours(equation, cold, "h", p, h, 400)
    assert np.isnan(table[wet, 0]).all()
    assert np.isfinite(table[~wet, 0]).mean() > 0.9
    column = model.columns(("p", "h"), p, h)
    assert (np.isnan(column.quality) == ~wet).all()
    assert column.T[wet] == pytest.approx(dew.T, rel=1e-12)


def test_states_without_neighbours_are_not_searched_among_neighbours():
    rng = np.random.default_rng(1)
    assert tour(10 ** rng.uniform(2, 8, 60), rng.uniform(0.0, 1.0, 60)) is None
    order, span = tour(np.full(60, 1e5), rng.uniform(0.0, 1.0, 60))
    assert sorted(order.tolist()) == list(range(60))
    assert span == 60
    given, _ = tour(np.linspace(1e5, 2e5, 60), np.linspace(0.0, 1.0, 60))
    assert given.tolist() == list(range(60))


def test_a_column_that_only_fails_is_given_up_soon():
    tried = []

    def nothing(T, rho):
        tried.append(T.size)
        return np.full((T.size, 6), math.nan)

    def cold(index):
        return 300.0, 1e5, 1.0, 3e5, 1e3, math.nan

    p, y = np.full(500, 1e5), np.linspace(1e5, 2e5, 500)
    table, given = solve_neighbours(nothing, cold, "h", p, y, 500)
    assert np.isnan(table).all()
    assert sum(tried) < 50
    assert len(given) < 50
