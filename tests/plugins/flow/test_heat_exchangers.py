"""Two-stream heat exchange: closed forms, pinches inside, roles of the streams."""

from __future__ import annotations

import numpy as np
import pytest
from CoolProp.CoolProp import PropsSI

import lostwork as lw


@pytest.fixture(scope="module")
def hot_air(constant_air):
    return lw.Stream(constant_air.state(T="500 K", p="3 bar"), rate="1 kg/s")


@pytest.fixture(scope="module")
def cold_air(constant_air):
    return lw.Stream(constant_air.state(T="320 K", p="2 bar"), rate="2 kg/s")


def test_ways_to_state_the_duty_of_one_exchanger_agree(hot_air, cold_air) -> None:
    duty = 0.7 * 1005.0 * 180.0
    ways = (
        {"duty": lw.quantity(duty, "W")},
        {"T_out_hot": lw.quantity(500.0 - duty / 1005.0, "K")},
        {"T_out_cold": lw.quantity(320.0 + duty / 2010.0, "K")},
        {"effectiveness": 0.7},
        {"minimum_approach": lw.quantity(180.0 - duty / 1005.0, "K")},
    )
    for way in ways:
        step = lw.process("heat-exchange", hot=hot_air, cold=cold_air, **way)
        assert step.duty_reached.magnitude == pytest.approx(duty, rel=1e-8), way
        assert step.approach_reached.magnitude == pytest.approx(54.0, rel=1e-7), way


def test_the_loss_is_that_of_the_closed_form(site, hot_air, cold_air, assert_sound) -> None:
    step = lw.process(
        "heat-exchange",
        hot=hot_air,
        cold=cold_air,
        T_out_hot="400 K",
        pressure_drop_hot="0.3 bar",
        p_out_cold="1.9 bar",
    )
    balance = assert_sound(step, site)
    R = 1005.0 - 1005.0 + lw.R / hot_air.state.fluid.molar_mass_si
    drop = R * np.log(3.0 / 2.7) + 2.0 * R * np.log(2.0 / 1.9)
    transfer = 1005.0 * np.log(400.0 / 500.0) + 2010.0 * np.log(370.0 / 320.0)
    assert balance.losses_si["pressure drop"] == pytest.approx(298.15 * drop, rel=1e-9)
    assert balance.losses_si["heat transfer"] == pytest.approx(298.15 * transfer, rel=1e-9)
    assert balance.purpose.expended_name == "exergy given up by the hot stream"


def test_parallel_flow_is_limited_where_counterflow_is_not(hot_air, cold_air) -> None:
    given = {"hot": hot_air, "cold": cold_air, "T_out_hot": "370 K"}
    assert lw.process("heat-exchange", **given).approach_reached.magnitude == pytest.approx(50.0)
    with pytest.raises(lw.ProcessError, match="temperatures cross along the exchanger by 15 K"):
        lw.process("heat-exchange", **given, arrangement="parallel").solve()


def test_a_pinch_inside_is_refused_although_the_overall_entropy_would_rise(site) -> None:
    water = lw.Fluid("water", backend="coolprop")
    gas = lw.Fluid("nitrogen", backend="coolprop")
    steam = lw.Stream(water.state(T="20 degC", p="20 bar"), rate="1 kg/s")
    hot = lw.Stream(gas.state(T="350 degC", p="1.2 bar"), rate="9.5 kg/s")
    step = lw.process("heat-exchange", hot=hot, cold=steam, quality_out_cold=1.0)
    with pytest.raises(lw.ProcessError, match="temperatures cross"):
        step.solve()
    # Both ends alone look sound, and so does the sum of entropies.
    h1, h2 = (PropsSI("Hmass", *pair, "P", 20e5, "Water") for pair in (("T", 293.15), ("Q", 1)))
    s1, s2 = (PropsSI("Smass", *pair, "P", 20e5, "Water") for pair in (("T", 293.15), ("Q", 1)))
    h3 = PropsSI("Hmass", "T", 623.15, "P", 1.2e5, "Nitrogen")
    s3 = PropsSI("Smass", "T", 623.15, "P", 1.2e5, "Nitrogen")
    h4 = h3 - (h2 - h1) / 9.5
    T4 = PropsSI("T", "Hmass", h4, "P", 1.2e5, "Nitrogen")
    s4 = PropsSI("Smass", "Hmass", h4, "P", 1.2e5, "Nitrogen")
    assert T4 > 293.15
    assert (s2 - s1) + 9.5 * (s4 - s3) > 0.0


def test_the_least_approach_of_a_boiler_sits_where_boiling_begins(site, assert_sound) -> None:
    water = lw.Fluid("water", backend="coolprop")
    gas = lw.Fluid("nitrogen", backend="coolprop")
    feed = lw.Stream(water.state(T="60 degC", p="20 bar"), rate="1 kg/s")
    hot = lw.Stream(gas.state(T="400 degC", p="1.2 bar"), rate="16 kg/s")
    step = lw.process("heat-exchange", hot=hot, cold=feed, quality_out_cold=1.0)
    assert_sound(step, site)
    h_bubble = PropsSI("Hmass", "P", 20e5, "Q", 0, "Water")
    h_steam = PropsSI("Hmass", "P", 20e5, "Q", 1, "Water")
    h_hot = PropsSI("Hmass", "T", 673.15, "P", 1.2e5, "Nitrogen") - (h_steam - h_bubble) / 16.0
    T_hot = PropsSI("T", "Hmass", h_hot, "P", 1.2e5, "Nitrogen")
    pinch = T_hot - PropsSI("T", "P", 20e5, "Q", 0, "Water")
    assert pinch > 0.0
    assert step.approach_reached.magnitude == pytest.approx(pinch, abs=1e-4)


def test_the_duty_at_a_stated_pinch_leaves_just_that_pinch(assert_sound, site) -> None:
    fluid = lw.Fluid("R134a", backend="coolprop")
    water = lw.Fluid("water", backend="coolprop")
    vapour = lw.Stream(fluid.state(T="70 degC", p="12 bar"), rate="1 kg/s")
    coolant = lw.Stream(water.state(T="20 degC", p="2 bar"), rate="2.5 kg/s")
    step = lw.process("heat-exchange", hot=vapour, cold=coolant, minimum_approach="4 K")
    assert step.approach_reached.magnitude == pytest.approx(4.0, abs=1e-5)
    assert_sound(step, site)


def test_below_ambient_the_cold_stream_gives_and_the_hot_stream_gains(site, assert_sound) -> None:
    gas = lw.Fluid("nitrogen", backend="coolprop")
    hot = lw.Stream(gas.state(T="220 K", p="20 bar"), rate="1 kg/s")
    cold = lw.Stream(gas.state(T="120 K", p="2 bar"), rate="1 kg/s")
    balance = assert_sound(lw.process("heat-exchange", hot=hot, cold=cold, T_out_hot="160 K"), site)
    assert balance.purpose.expended_name == "exergy given up by the cold stream"
    assert 0.0 < balance.efficiency < 1.0


def test_heat_across_ambient_serves_nobody(site, assert_sound) -> None:
    gas = lw.Fluid("nitrogen", backend="coolprop")
    hot = lw.Stream(gas.state(T="350 K", p="2 bar"), rate="1 kg/s")
    cold = lw.Stream(gas.state(T="200 K", p="2 bar"), rate="1 kg/s")
    balance = assert_sound(lw.process("heat-exchange", hot=hot, cold=cold, duty="20 kW"), site)
    assert balance.efficiency is None


def test_heat_lost_outside_is_taken_from_the_hot_stream(
    site, hot_air, cold_air, assert_sound
) -> None:
    step = lw.process(
        "heat-exchange",
        hot=hot_air,
        cold=cold_air,
        duty="80 kW",
        heat_loss="5 kW",
        heat_loss_at="300 K",
    )
    assert_sound(step, site)
    assert pytest.approx(500.0 - 85e3 / 1005.0) == step.outlets["hot"].state.si.T
    assert pytest.approx(320.0 + 80e3 / 2010.0) == step.outlets["cold"].state.si.T


def test_a_sweep_of_effectiveness_gives_row_by_row_what_single_steps_give(
    site, hot_air, cold_air
) -> None:
    shares = np.array([0.2, 0.5, 0.9])
    swept = lw.process("heat-exchange", hot=hot_air, cold=cold_air, effectiveness=shares)
    lost = swept.balance(site).work_lost_si
    for share, row in zip(shares, lost, strict=True):
        single = lw.process("heat-exchange", hot=hot_air, cold=cold_air, effectiveness=share)
        assert single.balance(site).work_lost_si == pytest.approx(row, rel=1e-10)


def test_exchangers_of_unlike_pinches_all_reach_the_approach_they_state() -> None:
    water = lw.Fluid("water", backend="coolprop")
    hot = water.state(T=["560 K", "560 K", "450 K", "520 K"], p="20 bar")
    cold = water.state(
        T=["300 K", "360 K", "290 K", "400 K"], p=["10 bar", "40 bar", "5 bar", "1 bar"]
    )
    step = lw.process(
        "heat-exchange",
        hot=lw.Stream(hot, rate="1 kg/s"),
        cold=lw.Stream(cold, rate="1.3 kg/s"),
        minimum_approach=["7 K", "3 K", "20 K", "0.5 K"],
    )
    assert step.approach_reached.magnitude == pytest.approx([7.0, 3.0, 20.0, 0.5], abs=1e-6)
