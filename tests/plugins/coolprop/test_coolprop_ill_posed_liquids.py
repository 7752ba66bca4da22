"""Liquids that two properties hardly fix: beside the boiling line, and cold water."""

from __future__ import annotations

import numpy as np
import pytest
from CoolProp.CoolProp import AbstractState, DmassP_INPUTS

import lostwork as lw

# K below boiling at Pa; the pressures from near the triple point up to where CoolProp is right.
LOW_PRESSURES = {
    "water": (2.1e3, 2e4, 1e6),
    "propane": (1e-1, 1e1, 1e4, 1e6),
    "ethanol": (1e-1, 1e1, 1e4, 1e6),
    "toluene": (1e0, 1e2, 1e4, 1e6),
    "n-butane": (1e1, 1e3, 1e5, 1e6),
    "ammonia": (7e3, 1e5, 1e6),
    "oxygen": (2e2, 1e4, 1e6),
}
TWINS = [
    # Greatest density of water at 1 bar: 3.98 degC (Kell, J. Chem. Eng. Data 20, 1975, 97);
    # of heavy water: 11.2 degC (Kell, J. Phys. Chem. Ref. Data 6, 1977, 1109); both from memory.
    ("water", "1 degC", "1 bar", ("p", "v")),
    ("water", "3.9 degC", "1 bar", ("p", "v")),
    ("water", "7 degC", "1 bar", ("p", "v")),
    ("water", "3 degC", "800 Pa", ("p", "v")),
    ("heavy water", "9 degC", "1 bar", ("p", "v")),
    ("heavy water", "14 degC", "1 bar", ("p", "v")),
    ("water", "1 degC", "1 bar", ("T", "s")),
    ("water", "1 degC", "200 bar", ("T", "s")),
    ("heavy water", "9 degC", "1 bar", ("T", "s")),
]
SINGLES = [
    ("water", "9 degC", "1 bar", ("p", "v")),
    ("water", "1 degC", "400 bar", ("p", "v")),
    ("heavy water", "20 degC", "1 bar", ("p", "v")),
    ("water", "5 degC", "1 bar", ("T", "s")),
    ("water", "5 degC", "400 bar", ("T", "s")),
    ("heavy water", "12 degC", "1 bar", ("T", "s")),
    ("water", "150 degC", "1 bar", ("p", "v")),
]


def again(state: lw.State, pair: lw.Pair) -> lw.State:
    return state.fluid.state_si(pair, getattr(state.si, pair[0]), getattr(state.si, pair[1]))


@pytest.mark.parametrize("name", LOW_PRESSURES)
def test_liquid_just_below_its_boiling_point_is_found_by_p_and_v(name):
    fluid = lw.Fluid(name, backend="coolprop")
    for p in LOW_PRESSURES[name]:
        boiling = fluid.state_si(("p", "quality"), p, 0.0)
        for below in (0.003, 0.1, 0.5, 10.0):
            T = float(boiling.si.T) - below
            if max(fluid.limits.T_min, 282.0 if name == "water" else 0.0) > T:
                continue
            liquid = fluid.state_si(("T", "p"), T, p)
            found = again(liquid, ("p", "v"))
            assert pytest.approx(T, abs=1e-6) == found.si.T, f"{below} K below boiling at {p} Pa"
            assert found.si.s == pytest.approx(liquid.si.s, abs=1e-4)
            assert np.isnan(found.si.quality)
        assert pytest.approx(boiling.si.T, abs=1e-6) == again(boiling, ("p", "v")).si.T


def test_the_library_itself_still_takes_such_a_liquid_for_a_boiling_one():
    """Where this fails, a newer CoolProp is right, and the search beside the line may go."""
    propane = lw.Fluid("propane", backend="coolprop").state(T="100 K", p="0.1 Pa")
    bare = AbstractState("HEOS", "Propane")
    bare.update(DmassP_INPUTS, 1.0 / propane.si.v, 0.1)
    assert bare.T() - 100.0 > 4.9


@pytest.mark.parametrize(("name", "T", "p", "pair"), TWINS)
def test_cold_water_that_has_a_twin_is_refused(name, T, p, pair):
    state = lw.Fluid(name, backend="coolprop").state(T=T, p=p)
    with pytest.raises(lw.StateNotFound, match=r"fits two .* give T with p"):
        again(state, pair)


@pytest.mark.parametrize(("name", "T", "p", "pair"), SINGLES)
def test_water_without_a_twin_is_found(name, T, p, pair):
    state = lw.Fluid(name, backend="coolprop").state(T=T, p=p)
    found = again(state, pair)
    assert pytest.approx(state.si.T, abs=1e-6) == found.si.T
    assert found.si.h == pytest.approx(state.si.h, abs=1e-2)


@pytest.mark.parametrize(
    ("T", "p"),
    [("103.413 degC", "1.29131 bar"), ("36.3 degC", "0.1 bar"), ("545.533 degC", "441.28 bar")],
)
def test_water_is_found_by_s_and_u_as_far_as_the_noise_of_its_entropy_lets(T, p):
    water = lw.Fluid("water", backend="coolprop")
    state = water.state(T=T, p=p)
    found = again(state, ("s", "u"))
    noise = float(water.noise_at(state.si.T, state.si.p))
    assert abs(found.si.s - state.si.s) <= noise
    assert abs(found.si.u - state.si.u) <= state.si.T * noise
