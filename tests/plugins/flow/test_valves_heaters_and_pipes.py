"""Valves, heaters, coolers and pipes against closed forms and bare CoolProp."""

from __future__ import annotations

import numpy as np
import pytest
from CoolProp.CoolProp import PropsSI

import lostwork as lw


def test_throttling_an_ideal_gas_keeps_its_temperature(site, constant_air, assert_sound) -> None:
    inlet = lw.Stream(constant_air.state(T="310 K", p="9 bar"), rate="2 kg/s")
    step = lw.process("throttling", inlet=inlet, pressure_ratio=3)
    balance = assert_sound(step, site)
    R = lw.R / constant_air.molar_mass_si
    assert pytest.approx(310.0, rel=1e-12) == step.outlet.state.si.T
    assert balance.entropy_generated.magnitude == pytest.approx(2.0 * R * np.log(3.0), rel=1e-11)
    assert balance.efficiency is None
    assert set(balance.losses_si) == {"pressure drop"}


def test_throttling_steam_agrees_with_bare_coolprop(site) -> None:
    steam = lw.Fluid("water", backend="coolprop").state(T="420 degC", p="50 bar")
    step = lw.process("throttling", inlet=lw.Stream(steam, rate="1 kg/s"), pressure_drop="30 bar")
    h = PropsSI("Hmass", "T", 693.15, "P", 50e5, "Water")
    s = PropsSI("Smass", "T", 693.15, "P", 50e5, "Water")
    rise = PropsSI("Smass", "Hmass", h, "P", 20e5, "Water") - s
    assert step.balance(site).entropy_generated.magnitude == pytest.approx(rise, rel=1e-8)


def test_a_refrigerant_valve_makes_cold_out_of_pressure(site, assert_sound) -> None:
    fluid = lw.Fluid("R134a", backend="coolprop")
    inlet = lw.Stream(fluid.state(T="30 degC", p="8 bar"), rate="1 kg/s")
    step = lw.process("throttling", inlet=inlet, p_out="2 bar")
    balance = assert_sound(step, site)

    def exergy(T: float, p: float) -> float:
        h = PropsSI("Hmass", "T", T, "P", p, "R134a")
        return h - 298.15 * PropsSI("Smass", "T", T, "P", p, "R134a")

    spent = exergy(298.15, 8e5) - exergy(298.15, 2e5)
    assert balance.purpose.expended == pytest.approx(spent, rel=1e-7)
    assert 0.0 < balance.efficiency < 1.0
    warm = lw.process("throttling", inlet=inlet, p_out="7.9 bar")
    assert warm.balance(site).efficiency is None


def test_a_valve_without_a_state_at_ambient_temperature_has_no_efficiency() -> None:
    water = lw.Fluid("water", backend="coolprop")
    frozen = lw.Surroundings(T="-10 degC", p="1 bar")
    inlet = lw.Stream(water.state(T="5 degC", p="5 bar"), rate="1 kg/s")
    balance = lw.process("throttling", inlet=inlet, p_out="1 bar").balance(frozen)
    assert balance.efficiency is None
    assert balance.verdict.status is lw.Status.possible


def test_a_gas_warmed_by_a_reservoir_generates_what_the_closed_form_says(
    site, constant_air, assert_sound
) -> None:
    inlet = lw.Stream(constant_air.state(T="300 K", p="2 bar"), rate="1.5 kg/s")
    step = lw.process("heating", inlet=inlet, T_out="400 K", at="450 K", pressure_drop="0.1 bar")
    balance = assert_sound(step, site)
    R = lw.R / constant_air.molar_mass_si
    drop = 1.5 * R * np.log(2.0 / 1.9)
    transfer = 1.5 * 1005.0 * (np.log(4.0 / 3.0) - 100.0 / 450.0)
    assert balance.losses_si["pressure drop"] == pytest.approx(298.15 * drop, rel=1e-9)
    assert balance.losses_si["heat transfer"] == pytest.approx(298.15 * transfer, rel=1e-9)
    assert balance.heat[0].si == pytest.approx(1.5 * 1005.0 * 100.0, rel=1e-11)


def test_electric_heat_is_dissipation(site, constant_air, assert_sound) -> None:
    inlet = lw.Stream(constant_air.state(T="300 K", p="2 bar"), rate="1 kg/s")
    step = lw.process("heating", inlet=inlet, duty="60 kW", electric=True)
    balance = assert_sound(step, site)
    T_out = 300.0 + 60e3 / 1005.0
    sigma = 1005.0 * np.log(T_out / 300.0)
    assert balance.losses_si["electric dissipation"] == pytest.approx(298.15 * sigma, rel=1e-9)
    assert balance.work_total.magnitude == pytest.approx(60e3)
    assert balance.efficiency == pytest.approx(1.0 - 298.15 * sigma / 60e3, rel=1e-9)


def test_cooling_against_the_surroundings_has_no_purpose_and_recovering_the_heat_has(
    site, constant_air, assert_sound
) -> None:
    inlet = lw.Stream(constant_air.state(T="500 K", p="2 bar"), rate="1 kg/s")
    thrown = lw.process("cooling", inlet=inlet, T_out="400 K", at=site.T)
    recovered = lw.process("cooling", inlet=inlet, T_out="400 K", at="390 K")
    assert assert_sound(thrown, site).efficiency is None
    balance = assert_sound(recovered, site)
    spent = 1005.0 * (100.0 - 298.15 * np.log(500.0 / 400.0))
    gained = 1005.0 * 100.0 * (1.0 - 298.15 / 390.0)
    assert balance.efficiency == pytest.approx(gained / spent, rel=1e-9)


def test_below_ambient_the_reservoir_of_a_cooler_spends_exergy(site, assert_sound) -> None:
    nitrogen = lw.Fluid("nitrogen", backend="coolprop")
    inlet = lw.Stream(nitrogen.state(T="250 K", p="5 bar"), rate="1 kg/s")
    balance = assert_sound(lw.process("cooling", inlet=inlet, T_out="200 K", at="190 K"), site)
    assert 0.0 < balance.efficiency < 1.0
    assert balance.purpose.recovered_name == "exergy gained by the stream"
    cold = lw.Stream(nitrogen.state(T="150 K", p="5 bar"), rate="1 kg/s")
    warmed = assert_sound(lw.process("heating", inlet=cold, T_out="200 K", at="210 K"), site)
    assert 0.0 < warmed.efficiency < 1.0
    assert warmed.purpose.expended_name == "exergy given up by the stream"


def test_a_boiler_and_a_condenser_are_told_by_quality(site, assert_sound) -> None:
    water = lw.Fluid("water", backend="coolprop")
    inlet = lw.Stream(water.state(T="60 degC", p="10 bar"), rate="1 kg/s")
    boiler = lw.process("heating", inlet=inlet, quality_out=1.0, at="200 degC")
    assert_sound(boiler, site)
    assert boiler.outlet.state.phase == "saturated vapour"
    condenser = lw.process("cooling", inlet=boiler.outlet, quality_out=0.0, at="20 degC")
    assert_sound(condenser, site)
    latent = PropsSI("Hmass", "P", 10e5, "Q", 1, "Water") - PropsSI(
        "Hmass", "P", 10e5, "Q", 0, "Water"
    )
    assert condenser.solution.heat[0].si == pytest.approx(-latent, rel=1e-9)


def test_an_insulated_pipe_is_a_valve(site, assert_sound) -> None:
    gas = lw.Fluid({"methane": 0.9, "ethane": 0.1}, backend="cubic")
    inlet = lw.Stream(gas.state(T="290 K", p="60 bar"), rate="5 kg/s")
    pipe = lw.process("pipe", inlet=inlet, pressure_drop="8 bar")
    valve = lw.process("throttling", inlet=inlet, pressure_drop="8 bar")
    assert assert_sound(pipe, site).work_lost_si == valve.balance(site).work_lost_si


def test_a_pipe_told_by_its_leak_or_by_its_outlet_is_one_pipe(site, assert_sound) -> None:
    gas = lw.Fluid("methane", backend="coolprop")
    inlet = lw.Stream(gas.state(T="290 K", p="60 bar"), rate="5 kg/s")
    given = {"inlet": inlet, "p_out": "52 bar", "heat_leak_at": "320 K"}
    by_leak = lw.process("pipe", **given, heat_leak="200 kW")
    by_outlet = lw.process("pipe", **given, T_out=by_leak.outlet.state.T)
    assert by_outlet.solution.heat[0].si == pytest.approx(200e3, rel=1e-7)
    balance = assert_sound(by_leak, site)
    assert set(balance.losses_si) == {"pressure drop", "heat transfer"}


def test_a_vacuum_outlet_and_a_two_phase_inlet_are_taken(site, assert_sound) -> None:
    water = lw.Fluid("water", backend="coolprop")
    wet = lw.Stream(water.state(p="2 bar", quality=0.4), rate="1 kg/s")
    valve = lw.process("throttling", inlet=wet, p_out="2 kPa")
    assert_sound(valve, site)
    assert valve.outlet.state.phase == "two-phase"


def test_a_batch_takes_energies_instead_of_powers(site, constant_air, assert_sound) -> None:
    inlet = lw.Stream(constant_air.state(T="300 K", p="2 bar"), mass="10 kg")
    step = lw.process("heating", inlet=inlet, duty="500 kJ", at="420 K")
    balance = assert_sound(step, site)
    assert not balance.per_time
    assert pytest.approx(300.0 + 50e3 / 1005.0) == step.outlet.state.si.T
