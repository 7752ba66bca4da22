"""Brines and antifreeze: published values, one surface of h, v and s, and what is refused."""

from __future__ import annotations

import pickle
from concurrent.futures import ThreadPoolExecutor

import numpy as np
import pytest

import lostwork as lw

SITE = lw.Surroundings(T="20 degC", p="1 bar")


def glycol(share: float = 0.3) -> lw.Fluid:
    composition = {"ethylene glycol": share, "water": 1.0 - share}
    return lw.Fluid(composition, backend="incompressible", basis="mass")


def brine(share: float = 0.2) -> lw.Fluid:
    composition = {"calcium chloride": share, "water": 1.0 - share}
    return lw.Fluid(composition, backend="incompressible", basis="mass")


@pytest.mark.parametrize(
    ("fluid", "T", "density", "freezing"),
    [
        # ASHRAE Handbook, Fundamentals, physical properties of secondary coolants, from memory:
        # density (kg/m3) at T, freezing point (degC), both by mass fraction.
        (glycol(0.3), "0 degC", 1047.0, -14.1),
        (glycol(0.5), "20 degC", 1071.0, -36.8),
        (brine(0.2), "0 degC", 1189.0, -17.6),
    ],
    ids=["30 % glycol", "50 % glycol", "20 % calcium chloride"],
)
def test_density_and_freezing_point_are_those_of_the_handbook(fluid, T, density, freezing):
    assert 1.0 / fluid.state(T=T, p="2 bar").si.v == pytest.approx(density, rel=0.01)
    assert fluid.limits.T_min - 273.15 == pytest.approx(freezing, abs=1.5)


def test_heat_capacity_of_water_is_that_of_the_steam_tables():
    """4.18 kJ/kg/K between 10 and 90 degC (common practice)."""
    water = lw.Fluid("water", backend="incompressible")
    a, b = (water.state(T=T, p="2 bar").si for T in ("10 degC", "90 degC"))
    assert (b.h - a.h) / 80.0 == pytest.approx(4187.0, rel=3e-3)


@pytest.mark.parametrize("fluid", [glycol(), brine()], ids=["glycol", "brine"])
def test_a_brine_closes_to_what_is_stated(fluid):
    assert not fluid.noise(cells=3).exceeding


def test_a_brine_is_a_liquid_and_is_found_again_by_h_and_by_s():
    state = glycol().state(T="-5 degC", p="4 bar")
    assert state.phase == "liquid"
    for given in ({"h": state.h}, {"s": state.s}):
        again = glycol().state(p="4 bar", **given)
        assert again.isclose(state, relative=1e-9)


def test_rows_below_the_freezing_point_fail_by_name():
    T = lw.quantity(np.array([253.15, 273.15, 390.0]), "K")
    states = glycol().state(T=T, p="4 bar")
    assert set(states.failed) == {0, 2}
    assert "freezing" in states.failed[0]
    assert np.isfinite(states.si.s[1])


@pytest.mark.parametrize(
    ("composition", "said"),
    [
        ({"ethylene glycol": 0.7, "water": 0.3}, "do not reach"),
        ({"nitrogen": 1.0}, "no solution"),
        ({"ethylene glycol": 0.2, "sodium chloride": 0.1, "water": 0.7}, "no solution"),
    ],
)
def test_what_is_no_tabulated_solution_is_refused(composition, said):
    with pytest.raises(lw.PropertyError, match=said):
        lw.Fluid(composition, backend="incompressible", basis="mass")


def test_a_brine_has_no_vapour_and_no_options():
    with pytest.raises(lw.PairRefused, match="without a vapour"):
        glycol().state(p="1 bar", quality=0.1)
    with pytest.raises(lw.PropertyError, match="no option"):
        lw.Fluid("water", backend="incompressible", concentration=0.1)


def test_brines_of_two_strengths_are_not_subtracted():
    with pytest.raises(lw.DatumMismatch):
        _ = glycol(0.3).state(T="0 degC", p="1 bar") - glycol(0.2).state(T="0 degC", p="1 bar")


def test_a_brine_survives_a_pickle_and_many_threads():
    fluid = glycol()
    assert pickle.loads(pickle.dumps(fluid)) == fluid
    T = np.linspace(265.0, 360.0, 200)
    alone = [fluid.state_si(("T", "p"), float(t), 4e5).si.h for t in T]
    with ThreadPoolExecutor(4) as threads:
        together = list(threads.map(lambda t: fluid.state_si(("T", "p"), float(t), 4e5).si.h, T))
    assert together == alone


CHILLER = """
[case]
backend = "coolprop"
[surroundings]
T = "25 degC"
p = "1.013 bar"
[fluids.propane]
components = "propane"
[fluids.brine]
components = {"ethylene glycol" = 0.3, water = 0.7}
basis = "mass"
backend = "incompressible"
[streams.refrigerant]
fluid = "propane"
p = "2.4 bar"
quality = 0.25
rate = "0.4 kg/s"
[streams.return]
fluid = "brine"
T = "-4 degC"
p = "1.5 bar"
rate = "9 kg/s"
[steps.pump]
type = "pumping"
inlet = "return"
p_out = "4 bar"
isentropic_efficiency = 0.65
[steps.evaporator]
type = "heat-exchange"
hot = "pump"
cold = "refrigerant"
quality_out_cold = 1.0
pressure_drop_hot = "0.5 bar"
"""


def test_a_chiller_with_brine_on_one_side_is_audited():
    audit = lw.Case.parse(CHILLER).audit()
    assert audit.acceptable
    pump, evaporator = audit.balances
    # v dp / eta, the trade's rule for a pump.
    assert pump.work_total.to("kW").magnitude == pytest.approx(
        9 * 2.5e5 / 1047 / 0.65 / 1e3, rel=0.02
    )
    assert evaporator.verdict.status is lw.Status.possible
    assert 0.0 < evaporator.efficiency < 1.0
    # Propane and brine count from different zeros, which cancel: each leaves as it came.
    assert audit.whole.work_lost_si == pytest.approx(audit.work_lost_si, rel=1e-9)
