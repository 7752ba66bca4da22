"""Saturation, phase equilibrium and the closure of dh = T ds + v dp, one phase and two."""

from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from lostwork import StateNotFound

R = 8.31446261815324
GAS = {"methane": 0.6, "propane": 0.3, "n-pentane": 0.1}
AIR = {"nitrogen": 0.7812, "oxygen": 0.2096, "argon": 0.0092}
FLUIDS = ["propane", "water", {"methane": 0.1, "propane": 0.5, "n-butane": 0.4}, AIR]


def gibbs(columns):
    return columns.h - columns.T * columns.s


@pytest.mark.parametrize("eos", ["PR", "SRK"])
@pytest.mark.parametrize("name", ["propane", "water", "carbon dioxide", "n-decane"])
def test_gibbs_energies_are_equal_along_the_saturation_line(model_of, eos, name):
    model = model_of(name, eos=eos)
    T = np.linspace(model.limits.T_min, 0.9999 * model.critical().T, 50)
    liquid = model.columns(("T", "quality"), T, np.zeros(50))
    vapour = model.columns(("T", "quality"), T, np.ones(50))
    assert not liquid.failed
    assert not vapour.failed
    difference = (gibbs(vapour) - gibbs(liquid)) * model.molar_mass / (R * T)
    assert np.abs(difference).max() < 2e-12
    assert (np.diff(liquid.p) > 0.0).all()


@pytest.mark.parametrize("name", ["propane", "water"])
def test_the_slope_of_the_saturation_line_is_clapeyrons(model_of, name):
    model = model_of(name)
    T, step = 0.8 * model.critical().T, 1e-3
    liquid, vapour = (model.columns(("T", "quality"), T, q) for q in (0.0, 1.0))
    up, down = (model.columns(("T", "quality"), T + d, 0.0).p for d in (step, -step))
    slope = (vapour.s - liquid.s) / (vapour.v - liquid.v)
    assert (up - down) / (2.0 * step) == pytest.approx(slope, rel=1e-7)


def test_saturation_by_pressure_returns_where_saturation_by_temperature_came_from(model_of):
    model = model_of("propane")
    T = np.linspace(90.0, 369.5, 40)
    quality = np.linspace(0.0, 1.0, 40)
    by_T = model.columns(("T", "quality"), T, quality)
    by_p = model.columns(("p", "quality"), by_T.p, quality)
    assert np.abs(by_p.T / T - 1.0).max() < 1e-12
    assert np.abs(by_p.s - by_T.s).max() < 1e-7


@pytest.mark.parametrize("fluid", FLUIDS, ids=str)
@pytest.mark.parametrize("eos", ["PR", "SRK"])
def test_h_and_s_agree_with_each_other_across_phases(model_of, fluid, eos):
    """T ds = dh at constant p and dh = T ds + v dp, by differences of fourth order."""
    model = model_of(fluid, eos=eos)
    Tc, pc = model.critical().T, model.critical().p
    for T, p in [(0.7 * Tc, 0.9 * pc), (1.3 * Tc, 0.5 * pc), (1.1 * Tc, 2.0 * pc), (0.8 * Tc, 1e5)]:
        d = 2e-4
        offsets = np.array([-2.0, -1.0, 1.0, 2.0])
        weights = np.array([1.0, -8.0, 8.0, -1.0]) / 12.0
        along_T = model.columns(("T", "p"), T * (1.0 + d * offsets), np.full(4, p))
        along_p = model.columns(("T", "p"), np.full(4, T), p * (1.0 + d * offsets))
        here = model.columns(("T", "p"), T, p)
        assert not along_T.failed | along_p.failed
        dh, ds = weights @ along_T.h, weights @ along_T.s
        assert dh == pytest.approx(T * ds, rel=1e-8)
        dh, ds = weights @ along_p.h, weights @ along_p.s
        scale = here.v * p * d
        assert abs(dh - T * ds - here.v * p * d) < 1e-6 * max(scale, abs(dh))


@pytest.mark.parametrize("fluid", FLUIDS, ids=str)
def test_a_walk_in_h_through_the_dome_closes(model_of, fluid):
    """At constant p the entropy gained is the integral of dh/T, liquid to gas."""
    model = model_of(fluid)
    p = 0.3 * model.critical().p
    bubble, dew = (model.columns(("p", "quality"), p, q) for q in (0.0, 1.0))
    nodes, weights = np.polynomial.legendre.leggauss(40)
    ends = [bubble.h - 5e3, bubble.h, dew.h, dew.h + 5e3]
    gained = 0.0
    for low, high in pairwise(ends):
        h = 0.5 * (high - low) * nodes + 0.5 * (high + low)
        states = model.columns(("p", "h"), np.full(40, p), h)
        assert not states.failed
        assert np.abs(states.h - h).max() < 1e-6
        gained += 0.5 * (high - low) * float(weights @ (1.0 / states.T))
    start, end = (model.columns(("p", "h"), p, h) for h in (ends[0], ends[-1]))
    # The dome of a wide mixture has a bend or two in T(h), where the quadrature is good to 1e-7.
    assert end.s - start.s == pytest.approx(gained, rel=1e-7)


@pytest.mark.parametrize("fluid", FLUIDS, ids=str)
def test_every_pair_returns_to_the_state_it_was_taken_from(model_of, fluid):
    model = model_of(fluid)
    Tc = model.critical().T
    rng = np.random.default_rng(3)
    T = rng.uniform(max(model.limits.T_min, 0.5 * Tc), 1.8 * Tc, 80)
    p = np.exp(rng.uniform(np.log(2e4), np.log(3e7), 80))
    states = model.columns(("T", "p"), T, p)
    assert not states.failed
    for name in ("h", "s"):
        again = model.columns(("p", name), p, getattr(states, name))
        assert not again.failed
        assert np.abs(again.T - T).max() < 1e-8
        assert np.abs(again.s - states.s).max() < 1e-8
        assert np.array_equal(np.isnan(again.quality), np.isnan(states.quality))
    wet = np.isfinite(states.quality)
    for held, column in (("T", T), ("p", p)):
        if wet.any():
            again = model.columns((held, "quality"), column[wet], states.quality[wet])
            assert np.abs(again.T / T[wet] - 1.0).max() < 1e-9
            assert np.abs(again.s - states.s[wet]).max() < 1e-5


@settings(max_examples=60, deadline=None)
@given(share=st.floats(0.3, 0.999), quality=st.floats(0.0, 1.0))
def test_pure_states_in_the_dome_are_found_by_h_s_and_v(share, quality):
    model = _propane()
    T = share * model.critical().T
    wet = model.columns(("T", "quality"), T, quality)
    for pair, x, y in (
        (("p", "h"), wet.p, wet.h),
        (("p", "s"), wet.p, wet.s),
        (("T", "v"), T, wet.v),
    ):
        again = model.columns(pair, x, y)
        assert not again.failed
        # Beside the dome by round-off, the state is the same and has no quality.
        assert again.v == pytest.approx(wet.v, rel=1e-7)
        assert again.s == pytest.approx(wet.s, abs=1e-6)


def _propane():
    from lostwork import FluidSpec, component
    from lostwork_plugins.cubic.backend import CubicBackend

    return CubicBackend().open(FluidSpec((component("propane"),), (1.0,)), {})


def test_mass_quality_and_phases_of_a_split_make_up_the_whole(model_of):
    model = model_of(GAS)
    T, p = 300.0, 2e6
    split = model.split(T, p)
    state = model.columns(("T", "p"), T, p)
    z = np.array(list(GAS.values()))
    y, x = np.array(split.vapour), np.array(split.liquid)
    assert split.vapour_fraction * y + (1.0 - split.vapour_fraction) * x == pytest.approx(
        z, abs=1e-12
    )
    assert y[0] > z[0] > x[0]
    masses = np.array([16.0425, 44.0956, 72.1488])
    vapour, liquid = (
        split.vapour_fraction * (y @ masses),
        (1 - split.vapour_fraction) * (x @ masses),
    )
    assert state.quality == pytest.approx(vapour / (vapour + liquid), rel=1e-6)


def test_phases_of_a_split_have_equal_fugacities(model_of, spec_of):
    from thermo.eos_mix import PRMIX

    from lostwork_plugins.cubic.options import Options
    from lostwork_plugins.cubic.parameters import parameters

    numbers = parameters(spec_of(GAS), Options("PR", {}, "note"))
    split = model_of(GAS).split(300.0, 2e6)
    constants = {
        "Tcs": numbers.Tc.tolist(),
        "Pcs": numbers.pc.tolist(),
        "omegas": numbers.omega.tolist(),
        "kijs": numbers.kij.tolist(),
    }
    liquid = PRMIX(**constants, T=300.0, P=2e6, zs=list(split.liquid))
    vapour = PRMIX(**constants, T=300.0, P=2e6, zs=list(split.vapour))
    assert liquid.fugacities_l == pytest.approx(vapour.fugacities_g, rel=1e-9)


def test_a_split_outside_the_dome_is_refused(model_of):
    with pytest.raises(StateNotFound, match="one phase only"):
        model_of(GAS).split(500.0, 1e5)


@pytest.mark.parametrize("fluid", [*FLUIDS, "helium"], ids=str)
def test_a_thin_gas_is_the_ideal_gas_on_the_datum(model_of, fluid):
    model = model_of(fluid)
    h, s = model.ideal_gas_limit()
    p = 1e-3
    thin = model.columns(("T", "p"), 298.15, p)
    assert thin.h == pytest.approx(h, abs=1e-4)
    assert thin.s - R / model.molar_mass * np.log(1e5 / p) == pytest.approx(s, abs=1e-6)


def test_the_critical_point_is_that_of_the_equation(model_of):
    for eos, Z in (("PR", 0.307401), ("SRK", 1.0 / 3.0)):
        model = model_of("propane", eos=eos)
        critical = model.critical()
        assert critical.p * critical.v * model.molar_mass / (R * critical.T) == pytest.approx(
            Z, abs=1e-6
        )
        near = model.columns(("T", "quality"), critical.T * (1.0 - 1e-6), np.float64(0.5))
        assert near.p == pytest.approx(critical.p, rel=1e-5)
        assert near.v == pytest.approx(critical.v, rel=1e-2)
