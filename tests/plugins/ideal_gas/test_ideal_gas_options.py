"""Constant heat capacity, forced correlations, molar mass: what the caller may assume."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

import lostwork as lw
from lostwork_plugins.ideal_gas import lostwork_backends
from lostwork_plugins.ideal_gas.refusal import NoIdealGasModel


@given(
    gamma=st.floats(1.02, 5.0 / 3.0),
    T=st.floats(200.0, 900.0),
    ratio=st.floats(0.05, 20.0),
)
def test_constant_gamma_follows_the_closed_forms(open_model, gamma, T, ratio):
    model = open_model("nitrogen", gamma=gamma)
    gas_constant = lw.R / model.molar_mass
    start = model.columns(("T", "p"), T, 1e5)
    T_end = T * ratio ** ((gamma - 1.0) / gamma)
    end = model.columns(("p", "s"), 1e5 * ratio, start.s)
    assert not end.failed
    assert pytest.approx(T_end, rel=1e-12) == end.T
    assert end.p * end.v**gamma == pytest.approx(start.p * start.v**gamma, rel=1e-11)
    cp = gas_constant * gamma / (gamma - 1.0)
    assert end.h - start.h == pytest.approx(cp * (T_end - T), rel=1e-12, abs=1e-6)
    heated = model.columns(("T", "p"), 1.5 * T, 1e5)
    assert heated.s - start.s == pytest.approx(cp * math.log(1.5), rel=1e-12)


def test_textbook_air_matches_a_hand_calculation(open_model):
    model = open_model(
        {"nitrogen": 0.79, "oxygen": 0.21}, cp="1005 J/(kg*K)", molar_mass="28.97 g/mol"
    )
    a, b = (model.columns(("T", "p"), T, p) for T, p in ((300.0, 1e5), (500.0, 8e5)))
    assert b.h - a.h == pytest.approx(1005.0 * 200.0, rel=1e-13)
    R = lw.R / 0.02897
    assert b.s - a.s == pytest.approx(1005.0 * math.log(5 / 3) - R * math.log(8.0), rel=1e-12)
    assert a.v == pytest.approx(R * 300.0 / 1e5, rel=1e-14)
    assert model.molar_mass == pytest.approx(0.02897, rel=1e-15)
    assert any("28.97 g/mol" in note for note in model.notes)


@pytest.mark.parametrize(
    "cp", ["29.1 J/(mol*K)", "29.1 kJ/(kmol*K)", lambda: lw.quantity(29.1, "J/(mol*K)")]
)
def test_a_molar_heat_capacity_is_taken_by_the_molar_mass(open_model, cp):
    model = open_model("nitrogen", cp=cp() if callable(cp) else cp)
    rise = model.columns(("T", "p"), 400.0, 1e5).h - model.columns(("T", "p"), 300.0, 1e5).h
    assert rise == pytest.approx(29.1 / 0.0280134 * 100.0, rel=1e-13)


def test_a_constant_heat_capacity_needs_no_published_data(open_model):
    model = open_model("2-butylnaphthalene", cp="1.5 kJ/(kg*K)")
    assert (model.limits.T_min, model.limits.T_max) == (1.0, 6000.0)
    assert "assumed" in model.limits.source
    assert any("assumption" in note for note in model.notes)
    assert model.ideal_gas_limit() == (0.0, 0.0)


def test_noble_gases_have_five_halves_R_whatever_the_correlation(open_model):
    for options in ({}, {"correlation": "Shomate"}, {"correlation": "TRC"}):
        model = open_model("argon", **options)
        low, high = (model.columns(("T", "p"), T, 1e5) for T in (5.0, 5500.0))
        assert high.h - low.h == pytest.approx(2.5 * lw.R / model.molar_mass * 5495.0, rel=1e-14)
        assert any("5/2 R" in note for note in model.notes)


def test_a_correlation_can_be_forced_and_is_named(open_model):
    by_name = {
        name: open_model("methane", correlation=name) for name in ("TRC", "Poling", "Shomate")
    }
    assert [model.limits.T_max for model in by_name.values()] == [5000.0, 1000.0, 6000.0]
    rises = []
    for name, model in by_name.items():
        assert any(name in note and "methane" in note for note in model.notes)
        a, b = (model.columns(("T", "p"), T, 1e5) for T in (300.0, 900.0))
        rises.append(b.h - a.h)
    assert len(set(rises)) == 3
    assert np.ptp(rises) < 0.01 * rises[0]
    assert "Kabo" in by_name["TRC"].limits.source
    assert "Poling" in by_name["Poling"].limits.source
    assert "WebBook" in by_name["Shomate"].limits.source


def test_without_a_choice_trc_goes_first(open_model):
    assert "TRC" in open_model("nitrogen").notes[0]


def test_a_gas_that_trc_lacks_is_found_in_another_source(open_model):
    for gas in ("silicon tetrafluoride", "boron trichloride"):
        model = open_model(gas)
        assert "Shomate" in model.notes[0]
        assert (model.limits.T_min, model.limits.T_max) == (298.0, 6000.0)
    with pytest.raises(NoIdealGasModel, match="no Shomate correlation"):
        open_model("1,1,1,2-tetrafluoroethane", correlation="Shomate")


def test_equilibrium_hydrogen_is_said_to_be_that(open_model):
    assert any("spin isomers" in note for note in open_model("hydrogen").notes)


def test_the_notes_say_that_pressure_is_for_the_caller_to_judge(air):
    assert any("pressure" in note for note in air.notes)
    assert air.limits.p_min < 1e-3
    assert air.limits.p_max >= 1e9


@pytest.mark.parametrize(
    ("options", "said"),
    [
        ({"eos": "PR"}, "correlation, cp, gamma, molar_mass"),
        ({"cp": "1005 J/(kg*K)", "gamma": 1.4}, "cp and gamma"),
        ({"gamma": 1.4, "correlation": "TRC"}, "correlation and gamma"),
        ({"correlation": "guess"}, "TRC, Poling, Shomate"),
        ({"gamma": 1.0}, "not above 1"),
        ({"gamma": 0.7}, "not above 1"),
        ({"gamma": [1.3, 1.4]}, "one number"),
        ({"cp": "100 J/(kg*K)"}, "gas constant"),
        ({"cp": "8.3 J/(mol*K)"}, "gas constant"),
        ({"cp": "-1005 J/(kg*K)"}, "gas constant"),
        ({"molar_mass": "28 kg/mol"}, "composition"),
        ({"molar_mass": "44 g/mol", "gamma": 1.3}, "composition"),
    ],
)
def test_an_option_that_makes_no_sense_is_refused(open_model, options, said):
    with pytest.raises(lw.PropertyError, match=said) as caught:
        open_model("nitrogen", **options)
    assert "nitrogen" in str(caught.value)


@pytest.mark.parametrize(
    "options", [{"cp": 1005.0}, {"cp": "1005 J/kg"}, {"cp": "hot"}, {"molar_mass": 0.028}]
)
def test_an_option_without_its_unit_is_refused_at_the_boundary(open_model, options):
    with pytest.raises(lw.QuantityError):
        open_model("nitrogen", **options)


def test_the_plugin_offers_one_backend_and_imports_nothing_heavy():
    (descriptor,) = lostwork_backends()
    assert descriptor.name == "ideal-gas"
    assert descriptor.requires == ("chemicals",)
    assert descriptor.load().__name__ == "IdealGasBackend"
