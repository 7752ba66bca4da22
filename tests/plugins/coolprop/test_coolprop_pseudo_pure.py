"""Blends with an equation of their own: air, R410A and their like."""

from __future__ import annotations

import math

import numpy as np
import pytest

from lostwork_plugins.coolprop.mixture import MixtureModel
from lostwork_plugins.coolprop.pseudo_pure import PseudoPureModel

AIR = {"Nitrogen": 0.7812, "Oxygen": 0.2096, "Argon": 0.0092}
R410A = {"R32": 0.697614699375863, "R125": 0.302385300624138}


def test_air_by_name_is_the_pseudo_pure_fluid_and_can_be_had_as_a_mixture(model_of):
    assert isinstance(model_of(AIR, "air"), PseudoPureModel)
    assert isinstance(model_of(R410A, "R410A"), PseudoPureModel)
    assert isinstance(model_of(AIR, "air", pseudo_pure=False), MixtureModel)
    assert isinstance(model_of(AIR), MixtureModel)


def test_air_and_its_mixture_agree_on_what_an_expansion_does(model_of):
    pseudo, mixture = model_of(AIR, "air"), model_of(AIR)
    drops = []
    for model in (pseudo, mixture):
        high = model.columns(("T", "p"), 300.0, 60e5)
        low = model.columns(("p", "s"), 5e5, high.s)
        drops.append(high.h - low.h)
    assert drops[0] == pytest.approx(drops[1], rel=2e-3)


@pytest.mark.parametrize(("parts", "name", "p"), [(AIR, "air", 1e6), (R410A, "R410A", 1e6)])
def test_T_and_p_between_bubble_and_dew_line_are_refused(model_of, parts, name, p):
    model = model_of(parts, name)
    bubble, dew = (model.columns(("p", "quality"), p, q) for q in (0.0, 1.0))
    middle = 0.5 * (bubble.T + dew.T)
    columns = model.columns(("T", "p"), middle, p)
    assert "bubble pressure" in columns.failed[0]
    assert "give p with h" in columns.failed[0]


def test_a_quality_inside_the_dome_is_refused(model_of):
    columns = model_of(AIR, "air").columns(("p", "quality"), 1e6, 0.5)
    assert "pseudo-pure" in columns.failed[0]
    assert math.isnan(columns.s)


@pytest.mark.parametrize(("parts", "name"), [(AIR, "air"), (R410A, "R410A")])
@pytest.mark.parametrize("p", [1e5, 1e6, 2.5e6])
def test_enthalpy_leads_through_the_dome_without_a_gap(model_of, parts, name, p):
    model = model_of(parts, name)
    bubble, dew = (model.columns(("p", "quality"), p, q) for q in (0.0, 1.0))
    share = np.linspace(-0.05, 1.05, 111)
    columns = model.columns(("p", "h"), np.full(111, p), bubble.h + share * (dew.h - bubble.h))
    assert columns.failed == {}
    wet = (share > 1e-6) & (share < 1 - 1e-6)
    assert columns.quality[wet] == pytest.approx(share[wet], abs=1e-9)
    assert np.isnan(columns.quality[[0, -1]]).all()
    assert (np.diff(columns.s) > 0).all()
    again = model.columns(("p", "s"), np.full(111, p), columns.s)
    assert again.h == pytest.approx(columns.h, abs=0.01)


@pytest.mark.parametrize(("parts", "name"), [(AIR, "air"), (R410A, "R410A")])
@pytest.mark.parametrize("p", [1e5, 1e6, 2.5e6])
def test_the_stated_noise_covers_the_gap_between_heat_and_entropy_in_the_dome(
    model_of, parts, name, p
):
    model = model_of(parts, name)
    bubble, dew = (model.columns(("p", "quality"), p, q) for q in (0.0, 1.0))
    h = np.linspace(bubble.h, dew.h, 2001)
    T = model.columns(("p", "h"), np.full(h.size, p), h).T
    gap = abs(np.trapezoid(1 / T, h) - (dew.s - bubble.s))
    middle = 0.5 * (bubble.T + dew.T)
    assert gap <= model.noise_at(middle, p) * (1 + 1e-6)
    assert model.noise_at(middle, p) >= 0.2
    assert model.noise_at(1.5 * model.critical().T, p) < 1e-4


@pytest.mark.parametrize("name", ["air", "R410A"])
def test_single_phase_states_lead_back_from_every_native_pair(model_of, name):
    model = model_of(AIR if name == "air" else R410A, name)
    rng = np.random.default_rng(5)
    T = rng.uniform(1.05 * model.critical().T, 0.95 * model.limits.T_max, 60)
    p = 10 ** rng.uniform(4, 7.3, 60)
    state = model.columns(("T", "p"), T, p)
    assert state.failed == {}
    known = {"T": T, "p": p, "v": state.v, "h": state.h, "s": state.s, "u": state.h - p * state.v}
    for pair in model.native_pairs - {("T", "quality"), ("p", "quality")}:
        again = model.columns(pair, known[pair[0]], known[pair[1]])
        assert again.failed == {}
        assert again.s == pytest.approx(state.s, abs=1e-5)


def test_the_user_is_told_what_a_pseudo_pure_fluid_cannot_do(model_of):
    assert "pseudo_pure=False" in model_of(AIR, "air").notes[0]
