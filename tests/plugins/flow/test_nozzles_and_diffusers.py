"""Pressure into velocity and back: closed forms of the ideal gas, and a real fluid by hand."""

from __future__ import annotations

import numpy as np
import pytest
from CoolProp.CoolProp import PropsSI

import lostwork as lw


def test_an_isentropic_nozzle_reaches_mach_one_at_the_critical_ratio(site, constant_air) -> None:
    R = lw.R / constant_air.molar_mass_si
    gamma = 1005.0 / (1005.0 - R)
    critical = ((gamma + 1.0) / 2.0) ** (gamma / (gamma - 1.0))
    inlet = lw.Stream(constant_air.state(T="400 K", p="6 bar"), rate="1 kg/s")
    step = lw.process("nozzle", inlet=inlet, pressure_ratio=critical, isentropic_efficiency=1.0)
    T_throat = 400.0 * 2.0 / (gamma + 1.0)
    assert step.velocity_reached.magnitude == pytest.approx(np.sqrt(gamma * R * T_throat), rel=1e-9)
    assert step.mach_reached.magnitude == pytest.approx(1.0, rel=1e-6)
    assert step.balance(site).verdict.status is lw.Status.reversible


def test_nozzle_efficiency_is_actual_over_isentropic_fall_of_enthalpy(site, assert_sound) -> None:
    steam = lw.Fluid("water", backend="coolprop").state(T="300 degC", p="10 bar")
    inlet = lw.Stream(steam, rate="2 kg/s", velocity="40 m/s")
    step = lw.process("nozzle", inlet=inlet, p_out="4 bar", isentropic_efficiency=0.93)
    h = PropsSI("Hmass", "T", 573.15, "P", 10e5, "Water")
    s = PropsSI("Smass", "T", 573.15, "P", 10e5, "Water")
    fall = 0.93 * (h - PropsSI("Hmass", "P", 4e5, "Smass", s, "Water"))
    assert step.velocity_reached.magnitude == pytest.approx(np.sqrt(1600.0 + 2.0 * fall), rel=1e-8)
    balance = assert_sound(step, site)
    generated = PropsSI("Smass", "P", 4e5, "Hmass", h - fall, "Water") - s
    assert balance.entropy_generated.magnitude == pytest.approx(2.0 * generated, rel=1e-6)


@pytest.mark.parametrize("kind", ["nozzle", "diffuser"])
def test_any_two_of_pressure_velocity_and_efficiency_tell_the_third(kind: str) -> None:
    gas = lw.Fluid("nitrogen", backend="coolprop").state(T="320 K", p="3 bar")
    inlet = lw.Stream(gas, rate="1 kg/s", velocity="250 m/s")
    p_out = "1.8 bar" if kind == "nozzle" else "3.6 bar"
    whole = lw.process(kind, inlet=inlet, p_out=p_out, isentropic_efficiency=0.9)
    velocity = whole.velocity_reached
    by_efficiency = lw.process(kind, inlet=inlet, velocity_out=velocity, isentropic_efficiency=0.9)
    by_pressure = lw.process(kind, inlet=inlet, velocity_out=velocity, p_out=p_out)
    for step in (by_efficiency, by_pressure):
        assert step.outlet.state.isclose(whole.outlet.state, relative=1e-7)


def test_a_diffuser_undoes_an_ideal_nozzle(site, constant_air) -> None:
    inlet = lw.Stream(constant_air.state(T="400 K", p="6 bar"), rate="1 kg/s", velocity="30 m/s")
    nozzle = lw.process("nozzle", inlet=inlet, p_out="3 bar", isentropic_efficiency=1.0)
    diffuser = lw.process(
        "diffuser", inlet=nozzle.outlet, velocity_out="30 m/s", isentropic_efficiency=1.0
    )
    assert diffuser.outlet.state.isclose(inlet.state, relative=1e-9)
    worse = lw.process(
        "diffuser", inlet=nozzle.outlet, velocity_out="30 m/s", isentropic_efficiency=0.8
    )
    assert worse.outlet.state.si.p < inlet.state.si.p
    assert worse.balance(site).work_lost_si > 0.0
