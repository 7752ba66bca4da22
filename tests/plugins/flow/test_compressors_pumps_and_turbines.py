"""Machines against closed forms, and against CoolProp driven by hand."""

from __future__ import annotations

import numpy as np
import pytest
from CoolProp.CoolProp import PT_INPUTS, AbstractState, HmassP_INPUTS, PropsSI
from scipy.integrate import solve_ivp

import lostwork as lw


def test_an_ideal_gas_is_compressed_as_the_closed_form_says(site, constant_air) -> None:
    suction = lw.Stream(constant_air.state(T="300 K", p="1 bar"), rate="2 kg/s")
    step = lw.process("compression", inlet=suction, p_out="8 bar", isentropic_efficiency=0.8)
    R = lw.R / constant_air.molar_mass_si
    T_out = 300.0 + 300.0 * (8.0 ** (R / 1005.0) - 1.0) / 0.8
    assert pytest.approx(T_out, rel=1e-12) == step.outlet.state.si.T
    assert step.shaft_power.magnitude == pytest.approx(2.0 * 1005.0 * (T_out - 300.0), rel=1e-12)
    sigma = 2.0 * (1005.0 * np.log(T_out / 300.0) - R * np.log(8.0))
    assert step.balance(site).entropy_generated.magnitude == pytest.approx(sigma, rel=1e-10)


@pytest.mark.parametrize("efficiency", [0.5, 0.8, 1.0])
def test_a_polytropic_ideal_gas_follows_its_power_law(constant_air, efficiency: float) -> None:
    inlet = lw.Stream(constant_air.state(T="300 K", p="4 bar"), rate="1 kg/s")
    R = lw.R / constant_air.molar_mass_si
    up = lw.process("compression", inlet=inlet, pressure_ratio=9, polytropic_efficiency=efficiency)
    down = lw.process("expansion", inlet=inlet, pressure_ratio=9, polytropic_efficiency=efficiency)
    power = R / 1005.0
    assert pytest.approx(300.0 * 9 ** (power / efficiency), rel=1e-11) == up.outlet.state.si.T
    assert pytest.approx(300.0 * 9 ** (-power * efficiency), rel=1e-11) == down.outlet.state.si.T
    assert up.polytropic_efficiency_reached.magnitude == pytest.approx(efficiency, rel=1e-9)
    assert down.polytropic_efficiency_reached.magnitude == pytest.approx(efficiency, rel=1e-9)


@pytest.mark.parametrize(
    ("fluid", "T", "p", "p_out", "efficiency"),
    [
        ("carbon dioxide", 320.0, 40e5, 100e5, 0.75),
        ("nitrogen", 130.0, 20e5, 120e5, 0.8),
        ("water", 700.0, 60e5, 0.06e5, 0.85),
        ("water", 293.15, 1e5, 200e5, 0.7),
        ("R134a", 260.0, 1e5, 12e5, 0.7),
    ],
)
def test_the_polytropic_path_of_a_real_fluid_agrees_with_a_stiff_integrator(
    fluid: str, T: float, p: float, p_out: float, efficiency: float
) -> None:
    bare = AbstractState("HEOS", fluid.title().replace(" ", "") if " " in fluid else fluid)
    bare.update(PT_INPUTS, p, T)
    h_in = bare.hmass()
    factor = 1.0 / efficiency if p_out > p else efficiency

    def slope(log_p: float, h: np.ndarray) -> list[float]:
        bare.update(HmassP_INPUTS, float(h[0]), float(np.exp(log_p)))
        return [factor * float(np.exp(log_p)) / bare.rhomass()]

    span = (np.log(p), np.log(p_out))
    followed = solve_ivp(slope, span, [h_in], method="DOP853", rtol=1e-11, atol=1e-6, max_step=0.02)
    rise = followed.y[0, -1] - h_in
    inlet = lw.Stream(
        lw.Fluid(fluid, backend="coolprop").state(T=lw.quantity(T, "K"), p=lw.quantity(p, "Pa")),
        rate="1 kg/s",
    )
    kind = "compression" if p_out > p else "expansion"
    step = lw.process(
        kind, inlet=inlet, p_out=lw.quantity(p_out, "Pa"), polytropic_efficiency=efficiency
    )
    assert step.outlet.state.si.h - inlet.state.si.h == pytest.approx(rise, rel=1e-8)


def test_a_steam_turbine_into_the_wet_region_agrees_with_bare_coolprop(site) -> None:
    water = lw.Fluid("water", backend="coolprop")
    inlet = lw.Stream(water.state(T="480 degC", p="60 bar"), rate="12 kg/s")
    step = lw.process("expansion", inlet=inlet, p_out="0.08 bar", isentropic_efficiency=0.82)
    h1 = PropsSI("Hmass", "T", 753.15, "P", 60e5, "Water")
    s1 = PropsSI("Smass", "T", 753.15, "P", 60e5, "Water")
    h2 = h1 - 0.82 * (h1 - PropsSI("Hmass", "P", 0.08e5, "Smass", s1, "Water"))
    s2 = PropsSI("Smass", "P", 0.08e5, "Hmass", h2, "Water")
    balance = step.balance(site)
    assert step.shaft_power.magnitude == pytest.approx(12.0 * (h1 - h2), rel=1e-9)
    assert balance.work_lost_si == pytest.approx(298.15 * 12.0 * (s2 - s1), rel=1e-7)
    assert 0.0 < step.outlet.state.si.quality < 1.0
    assert balance.efficiency == pytest.approx((h1 - h2) / (h1 - h2 + 298.15 * (s2 - s1)), rel=1e-8)


def test_a_measured_outlet_gives_back_the_efficiency_it_came_from(site) -> None:
    gas = lw.Fluid("carbon dioxide", backend="coolprop")
    inlet = lw.Stream(gas.state(T="310 K", p="10 bar"), rate="3 kg/s")
    made = lw.process(
        "compression",
        inlet=inlet,
        p_out="25 bar",
        isentropic_efficiency=0.77,
        heat_loss_fraction=0.06,
        heat_loss_at="320 K",
    )
    measured = lw.process(
        "compression",
        inlet=inlet,
        p_out="25 bar",
        T_out=made.outlet.state.T,
        heat_loss_fraction=0.06,
        heat_loss_at="320 K",
    )
    assert measured.isentropic_efficiency_reached.magnitude == pytest.approx(0.77, rel=1e-8)
    assert measured.shaft_power.magnitude == pytest.approx(made.shaft_power.magnitude, rel=1e-8)
    by_duty = lw.process(
        "compression",
        inlet=inlet,
        p_out="25 bar",
        T_out=made.outlet.state.T,
        heat_loss=0.06 * made.shaft_power,
        heat_loss_at="320 K",
    )
    assert by_duty.isentropic_efficiency_reached.magnitude == pytest.approx(0.77, rel=1e-8)


def test_a_discharge_colder_than_the_isentropic_one_is_pronounced_impossible(site) -> None:
    gas = lw.Fluid("nitrogen", backend="coolprop")
    inlet = lw.Stream(gas.state(T="300 K", p="1 bar"), rate="1 kg/s")
    step = lw.process("compression", inlet=inlet, p_out="5 bar", T_out="430 K")
    assert step.isentropic_efficiency_reached.magnitude > 1.0
    assert step.balance(site).verdict.status is lw.Status.impossible
    with pytest.raises(lw.SecondLawViolation):
        step.balance(site).require_possible()


@pytest.mark.parametrize("backend", ["ideal-gas", "coolprop", "cubic"])
@pytest.mark.parametrize("kind", ["compression", "expansion"])
def test_a_machine_of_efficiency_one_is_reversible(site, backend: str, kind: str) -> None:
    inlet = lw.Stream(
        lw.Fluid("nitrogen", backend=backend).state(T="350 K", p="6 bar"), rate="1 kg/s"
    )
    for given in ({"isentropic_efficiency": 1.0}, {"polytropic_efficiency": 1.0}):
        balance = lw.process(kind, inlet=inlet, pressure_ratio=3, **given).balance(site)
        assert balance.verdict.status is lw.Status.reversible, balance
        assert balance.efficiency == pytest.approx(1.0, abs=1e-7)


def test_bearings_and_casing_take_their_share_of_the_shaft_power(site, assert_sound) -> None:
    gas = lw.Fluid("nitrogen", backend="coolprop")
    inlet = lw.Stream(gas.state(T="300 K", p="1 bar"), rate="2 kg/s")
    bare = lw.process("compression", inlet=inlet, p_out="4 bar", isentropic_efficiency=0.8)
    full = lw.process(
        "compression",
        inlet=inlet,
        p_out="4 bar",
        isentropic_efficiency=0.8,
        mechanical_efficiency=0.95,
        mechanical_loss_at="310 K",
        heat_loss="20 kW",
        heat_loss_at="310 K",
    )
    assert full.shaft_power.magnitude == pytest.approx(bare.shaft_power.magnitude / 0.95)
    fall = bare.outlet.state.si.h - full.outlet.state.si.h
    assert fall == pytest.approx(10e3, rel=1e-9)
    balance = assert_sound(full, site)
    assert balance.losses_si["heat transfer"] > 0.0
    assert balance.losses_si["friction"] > bare.balance(site).losses_si["friction"]


def test_a_turbine_shaft_gives_less_than_the_fluid_by_the_mechanical_efficiency(site) -> None:
    gas = lw.Fluid("nitrogen", backend="ideal-gas")
    inlet = lw.Stream(gas.state(T="700 K", p="8 bar"), rate="2 kg/s")
    given = {"inlet": inlet, "p_out": "2 bar", "isentropic_efficiency": 0.85}
    bare = lw.process("expansion", **given)
    geared = lw.process(
        "expansion", **given, mechanical_efficiency=0.97, mechanical_loss_at="320 K"
    )
    assert geared.shaft_power.magnitude == pytest.approx(0.97 * bare.shaft_power.magnitude)
    assert pytest.approx(bare.outlet.state.si.T) == geared.outlet.state.si.T


def test_pumping_a_liquid_takes_volume_times_pressure_over_efficiency(site, assert_sound) -> None:
    water = lw.Fluid("water", backend="coolprop")
    inlet = lw.Stream(water.state(T="20 degC", p="1 bar"), rate="10 kg/s")
    step = lw.process("pumping", inlet=inlet, pressure_rise="50 bar", isentropic_efficiency=0.7)
    estimate = 10.0 * inlet.state.si.v * 50e5 / 0.7
    assert step.shaft_power.magnitude == pytest.approx(estimate, rel=2e-3)
    assert set(assert_sound(step, site).losses_si) == {"friction"}


def test_loss_grows_as_efficiency_falls(site) -> None:
    steam = lw.Fluid("water", backend="coolprop").state(T="400 degC", p="20 bar")
    inlet = lw.Stream(steam, rate="1 kg/s")
    efficiencies = np.linspace(0.3, 1.0, 8)
    for kind in ("compression", "expansion"):
        for field in ("isentropic_efficiency", "polytropic_efficiency"):
            step = lw.process(kind, inlet=inlet, pressure_ratio=4, **{field: efficiencies})
            lost = step.balance(site).work_lost_si
            assert np.all(np.diff(lost) < 0.0)


def test_kinetic_energy_passes_through_a_machine(constant_air) -> None:
    inlet = lw.Stream(constant_air.state(T="300 K", p="1 bar"), rate="2 kg/s", velocity="90 m/s")
    step = lw.process("compression", inlet=inlet, p_out="2 bar", isentropic_efficiency=0.8)
    assert step.outlet.si.mechanical == pytest.approx(0.5 * 90.0**2)


def test_a_step_names_its_outlet_after_itself(constant_air) -> None:
    inlet = lw.Stream(constant_air.state(T="300 K", p="1 bar"), rate="2 kg/s")
    step = lw.process(
        "compression", name="K-101", inlet=inlet, p_out="2 bar", isentropic_efficiency=0.8
    )
    assert step.outlet.name == "K-101.outlet"
