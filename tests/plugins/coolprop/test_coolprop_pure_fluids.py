"""Pure fluids: against published values, against CoolProp itself, and against its pitfalls."""

from __future__ import annotations

import math

import numpy as np
import pytest
from CoolProp.CoolProp import PT_INPUTS, AbstractState
from hypothesis import given, settings
from hypothesis import strategies as st

from lostwork import DETERMINING_PAIRS, PairRefused, R

# IAPWS R6-95(2018), table 7: T (K), rho (kg/m3), p (MPa), s (kJ/kg/K).
IAPWS_SINGLE_PHASE = [
    (300, 996.556, 0.0992418352, 0.393062643),
    (300, 1005.308, 20.0022515, 0.387405401),
    (300, 1188.202, 700.004704, 0.132609616),
    (500, 0.435, 0.0999679423, 7.94488271),
    (500, 4.532, 0.999938125, 6.82502725),
    (500, 838.025, 10.0003858, 2.56690919),
    (500, 1084.564, 700.000405, 2.03237509),
    (647, 358.0, 22.0384756, 4.32092307),
    (900, 0.241, 0.100062559, 9.16653194),
    (900, 52.615, 20.0000690, 6.59070225),
    (900, 870.769, 700.000006, 4.17223802),
]
# IAPWS R6-95(2018), table 8: T (K), p (MPa), rho' rho'' (kg/m3), h' h'' (kJ/kg), s' s'' (kJ/kg/K).
IAPWS_SATURATION = [
    (
        275,
        0.698451167e-3,
        999.887406,
        0.00550664919,
        7.75972202,
        2504.28995,
        0.0283094670,
        9.10660121,
    ),
    (450, 0.932203564, 890.341250, 4.81200360, 749.161585, 2774.41078, 2.10865845, 6.60921221),
    (625, 16.9082693, 567.090385, 118.290280, 1686.26976, 2550.71625, 3.80194683, 5.18506121),
]


@pytest.mark.parametrize(("T", "rho", "p", "s"), IAPWS_SINGLE_PHASE)
def test_water_gives_the_check_values_of_the_iapws_formulation(model_of, T, rho, p, s):
    columns = model_of("Water").columns(("T", "v"), float(T), 1 / rho)
    assert columns.failed == {}
    # Near liquid at 300 K the pressure hangs on the last digit printed of the density.
    assert columns.p == pytest.approx(p * 1e6, rel=2e-6)
    assert columns.s == pytest.approx(s * 1e3, rel=2e-7)


@pytest.mark.parametrize("row", IAPWS_SATURATION)
def test_saturated_water_gives_the_check_values_of_the_iapws_formulation(model_of, row):
    T, p, rho_liquid, rho_vapour, h_liquid, h_vapour, s_liquid, s_vapour = row
    water = model_of("Water")
    liquid = water.columns(("T", "quality"), float(T), 0.0)
    vapour = water.columns(("T", "quality"), float(T), 1.0)
    assert (liquid.quality, vapour.quality) == (0.0, 1.0)
    assert liquid.p == pytest.approx(p * 1e6, rel=1e-6)
    assert 1 / liquid.v == pytest.approx(rho_liquid, rel=1e-6)
    assert 1 / vapour.v == pytest.approx(rho_vapour, rel=1e-6)
    assert liquid.h == pytest.approx(h_liquid * 1e3, rel=1e-6, abs=0.1)
    assert vapour.h == pytest.approx(h_vapour * 1e3, rel=1e-6)
    assert liquid.s == pytest.approx(s_liquid * 1e3, rel=1e-6, abs=1e-3)
    assert vapour.s == pytest.approx(s_vapour * 1e3, rel=1e-6)


@pytest.mark.parametrize("fluid", ["Nitrogen", "R134a", "CarbonDioxide", "Hydrogen"])
def test_states_are_those_of_the_library_asked_directly(model_of, fluid):
    model, raw = model_of(fluid), AbstractState("HEOS", fluid)
    T = np.linspace(1.05 * model.critical().T, 1.2 * model.critical().T, 25)
    p = np.geomspace(1e4, 3e7, 25)
    columns = model.columns(("T", "p"), T, p)
    for i in range(T.size):
        raw.update(PT_INPUTS, p[i], T[i])
        assert columns.v[i] == 1 / raw.rhomass()
        assert columns.h[i] == raw.hmass()
        assert columns.s[i] == raw.smass()


@settings(max_examples=40, deadline=None)
@given(
    fluid=st.sampled_from(["Nitrogen", "Water", "R134a", "CarbonDioxide", "n-Propane", "Helium"]),
    T_share=st.floats(0.02, 0.98),
    log_p=st.floats(4.0, 7.0),
)
def test_every_native_pair_leads_back_to_the_same_state(fluid, T_share, log_p):
    model = _CACHE.setdefault(fluid, _open(fluid))
    limits = model.limits
    T = limits.T_min + T_share * (min(limits.T_max, 3 * model.critical().T) - limits.T_min)
    state = model.columns(("T", "p"), T, 10**log_p)
    if state.failed:
        assert "solid" in state.failed[0] or "saturation" in state.failed[0]
        return
    known = {name: getattr(state, name) for name in ("T", "p", "v", "h", "s")}
    known["u"] = state.h - state.p * state.v
    noise = 4 * model.noise_at(state.T, state.p)
    for pair in model.native_pairs - {("T", "quality"), ("p", "quality")}:
        again = model.columns(pair, known[pair[0]], known[pair[1]])
        assert again.failed == {}, (pair, again.failed)
        assert abs(again.s - state.s) <= noise, pair
        assert abs(again.h - state.h) <= noise * state.T, pair


def test_all_determining_pairs_but_one_are_the_librarys_own(model_of):
    assert model_of("Nitrogen").native_pairs == DETERMINING_PAIRS - {("s", "u")}


def test_a_pair_that_is_not_native_is_refused(model_of):
    with pytest.raises(PairRefused):
        model_of("Nitrogen").columns(("T", "h"), 300.0, 3e5)


def test_a_point_stays_a_plain_float_and_a_column_an_array(model_of):
    nitrogen = model_of("Nitrogen")
    point = nitrogen.columns(("T", "p"), 300.0, 60e5)
    column = nitrogen.columns(("T", "p"), np.array([300.0, 310.0]), np.array([60e5, 60e5]))
    for name in ("T", "p", "v", "h", "s", "quality"):
        assert type(getattr(point, name)) is float
        array = getattr(column, name)
        assert array.dtype == np.float64
        assert array.shape == (2,)
    assert (point.T, point.p) == (300.0, 60e5)
    assert column.s[0] == point.s


@pytest.mark.parametrize("fluid", ["Water", "R134a", "Nitrogen"])
@pytest.mark.parametrize("share", [0.6, 0.8, 0.95])
@pytest.mark.parametrize("off", [0.0, 1e-9, -1e-9, 5e-7])
def test_T_and_p_on_the_saturation_line_are_refused_with_the_pressure_named(
    model_of, fluid, share, off
):
    model = model_of(fluid)
    T = share * model.critical().T
    p = model.columns(("T", "quality"), T, 0.0).p
    columns = model.columns(("T", "p"), T, p * (1 + off))
    assert math.isnan(columns.s)
    assert f"saturation pressure {p:.9g} Pa" in columns.failed[0]
    assert "give quality" in columns.failed[0]


def test_quality_runs_through_the_dome_and_is_absent_outside(model_of):
    propane = model_of("n-Propane")
    liquid = propane.columns(("p", "quality"), 5e5, 0.0)
    vapour = propane.columns(("p", "quality"), 5e5, 1.0)
    share = np.array([0.25, 0.5, 0.75])
    wet = propane.columns(("p", "h"), np.full(3, 5e5), liquid.h + share * (vapour.h - liquid.h))
    assert wet.quality == pytest.approx(share, abs=1e-9)
    # Exact along an isobar of a pure fluid: ds = dh / T.
    assert wet.s == pytest.approx(liquid.s + (wet.h - liquid.h) / liquid.T, abs=1e-6)
    dry = propane.columns(("p", "h"), 5e5, vapour.h + 1e4)
    assert math.isnan(dry.quality)


@pytest.mark.parametrize(
    ("fluid", "T", "p", "word"),
    [
        ("Water", 1e4, 1e5, "outside the equation"),
        ("R134a", 600.0, 1e5, "outside the equation"),
        ("CarbonDioxide", 200.0, 1e4, "outside the equation"),
        ("Oxygen", 300.0, 2e8, "outside the equation"),
        ("Nitrogen", 70.0, 1e8, "solid"),
        ("Water", 290.0, 9e8, "solid"),
        ("Nitrogen", 300.0, -1e5, "outside the equation"),
        ("Nitrogen", math.nan, 1e5, "not finite"),
    ],
)
def test_a_state_outside_the_equation_is_refused(model_of, fluid, T, p, word):
    columns = model_of(fluid).columns(("T", "p"), T, p)
    assert word in columns.failed[0]
    assert math.isnan(columns.h)


def test_a_state_found_outside_the_range_is_refused_too(model_of):
    water, r134a = model_of("Water"), model_of("R134a")
    hot = r134a.columns(("T", "p"), 455.0, 1e5)
    columns = r134a.columns(("p", "h"), 1e5, hot.h + 2e5)
    assert columns.failed
    assert math.isnan(columns.T)
    cold = water.columns(("T", "p"), 273.17, 1e5)
    assert water.columns(("p", "h"), 1e5, cold.h - 5e4).failed


def test_a_quality_below_the_triple_pressure_marks_its_row(model_of):
    """The library accepts it, and raises only when the state is read."""
    carbon_dioxide = model_of("CarbonDioxide")
    columns = carbon_dioxide.columns(("p", "quality"), np.array([24944.8, 1e6]), np.zeros(2))
    assert set(columns.failed) == {0}
    assert math.isnan(columns.s[0])
    assert columns.T[1] == pytest.approx(233.03, abs=0.01)  # Span and Wagner (1996)


def test_bad_rows_are_marked_and_the_others_computed(model_of):
    nitrogen = model_of("Nitrogen")
    T = np.array([300.0, 30.0, math.nan, 400.0, 100.0])
    p = np.array([1e5, 1e5, 1e5, 5e9, 1e5])
    columns = nitrogen.columns(("T", "p"), T, p)
    assert set(columns.failed) == {1, 2, 3}
    assert np.isnan(columns.s) == pytest.approx([False, True, True, True, False])
    assert columns.s[4] == nitrogen.columns(("T", "p"), 100.0, 1e5).s


def test_an_empty_column_gives_empty_columns(model_of):
    columns = model_of("Nitrogen").columns(("T", "p"), np.array([]), np.array([]))
    assert columns.s.shape == (0,)
    assert columns.failed == {}


@pytest.mark.parametrize("fluid", ["R134a", "Methanol", "Water", "CarbonDioxide"])
def test_states_near_the_critical_point_are_right_or_refused(model_of, fluid):
    model = model_of(fluid)
    critical = model.critical()
    rng = np.random.default_rng(7)
    T = critical.T * (1 + rng.uniform(-5e-3, 5e-3, 150))
    p = critical.p * (1 + rng.uniform(-3e-2, 3e-2, 150))
    columns = model.columns(("T", "p"), T, p)
    found = ~np.isnan(columns.v)
    assert found.mean() > 0.97, columns.failed
    again = model.columns(("T", "v"), T[found], columns.v[found])
    assert again.p == pytest.approx(p[found], rel=1e-7)
    assert again.s == pytest.approx(columns.s[found], abs=1e-3)


@pytest.mark.parametrize("fluid", ["Nitrogen", "Water", "CarbonDioxide", "n-Propane", "Helium"])
def test_the_thin_gas_meets_the_ideal_gas_limit_at_one_bar(model_of, fluid):
    model = model_of(fluid)
    h_limit, s_limit = model.ideal_gas_limit()
    raw = AbstractState("HEOS", fluid)
    gas_constant = raw.gas_constant() / model.molar_mass

    def off(p: float) -> tuple[float, float]:
        thin = model.columns(("T", "p"), 298.15, p)
        return thin.h - h_limit, thin.s + gas_constant * math.log(p / 1e5) - s_limit

    (h1, s1), (h2, s2) = off(10.0), off(20.0)
    # The first virial term is linear in p, so that the two points extrapolate to none.
    assert abs(2 * h1 - h2) < 1e-8 * abs(h_limit) + 1e-3
    assert abs(2 * s1 - s2) < 1e-8 * s_limit + 2e-5


def test_the_entropy_of_liquid_water_on_the_ideal_datum_is_the_tabulated_one(model_of):
    water = model_of("Water")
    liquid = water.columns(("T", "p"), 298.15, 1e5)
    # CODATA key values (Cox, Wagman, Medvedev 1989): gas 188.835, liquid 69.95 +- 0.03 J/mol/K.
    s = 188.835 + (liquid.s - water.ideal_gas_limit()[1]) * water.molar_mass
    assert s == pytest.approx(69.95, abs=0.1)


def test_enthalpy_and_entropy_agree_along_isobar_and_isotherm(model_of):
    for fluid in ("Nitrogen", "Water", "R134a"):
        model = model_of(fluid)
        T, p, step = 1.2 * model.critical().T, 0.7 * model.critical().p, 1e-4
        if fluid == "R134a":
            T = 1.1 * model.critical().T
        columns = model.columns(
            ("T", "p"),
            np.array([T * (1 - step), T * (1 + step), T, T, T]),
            np.array([p, p, p * (1 - step), p * (1 + step), p]),
        )
        h, s, v = columns.h, columns.s, columns.v
        assert (h[1] - h[0]) / T == pytest.approx(s[1] - s[0], rel=1e-6)
        assert (h[3] - h[2] - v[4] * 2 * step * p) / T == pytest.approx(s[3] - s[2], rel=1e-6)


def test_the_critical_point_and_the_source_are_told(model_of):
    water = model_of("Water")
    # IAPWS R2-83: 647.096 K, 22.064 MPa, 322 kg/m3.
    assert pytest.approx(647.096, abs=1e-3) == water.critical().T
    assert water.critical().p == pytest.approx(22.064e6, rel=1e-5)
    assert 1 / water.critical().v == pytest.approx(322.0, rel=1e-3)
    assert "Wagner" in water.limits.source
    assert "CoolProp" in water.limits.source


def test_the_noise_floor_is_higher_near_the_critical_point(model_of):
    model = model_of("R134a")
    critical = model.critical()
    assert model.noise_at(300.0, 1e5) == model.entropy_noise == 5e-6
    assert model.noise_at(critical.T, critical.p) == 3e-4
    both = model.noise_at(np.array([300.0, critical.T]), np.array([1e5, critical.p]))
    assert both.tolist() == [5e-6, 3e-4]
    assert pytest.approx(8.314462618) == R


_CACHE: dict = {}


def _open(fluid):
    from lostwork import Component, FluidSpec
    from lostwork_plugins.coolprop.backend import CoolPropBackend
    from lostwork_plugins.coolprop.names import cas_number

    part = Component(cas=cas_number(fluid), name=fluid, formula="", molar_mass=0.03, elements=())
    return CoolPropBackend().open(FluidSpec((part,), (1.0,)), {})
