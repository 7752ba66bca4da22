"""Streams that meet and streams that part."""

from __future__ import annotations

import numpy as np
import pytest
from CoolProp.CoolProp import PropsSI

import lostwork as lw


def test_two_gases_of_one_temperature_generate_the_entropy_of_mixing(site, assert_sound) -> None:
    nitrogen = lw.Fluid("nitrogen", backend="ideal-gas")
    oxygen = lw.Fluid("oxygen", backend="ideal-gas")
    given = {"T": "300 K", "p": "2 bar"}
    inflows = [
        lw.Stream(nitrogen.state(**given), rate="3 mol/s"),
        lw.Stream(oxygen.state(**given), rate="1 mol/s"),
    ]
    step = lw.process("mixing", inflows=inflows)
    balance = assert_sound(step, site)
    sigma = -lw.R * (3.0 * np.log(0.75) + np.log(0.25))
    assert balance.entropy_generated.magnitude == pytest.approx(sigma, rel=1e-9)
    assert balance.efficiency is None
    assert pytest.approx(300.0) == step.outlet.state.si.T
    assert sorted(step.outlet.state.fluid.spec.mole_fractions) == pytest.approx([0.25, 0.75])


def test_pressures_are_equalised_first_and_temperatures_mixed_afterwards(
    site, constant_air, assert_sound
) -> None:
    inflows = [
        lw.Stream(constant_air.state(T="300 K", p="4 bar"), rate="1 kg/s"),
        lw.Stream(constant_air.state(T="500 K", p="2 bar"), rate="3 kg/s"),
    ]
    step = lw.process("mixing", inflows=inflows)
    losses = assert_sound(step, site).losses_si
    R = lw.R / constant_air.molar_mass_si
    assert step.outlet.state.si.p == 2e5
    assert pytest.approx(450.0) == step.outlet.state.si.T
    assert losses["pressure drop"] == pytest.approx(298.15 * R * np.log(2.0), rel=1e-9)
    mixing = 1005.0 * (np.log(450.0 / 300.0) + 3.0 * np.log(450.0 / 500.0))
    assert losses["mixing"] == pytest.approx(298.15 * mixing, rel=1e-9)


def test_a_desuperheater_agrees_with_bare_coolprop(site, assert_sound) -> None:
    water = lw.Fluid("water", backend="coolprop")
    steam = lw.Stream(water.state(T="400 degC", p="20 bar"), rate="5 kg/s")
    spray = lw.Stream(water.state(T="100 degC", p="30 bar"), rate="0.8 kg/s", velocity="5 m/s")
    step = lw.process("mixing", inflows=[steam, spray], p_out="19 bar")
    assert_sound(step, site)
    h = (
        5.0 * PropsSI("Hmass", "T", 673.15, "P", 20e5, "Water")
        + 0.8 * PropsSI("Hmass", "T", 373.15, "P", 30e5, "Water")
    ) / 5.8
    T = PropsSI("T", "Hmass", h, "P", 19e5, "Water")
    assert pytest.approx(T, rel=1e-8) == step.outlet.state.si.T
    assert step.outlet.si.mechanical == pytest.approx(0.8 * 12.5 / 5.8)


def test_one_of_three_inflows_may_stand_still(site, constant_air, assert_sound) -> None:
    inflows = [
        lw.Stream(constant_air.state(T=f"{T} K", p="2 bar"), rate=f"{rate} kg/s")
        for T, rate in ((300, 1), (400, 0), (500, 1))
    ]
    step = lw.process("mixing", inflows=inflows)
    assert_sound(step, site)
    assert pytest.approx(400.0) == step.outlet.state.si.T


@pytest.mark.parametrize("backend", ["coolprop", "cubic"])
def test_real_gases_of_different_composition_leave_as_their_mixture(
    site, backend: str, assert_sound
) -> None:
    methane = lw.Stream(
        lw.Fluid("methane", backend=backend).state(T="300 K", p="20 bar"), rate="1 kg/s"
    )
    nitrogen = lw.Stream(
        lw.Fluid("nitrogen", backend=backend).state(T="320 K", p="25 bar"), rate="1 kg/s"
    )
    step = lw.process("mixing", inflows=[methane, nitrogen])
    losses = assert_sound(step, site).losses_si
    x = (1 / 28.0134) / (1 / 28.0134 + 1 / 16.0425)
    ideal = 298.15 * lw.R * -(x * np.log(x) + (1 - x) * np.log(1 - x)) / 0.0204
    assert losses["mixing"] == pytest.approx(2.0 * ideal, rel=0.1)


def test_a_split_loses_nothing(site, constant_air, assert_sound) -> None:
    inlet = lw.Stream(constant_air.state(T="400 K", p="4 bar"), rate="2 kg/s", velocity="20 m/s")
    step = lw.process("splitting", name="header", inlet=inlet, fractions={"a": 0.25, "b": "75 %"})
    balance = assert_sound(step, site)
    assert balance.verdict.status is lw.Status.reversible
    assert step.outlets["b"].mass_si == pytest.approx(1.5)
    assert step.outlets["a"].name == "header.a"
    assert step.outlets["a"].si.mechanical == pytest.approx(200.0)


def test_an_adiabatic_flash_of_water_follows_the_lever_rule(site, assert_sound) -> None:
    water = lw.Fluid("water", backend="coolprop")
    inlet = lw.Stream(water.state(T="180 degC", p="20 bar"), rate="2 kg/s")
    step = lw.process("flash-separation", inlet=inlet, p_out="2 bar")
    assert_sound(step, site)
    h = PropsSI("Hmass", "T", 453.15, "P", 20e5, "Water")
    quality = PropsSI("Q", "Hmass", h, "P", 2e5, "Water")
    assert step.outlets["vapour"].mass_si == pytest.approx(2.0 * quality, rel=1e-7)
    assert step.outlets["liquid"].state.phase == "saturated liquid"


def test_a_drum_with_one_phase_leaves_the_other_outlet_empty(site, assert_sound) -> None:
    water = lw.Fluid("water", backend="coolprop")
    inlet = lw.Stream(water.state(T="300 degC", p="20 bar"), rate="2 kg/s")
    step = lw.process("flash-separation", inlet=inlet, p_out=["2 bar", "5 bar"])
    balance = assert_sound(step, site)
    assert np.all(step.outlets["liquid"].mass_si == 0.0)
    assert np.all(step.outlets["vapour"].mass_si == 2.0)
    assert step.outlets["liquid"].state.si.quality == pytest.approx([0.0, 0.0])
    valve = lw.process("throttling", inlet=inlet, p_out=["2 bar", "5 bar"]).balance(site)
    assert balance.work_lost_si == pytest.approx(valve.work_lost_si, rel=1e-9)


def test_rows_with_one_phase_and_rows_with_two_stand_side_by_side(site, assert_sound) -> None:
    water = lw.Fluid("water", backend="coolprop")
    inlet = lw.Stream(water.state(T="150 degC", p="20 bar"), rate="1 kg/s")
    step = lw.process("flash-separation", inlet=inlet, p_out=["10 bar", "2 bar"])
    assert_sound(step, site)
    assert step.outlets["vapour"].mass_si[0] == 0.0
    assert step.outlets["liquid"].state.si.T[0] == pytest.approx(423.15, abs=1.0)
    assert 0.0 < step.outlets["vapour"].mass_si[1] < 0.1


@pytest.mark.parametrize("backend", ["coolprop", "cubic"])
@pytest.mark.parametrize("given", [{}, {"T_out": "235 K", "at": "225 K"}])
def test_a_mixture_parts_into_phases_that_close_in_mass_and_energy(
    site, backend: str, given, assert_sound
) -> None:
    gas = lw.Fluid({"methane": 0.6, "propane": 0.4}, backend=backend)
    inlet = lw.Stream(gas.state(T="260 K", p="30 bar"), rate="1 kg/s")
    step = lw.process("flash-separation", inlet=inlet, p_out="10 bar", **given)
    # The phase compositions of the multiparameter mixture are good to about 1e-6.
    closing = 5e-6 if backend == "coolprop" else 1e-9
    assert_sound(step, site, slack=closing, closing=closing)
    vapour, liquid = step.outlets["vapour"], step.outlets["liquid"]
    assert vapour.mass_si + liquid.mass_si == pytest.approx(1.0)
    assert pytest.approx(liquid.state.si.T, abs=2e-3) == vapour.state.si.T
    assert vapour.state.fluid.spec.mole_fractions[0] > 0.7
    assert liquid.state.fluid.spec.mole_fractions[0] < 0.3


def test_a_mixture_that_stays_gas_leaves_whole(site, assert_sound) -> None:
    gas = lw.Fluid({"methane": 0.9, "propane": 0.1}, backend="cubic")
    inlet = lw.Stream(gas.state(T="320 K", p="30 bar"), rate="1 kg/s")
    step = lw.process("flash-separation", inlet=inlet, p_out="10 bar")
    assert_sound(step, site)
    assert step.outlets["vapour"].mass_si == 1.0
    assert step.outlets["liquid"].mass_si == 0.0


def test_a_drum_cooled_by_a_reservoir_splits_its_loss(site, assert_sound) -> None:
    water = lw.Fluid("water", backend="coolprop")
    inlet = lw.Stream(
        water.state(T="180 degC", p="20 bar"),
        rate="1 kg/s",
    )
    step = lw.process(
        "flash-separation", inlet=inlet, p_out="2 bar", quality_out=0.5, at="150 degC"
    )
    losses = assert_sound(step, site).losses_si
    assert losses["heat transfer"] > 0.0
    assert losses["pressure drop"] > 0.0


def test_measured_steps_are_taken_at_their_word(site) -> None:
    water = lw.Fluid("water", backend="coolprop")
    inlet = lw.Stream(water.state(T="450 degC", p="30 bar"), rate="8 kg/s")
    outlet = lw.Stream(water.state(T="150 degC", p="2 bar"), rate="8.05 kg/s")
    given = {
        "inflows": [inlet],
        "outflows": {"exhaust": outlet},
        "heat": [lw.Heat("-300 kW", at="25 degC")],
        "work": [lw.Work("-4290 kW")],
    }
    strict = lw.process("as-measured", **given).balance(site)
    assert strict.verdict.status is lw.Status.unbalanced
    measured = lw.process("as-measured", **given, closing="1 %").balance(site)
    assert measured.verdict.status is lw.Status.possible
    assert set(measured.losses_si) == {"not attributed"}


def test_a_measured_step_may_leave_one_rate_and_one_work_open(site) -> None:
    water = lw.Fluid("water", backend="coolprop")
    inlet = lw.Stream(water.state(T="450 degC", p="30 bar"), rate="8 kg/s")
    step = lw.process(
        "as-measured",
        name="turbine",
        inflows=[inlet],
        outflows={"exhaust": lw.Stream(water.state(T="150 degC", p="2 bar"))},
        work=[lw.Work.unknown("generator")],
    )
    balance = step.balance(site)
    h = PropsSI("Hmass", "T", 723.15, "P", 30e5, "Water")
    h -= PropsSI("Hmass", "T", 423.15, "P", 2e5, "Water")
    assert balance.work[0].si == pytest.approx(-8.0 * h, rel=1e-9)
    assert step.outlet.name == "turbine.exhaust"


def test_a_stream_that_could_not_be_let_down_alone_is_mixed_all_the_same():
    """Carbon dioxide of 6.6 bar and 230 K would freeze at 1 bar; mixed with more it does not."""
    fluid = lw.Fluid("carbon dioxide", backend="coolprop")
    thin, dense = (
        lw.Stream(fluid.state(T="230 K", p=p), rate="0.1 kg/s") for p in ("1 bar", "6.60693 bar")
    )
    books = lw.process("mixing", inflows=(thin, dense)).balance(
        lw.Surroundings(T="15 degC", p="1 bar")
    )
    assert books.verdict.status is lw.Status.possible
    assert list(books.losses) == ["not attributed"]
