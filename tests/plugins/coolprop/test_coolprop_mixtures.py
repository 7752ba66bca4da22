"""Mixtures: rebuilt on their pures, phases told before they are read."""

from __future__ import annotations

import math

import numpy as np
import pytest
from CoolProp.CoolProp import PT_INPUTS, AbstractState, iphase_gas

from lostwork import PropertyError, R, StateNotFound
from lostwork_plugins.coolprop.equilibrium import likeliest_phase
from lostwork_plugins.coolprop.refusal import NoModel

MIXTURES = {
    "dry air": {"Nitrogen": 0.7812, "Oxygen": 0.2096, "Argon": 0.0092},
    "natural gas": {"Methane": 0.92, "Ethane": 0.05, "n-Propane": 0.02, "Nitrogen": 0.01},
    "R407C": {"R32": 0.3811, "R125": 0.1796, "R134a": 0.4393},
    "impure carbon dioxide": {"CarbonDioxide": 0.95, "Nitrogen": 0.05},
    "wet flue gas": {"Nitrogen": 0.71, "CarbonDioxide": 0.13, "Water": 0.12, "Oxygen": 0.04},
    "carbon dioxide and water": {"CarbonDioxide": 0.5, "Water": 0.5},
    "light hydrocarbons": {"Methane": 0.4, "Ethane": 0.3, "n-Propane": 0.3},
    "ethanol and water": {"Ethanol": 0.4, "Water": 0.6},
    "helium and nitrogen": {"Helium": 0.3, "Nitrogen": 0.7},
}
WET = {
    "natural gas": (150.0, 1e5),
    "impure carbon dioxide": (250.0, 2e6),
    "wet flue gas": (300.0, 1e5),
    "light hydrocarbons": (250.0, 2e6),
    "ethanol and water": (360.0, 1e5),
    "helium and nitrogen": (78.8, 4.3e5),
}


@pytest.mark.parametrize("name", MIXTURES)
def test_mixing_thin_gases_generates_the_ideal_entropy_of_mixing(model_of, name):
    parts = MIXTURES[name]
    mixture = model_of(parts)
    fractions = np.array(list(parts.values())) / sum(parts.values())
    T, thin = 400.0, 1.0
    mixed = mixture.columns(("T", "p"), T, thin)
    s = mixed.s - mixture.ideal_gas_limit()[1]
    h = mixed.h - mixture.ideal_gas_limit()[0]
    for fluid, x in zip(parts, fractions, strict=True):
        pure = model_of(fluid)
        part = pure.columns(("T", "p"), T, thin)
        share = x * pure.molar_mass / mixture.molar_mass
        s -= share * (part.s - pure.ideal_gas_limit()[1])
        h -= share * (part.h - pure.ideal_gas_limit()[0])
    # At 1 Pa what is left of the real gas is some 1e-5 of entropy where water is a component.
    assert s == pytest.approx(0.0, abs=1e-6 if name == "dry air" else 3e-5)
    assert h == pytest.approx(0.0, abs=1e-3 if name == "dry air" else 2e-2)
    ideal = -R * float(np.sum(fractions * np.log(fractions))) / mixture.molar_mass
    assert mixture.ideal_gas_limit()[1] == pytest.approx(ideal, rel=1e-5)


def test_a_trace_of_a_second_component_changes_next_to_nothing(model_of):
    pure = model_of("Nitrogen")
    nearly = model_of({"Nitrogen": 1 - 1e-9, "Oxygen": 1e-9})
    for T, p in ((300.0, 1e7), (90.0, 2e6), (400.0, 1e3)):
        a, b = (m.columns(("T", "p"), T, p) for m in (pure, nearly))
        limits = pure.ideal_gas_limit(), nearly.ideal_gas_limit()
        assert a.s - limits[0][1] == pytest.approx(b.s - limits[1][1], abs=1e-5)
        assert a.h - limits[0][0] == pytest.approx(b.h - limits[1][0], abs=2e-3)


@pytest.mark.parametrize("name", MIXTURES)
def test_enthalpy_and_entropy_agree_along_isobar_and_isotherm(model_of, name):
    model = model_of(MIXTURES[name])
    points = [(1.05 * max(model.limits.T_min, model.critical().T), 5e5), (420.0, 3e6)]
    for T, p in [*points, *([WET[name]] if name in WET else [])]:
        step = 1e-4
        columns = model.columns(
            ("T", "p"),
            np.array([T * (1 - step), T * (1 + step), T, T, T]),
            np.array([p, p, p * (1 - step), p * (1 + step), p]),
        )
        assert columns.failed == {}
        assert np.isnan(columns.quality).all() or not np.isnan(columns.quality).any()
        h, s, v = columns.h, columns.s, columns.v
        # Central differences of a step of 1e-4: their own error is of the order 1e-8.
        assert (h[1] - h[0]) / T == pytest.approx(s[1] - s[0], rel=2e-6)
        assert (h[3] - h[2] - v[4] * 2 * step * p) / T == pytest.approx(s[3] - s[2], rel=2e-6)


@pytest.mark.parametrize("name", ["natural gas", "wet flue gas", "light hydrocarbons", "R407C"])
def test_heat_and_entropy_agree_along_an_isobar_through_the_dome(model_of, name):
    model = model_of(MIXTURES[name])
    p = 2e5
    dew = model.columns(("p", "quality"), p, 1.0)
    start = max(0.8 * dew.T, model.limits.T_min)
    low, high = (model.columns(("T", "p"), T, p) for T in (start, 1.1 * dew.T))
    nodes, weights = np.polynomial.legendre.leggauss(24)
    dew_h = dew.h
    gained = 0.0
    for a, b in ((low.h, dew_h), (dew_h, high.h)):
        h = 0.5 * (a + b) + 0.5 * (b - a) * nodes
        columns = model.columns(("p", "h"), np.full(h.size, p), h)
        assert columns.failed == {}
        gained += 0.5 * (b - a) * float(np.sum(weights / columns.T))
    # The bubble point, where T(h) has a kink, may lie on the way: then the sum is good to less.
    assert gained == pytest.approx(high.s - low.s, rel=2e-4 if math.isnan(low.quality) else 1e-6)


@pytest.mark.parametrize("name", WET)
def test_the_dome_is_left_and_entered_by_h_and_s_alike(model_of, name):
    model = model_of(MIXTURES[name])
    T, p = WET[name]
    state = model.columns(("T", "p"), T, p)
    assert 0.0 < state.quality < 1.0
    for pair in (("p", "h"), ("p", "s"), ("T", "quality"), ("p", "quality")):
        known = {"T": T, "p": p, "h": state.h, "s": state.s, "quality": state.quality}
        again = model.columns(pair, known[pair[0]], known[pair[1]])
        assert again.failed == {}, pair
        assert pytest.approx(T, rel=1e-9) == again.T
        assert again.p == pytest.approx(p, rel=1e-8)
        assert again.s == pytest.approx(state.s, abs=2e-5)


@pytest.mark.parametrize("name", WET)
def test_phases_in_equilibrium_have_equal_fugacities_and_add_up(model_of, name):
    model = model_of(MIXTURES[name])
    T, p = WET[name]
    split = model.split(T, p)
    fractions = np.array(list(MIXTURES[name].values())) / sum(MIXTURES[name].values())
    beta, x, y = split.vapour_fraction, np.array(split.liquid), np.array(split.vapour)
    assert beta * y + (1 - beta) * x == pytest.approx(fractions, abs=1e-9)
    assert x.sum() == pytest.approx(1.0)
    assert y.sum() == pytest.approx(1.0)
    fugacities = []
    for amounts in (x, y):
        raw = AbstractState("HEOS", "&".join(MIXTURES[name]))
        raw.set_mole_fractions(amounts.tolist())
        phase = model._here()._equation
        found = likeliest_phase(phase, T, p, amounts.tolist())
        fugacities.append(amounts * np.exp(np.array(found.ln_phi)))
    assert fugacities[0] == pytest.approx(fugacities[1], rel=1e-8)
    masses = np.array([model_of(fluid).molar_mass for fluid in MIXTURES[name]])
    mass_quality = beta * (y @ masses) / (fractions @ masses)
    assert model.columns(("T", "p"), T, p).quality == pytest.approx(mass_quality, rel=1e-9)


def test_a_single_phase_is_not_split(model_of):
    with pytest.raises(StateNotFound, match="single phase"):
        model_of(MIXTURES["natural gas"]).split(300.0, 1e5)


@pytest.mark.parametrize("name", ["dry air", "natural gas", "R407C"])
def test_a_gas_has_the_density_that_the_library_gives(model_of, name):
    model = model_of(MIXTURES[name])
    raw = AbstractState("HEOS", "&".join(MIXTURES[name]))
    raw.set_mole_fractions([x / sum(MIXTURES[name].values()) for x in MIXTURES[name].values()])
    raw.specify_phase(iphase_gas)
    for T, p in ((330.0, 1e5), (400.0, 2e6)):
        raw.update(PT_INPUTS, p, T)
        # The gas constants differ by 6e-6, see the module on phases.
        assert 1 / model.columns(("T", "p"), T, p).v == pytest.approx(raw.rhomass(), rel=1.2e-5)


def test_the_density_root_of_cold_light_hydrocarbons_is_near_a_cubics(model_of):
    model = model_of(MIXTURES["light hydrocarbons"])
    state = model.columns(("T", "p"), 223.0, 2e6)
    equation = model._here()._equation
    split = model.split(223.0, 2e6)
    for amounts, kind, place in ((split.liquid, "liquid", -1), (split.vapour, "gas", 0)):
        rho = equation.phase(223.0, 2e6, amounts, kind).rho
        cubic = equation.cubic.densities(223.0, 2e6, amounts)[place]
        assert rho == pytest.approx(cubic, rel=0.15)
    assert 0.0 < state.quality < 1.0


def test_water_drops_out_of_flue_gas_and_the_isentrope_follows(model_of):
    flue = model_of(MIXTURES["wet flue gas"])
    hot = flue.columns(("T", "p"), 420.0, 3e5)
    assert math.isnan(hot.quality)
    cold = flue.columns(("p", "s"), 1e5, hot.s)
    assert cold.failed == {}
    assert cold.quality < 1.0
    assert cold.s == pytest.approx(hot.s, abs=1e-6)
    again = flue.columns(("T", "p"), cold.T, 1e5)
    assert again.h == pytest.approx(cold.h, abs=0.01)


def test_a_component_below_its_triple_point_is_refused(model_of):
    flue = model_of(MIXTURES["wet flue gas"])
    assert flue.limits.T_min == pytest.approx(273.16)
    columns = flue.columns(("T", "p"), np.array([260.0, 300.0]), np.array([1e5, 1e5]))
    assert "outside" in columns.failed[0]
    assert not math.isnan(columns.s[1])
    assert flue.columns(("p", "h"), 1e5, columns.h[1] - 5e5).failed


def test_a_pair_without_interaction_parameters_is_refused_by_name(model_of):
    with pytest.raises(NoModel, match=r"Ammonia with Water|Water with Ammonia") as refusal:
        model_of({"Ammonia": 0.7, "Water": 0.3})
    assert isinstance(refusal.value, PropertyError)


def test_the_pseudo_critical_point_lies_between_those_of_the_components(model_of):
    critical = model_of(MIXTURES["natural gas"]).critical()
    assert 150.0 < critical.T < 230.0
    assert 4e6 < critical.p < 5.5e6
    assert critical.v > 0.0


def test_bad_calls_mark_their_rows(model_of):
    model = model_of(MIXTURES["dry air"])
    columns = model.columns(
        ("p", "quality"), np.array([2e5, 2e5, math.nan, 1e8]), np.array([0.5, 1.5, 0.5, 0.5])
    )
    assert set(columns.failed) == {1, 2, 3}
    assert columns.quality[0] == pytest.approx(0.5, abs=1e-9)
