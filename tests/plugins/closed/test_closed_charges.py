"""Closed charges: real fluids against bare CoolProp, wet steam, arrays, refusals, reservoirs."""

from __future__ import annotations

import math

import CoolProp
import numpy as np
import pytest

import lostwork as lw

SITE = lw.Surroundings(T="20 degC", p="1.013 bar")
BACKENDS = ["ideal-gas", "coolprop", "cubic"]


def charge(fluid: str, backend: str, mass: str = "1 kg", **state: object) -> lw.Content:
    return lw.Content(lw.Fluid(fluid, backend=backend).state(**state), mass=mass)


def nitrogen(backend: str = "coolprop", **more: object) -> lw.Content:
    return charge("nitrogen", backend, T="20 degC", p="60 bar", **more)


def test_free_expansion_of_a_real_gas_ends_at_the_energy_and_volume_of_bare_coolprop():
    raw = CoolProp.AbstractState("HEOS", "Nitrogen")
    raw.update(CoolProp.PT_INPUTS, 60e5, 293.15)
    u, rho = raw.umass(), raw.rhomass()
    raw.update(CoolProp.DmassUmass_INPUTS, rho / 4.0, u)
    end = lw.process("free-expansion", charge=nitrogen(), volume_ratio=4.0).end.state
    assert pytest.approx(raw.T(), rel=1e-8) == end.si.T
    assert end.si.p == pytest.approx(raw.p(), rel=1e-8)
    assert end.si.T < 293.15 - 3.0, "nitrogen cools when its molecules part (Joule)"


@pytest.mark.parametrize("backend", BACKENDS)
def test_free_expansion_does_no_work_and_wastes_all_that_a_slow_one_would_give(backend):
    step = lw.process("free-expansion", charge=nitrogen(backend), volume_ratio=2.0)
    books = step.balance(SITE)
    assert books.work_total.magnitude == 0.0
    assert books.verdict.status is lw.Status.possible
    assert list(books.losses) == ["sudden expansion"]


def test_wet_steam_held_at_its_temperature_takes_its_latent_heat():
    """Slow evaporation at T and p: Q = T (s2 - s1), W = -p (v2 - v1)."""
    start = charge("water", "coolprop", T="150 degC", quality=0.2)
    dry = start.state.fluid.state(T="150 degC", quality=0.9)
    step = lw.process(
        "quasi-static-path",
        charge=start,
        held="p",
        volume_ratio=float(dry.si.v / start.state.si.v),
    )
    books = step.balance(SITE)
    assert step.end.state.si.quality == pytest.approx(0.9, rel=1e-9)
    expected = 423.15 * (dry.si.s - start.state.si.s)
    assert books.heat_total.magnitude == pytest.approx(expected, rel=1e-7)
    assert books.verdict.status is lw.Status.reversible


@pytest.mark.parametrize("backend", BACKENDS)
@pytest.mark.parametrize("held", ["T", "s", "v", "p", "polytropic"])
def test_a_slow_path_with_bodies_that_keep_pace_loses_nothing(backend, held):
    fields = {
        "T": {"p_end": "6 bar"},
        "s": {"p_end": "20 bar"},
        "v": {"T_end": "80 degC"},
        "p": {"T_end": "80 degC"},
        "polytropic": {"p_end": "20 bar", "exponent": 1.2},
    }[held]
    step = lw.process("quasi-static-path", charge=nitrogen(backend), held=held, **fields)
    books = step.balance(SITE)
    assert books.verdict.acceptable
    # The mean temperature of the heat is that of the path, so nothing is generated.
    assert books.work_lost.magnitude == pytest.approx(0.0, abs=1e-3)


def test_rows_in_which_nothing_happens_stand_beside_one_that_fails():
    fluid = lw.Fluid("carbon dioxide", backend="coolprop")
    still = lw.Content(fluid.state(T="230 K", p="1 bar"), mass="0.1 kg")
    p_end = ["1 bar", "1 bar", "0.769 bar"]  # the last one would freeze
    books = lw.process("quasi-static-path", charge=still, held="s", p_end=p_end).balance(SITE)
    assert books.verdict.statuses.tolist() == ["reversible", "reversible", "undecided"]
    assert set(books.books.failed) == {2}


def test_one_step_is_the_sudden_expansion():
    sudden = lw.process("sudden-expansion", charge=nitrogen(), p_outer="6 bar").balance(SITE)
    stepwise = lw.process("stepwise-expansion", charge=nitrogen(), p_end="6 bar", steps=1).balance(
        SITE
    )
    assert stepwise.work_lost_si == pytest.approx(sudden.work_lost_si, rel=1e-12)


def test_stated_pressures_are_taken_one_by_one():
    stated = lw.process(
        "stepwise-expansion", charge=nitrogen(), pressures=["30 bar", "15 bar", "7.5 bar"], held="T"
    ).balance(SITE)
    even = lw.process(
        "stepwise-expansion", charge=nitrogen(), p_end="7.5 bar", steps=3, held="T"
    ).balance(SITE)
    assert stated.work_total.magnitude == pytest.approx(even.work_total.magnitude, rel=1e-9)


def test_a_sweep_of_loads_is_a_row_each_and_a_bad_row_is_named():
    sweep = lw.process(
        "sudden-compression", charge=nitrogen("cubic"), p_outer=["61 bar", "100 bar", "3000 bar"]
    ).balance(SITE)
    single = lw.process("sudden-compression", charge=nitrogen("cubic"), p_outer="100 bar").balance(
        SITE
    )
    assert sweep.shape == (3,)
    assert sweep.work_lost_si[1] == pytest.approx(single.work_lost_si, rel=1e-9)
    assert np.isnan(sweep.work_lost_si[2])
    assert sweep.verdict.rows("undecided") == (2,)
    assert "outside the range" in sweep.books.failed[2]


@pytest.mark.parametrize("backend", BACKENDS)
def test_two_charges_through_a_wall_end_at_one_temperature_and_keep_their_energy(backend):
    step = lw.process(
        "equilibration",
        first=charge("nitrogen", backend, T="400 K", p="10 bar", mass="2 kg"),
        second=charge("argon", backend, T="300 K", p="5 bar", mass="3 kg"),
        contact="heat",
    )
    books = step.balance(SITE)
    ends = list(step.solution.after.values())
    assert pytest.approx(ends[1].state.si.T, rel=1e-12) == ends[0].state.si.T
    assert 300.0 < ends[0].state.si.T < 400.0
    assert abs(books.energy_residual.magnitude) < 1e-3
    assert books.verdict.status is lw.Status.possible
    assert 0.0 < books.efficiency < 1.0


@pytest.mark.parametrize(("T", "status"), [("400 K", "possible"), ("250 K", "possible")])
def test_heat_from_one_reservoir_loses_work_up_and_down(T, status):
    """Closed form at constant volume: sigma = c (ln(T2 / T1) - 1 + T1 / T2), whole way."""
    gas = lw.Content(
        lw.Fluid("nitrogen", backend="ideal-gas", gamma=1.4).state(T="300 K", p="1 bar"),
        mass="1 mol",
    )
    step = lw.process("reservoir-contact", charge=gas, reservoir=T, held="v")
    books = step.balance(SITE)
    end = step.end.state.si.T
    sigma = 2.5 * lw.R * (math.log(end / 300.0) - 1.0 + 300.0 / end)
    assert books.entropy_generated.magnitude == pytest.approx(sigma, rel=1e-9)
    assert books.verdict.status == status


def test_a_charge_heated_beyond_its_reservoir_is_refused():
    """The entropy of the whole would rise, but plain contact does not carry heat uphill."""
    gas = nitrogen("ideal-gas")
    for T_end in ("90 degC", "10 degC"):
        step = lw.process("reservoir-contact", charge=gas, reservoir="60 degC", T_end=T_end)
        with pytest.raises(lw.ProcessError, match="is not between the start"):
            _ = step.solution


def test_a_vacuum_outside_is_no_load_and_a_load_needs_to_be_lower():
    with pytest.raises(lw.LostworkError):
        lw.process("sudden-expansion", charge=nitrogen(), p_outer="0 bar")
    step = lw.process("sudden-expansion", charge=nitrogen(), p_outer="1 mbar")
    # However thin, p_outer (v2 - v1) tends to R T2: the volume grows as the load falls.
    specific = lw.R / 0.0280134 * step.end.state.si.T
    assert -step.balance(SITE).work_total.magnitude == pytest.approx(specific, rel=1e-4)
    with pytest.raises(lw.ProcessError, match="outer pressures must"):
        _ = lw.process("sudden-expansion", charge=nitrogen(), p_outer="70 bar").solution


@pytest.mark.parametrize(
    ("kind", "fields", "said"),
    [
        ("quasi-static-path", {"held": "T"}, "exactly one of p_end, T_end and volume_ratio"),
        ("quasi-static-path", {"held": "T", "p_end": "6 bar", "T_end": "300 K"}, "exactly one"),
        ("quasi-static-path", {"held": "q", "p_end": "6 bar"}, "held"),
        ("quasi-static-path", {"held": "polytropic", "p_end": "6 bar"}, "exponent"),
        ("stepwise-expansion", {"p_end": "6 bar"}, "steps"),
        ("stepwise-expansion", {"p_end": "6 bar", "steps": 0}, "steps"),
        ("free-expansion", {}, "volume"),
        ("free-expansion", {"volume_ratio": 0.5}, "volume"),
        ("sudden-expansion", {"p_outer": "6 barg"}, "gauge"),
        ("sudden-expansion", {"p_outer": 6e5}, "p_outer"),
    ],
)
def test_what_cannot_be_run_says_which_value_to_change(kind, fields, said):
    with pytest.raises(lw.LostworkError, match=said):
        _ = lw.process(kind, charge=nitrogen("ideal-gas"), **fields).solution


def test_joined_charges_of_two_backends_are_refused():
    with pytest.raises(lw.LostworkError, match="backend"):
        _ = lw.process(
            "equilibration", first=nitrogen("ideal-gas"), second=nitrogen("coolprop")
        ).solution
