"""A case file becomes fluids, streams, charges and solved steps, whatever its order."""

from __future__ import annotations

import itertools
import pickle

import numpy as np
import pytest

import lostwork as lw

HEAD = """
[case]
title = "Let-down line"
note = "Invented."
backend = "ideal-gas"
[surroundings]
T = "15 degC"
p = "1 bar"
[fluids.air]
components = "air"
[streams.feed]
fluid = "air"
T = "20 degC"
p = "9 bar"
rate = "2 kg/s"
"""
VALVE = """
[steps.valve]
type = "throttling"
inlet = "feed"
p_out = "5 barg"
"""
TANK = """
[charges.tank]
fluid = "air"
T = "20 degC"
p = "9 bar"
volume = "2 m^3"
"""


def test_a_case_gives_streams_steps_and_an_audit():
    case = lw.Case.parse(HEAD + VALVE)
    assert case.title == "Let-down line"
    assert case.note == "Invented."
    assert case.streams["feed"].mass_si == 2.0
    assert list(case.steps) == ["valve"]
    audit = case.audit()
    assert [balance.name for balance in audit.balances] == ["valve"]
    assert audit.acceptable


def test_a_gauge_pressure_is_read_by_the_barometer_of_the_surroundings():
    case = lw.Case.parse(HEAD.replace('p = "9 bar"', 'p = "8 barg"') + VALVE)
    assert case.streams["feed"].state.si.p == pytest.approx(9e5)
    assert case.steps["valve"].outlet.state.si.p == pytest.approx(6e5)
    thin_air = HEAD.replace('p = "1 bar"', 'p = "0.8 bar"') + VALVE
    assert lw.Case.parse(thin_air).steps["valve"].outlet.state.si.p == pytest.approx(5.8e5)


def test_a_pressure_difference_is_no_gauge_pressure():
    pipe = '[steps.line]\ntype = "pipe"\ninlet = "feed"\npressure_drop = "1 barg"\n'
    with pytest.raises(lw.CaseError, match=r"\[steps.line\] pressure_drop"):
        _ = lw.Case.parse(HEAD + pipe).steps


def test_the_order_of_the_steps_in_the_file_does_not_matter():
    second = '[steps.second]\ntype = "throttling"\ninlet = "valve"\np_out = "2 bar"\n'
    forward, backward = (lw.Case.parse(HEAD + text) for text in (VALVE + second, second + VALVE))
    assert list(backward.steps) == ["second", "valve"]
    assert backward.audit().work_lost_si == pytest.approx(forward.audit().work_lost_si)


def test_a_loss_from_file_is_that_of_the_same_step_in_python():
    air = lw.Fluid("air", backend="ideal-gas")
    feed = lw.Stream(air.state(T="20 degC", p="9 bar"), rate="2 kg/s")
    step = lw.process("throttling", inlet=feed, p_out="6 bar")
    lost = step.balance(lw.Surroundings(T="15 degC", p="1 bar")).work_lost_si
    assert lw.Case.parse(HEAD + VALVE).audit().work_lost_si == pytest.approx(lost, rel=1e-12)


def test_a_list_of_values_gives_a_row_for_each():
    text = HEAD.replace('T = "20 degC"', 'T = ["20 degC", "40 degC", "60 degC"]') + VALVE
    audit = lw.Case.parse(text).audit()
    assert audit.balances[0].shape == (3,)
    # An ideal gas loses R T0 ln(p1/p2) in a valve, whatever its temperature.
    assert np.ptp(audit.work_lost_si) < 1e-6 * np.mean(audit.work_lost_si)


def test_a_charge_is_taken_by_its_volume():
    case = lw.Case.parse(HEAD + VALVE + TANK)
    tank = case.charges["tank"]
    assert tank.volume.magnitude == pytest.approx(2.0)


def test_a_charge_given_by_amount_and_by_mass_is_one():
    by_amount = TANK.replace('volume = "2 m^3"', 'amount = "100 mol"')
    charge = lw.Case.parse(HEAD + VALVE + by_amount).charges["tank"]
    molar_mass = charge.state.fluid.molar_mass_si
    assert charge.mass_si == pytest.approx(100.0 * molar_mass)


def test_a_step_with_named_outlets_is_referred_to_by_step_and_outlet():
    tee = '[steps.tee]\ntype = "splitting"\ninlet = "valve"\nfractions = {a = 0.25, b = 0.75}\n'
    end = '[steps.end]\ntype = "throttling"\ninlet = "tee.b"\np_out = "2 bar"\n'
    case = lw.Case.parse(HEAD + VALVE + tee + end)
    assert case.steps["end"].outlet.mass_si == pytest.approx(1.5)
    assert {link.name for link in case.audit().links} == {"valve.outlet", "tee.b"}


def test_streams_in_lists_and_tables_are_resolved():
    text = """
[streams.out]
fluid = "air"
T = "20 degC"
p = "8 bar"
[steps.run]
type = "as-measured"
inflows = ["feed"]
outflows = {away = "out"}
heat = [{amount = "unknown", at = "15 degC"}]
"""
    balance = lw.Case.parse(HEAD + text).audit().balances[0]
    assert balance.outflows[0].name == "out"
    assert balance.outflows[0].mass_si == pytest.approx(2.0)
    assert balance.heat[0].si == pytest.approx(0.0, abs=1e-6)


def test_the_closing_of_the_case_holds_for_steps_that_state_none():
    measured = """
[streams.out]
fluid = "air"
T = "20 degC"
p = "8 bar"
rate = "1.99 kg/s"
[steps.run]
type = "as-measured"
inflows = ["feed"]
outflows = {away = "out"}
"""
    strict = lw.Case.parse(HEAD + measured).audit()
    assert strict.status is lw.Status.unbalanced
    tolerant = HEAD.replace('backend = "ideal-gas"', 'backend = "ideal-gas"\nclosing = "1 %"')
    assert lw.Case.parse(tolerant + measured).audit().acceptable
    own = measured + 'closing = "0.01 %"\n'
    assert lw.Case.parse(tolerant + own).audit().status is lw.Status.unbalanced


LOOP = """
[steps.blower]
type = "compression"
inlet = "feed"
p_out = "9.5 bar"
isentropic_efficiency = "70 %"
[steps.cooler]
type = "cooling"
inlet = "blower"
T_out = "20 degC"
pressure_drop = "0.5 bar"
at = "15 degC"
"""


def test_a_loop_that_comes_back_to_its_stated_state_closes():
    case = HEAD.replace('rate = "2 kg/s"', 'rate = "2 kg/s"\ncloses = "cooler"')
    audit = lw.Case.parse(case + LOOP).audit()
    assert audit.acceptable
    assert ("cooler", "blower") in {(link.leaves, link.enters) for link in audit.links}
    assert not audit.whole.inflows
    assert not audit.whole.outflows
    assert audit.whole.heat_total.magnitude == pytest.approx(-audit.whole.work_total.magnitude)


def test_a_loop_that_comes_back_warmer_than_stated_is_told_and_within_the_agreement_borne():
    case = HEAD.replace('rate = "2 kg/s"', 'rate = "2 kg/s"\ncloses = "cooler.outlet"')
    warm = LOOP.replace('T_out = "20 degC"', 'T_out = "20.5 degC"')
    audit = lw.Case.parse(case + warm).audit()
    assert audit.status is lw.Status.unbalanced
    (told,) = [link.mismatch for link in audit.links if link.mismatch]
    assert "h is 50" in told
    assert "J/kg less where it enters than where it leaves" in told
    borne = case.replace("[case]", '[case]\nagreement = "1 %"')
    assert lw.Case.parse(borne + warm).audit().acceptable


def test_a_stream_that_enters_no_step_is_remarked():
    findings = lw.Case.parse(HEAD + VALVE + TANK).audit().findings
    assert any("'tank' is stated and enters no step" in finding.text for finding in findings)


def test_another_backend_is_one_line():
    case = lw.Case.parse(HEAD + VALVE)
    other = case.with_backend("cubic")
    assert {fluid.backend for fluid in other.fluids.values()} == {"cubic"}
    assert {fluid.backend for fluid in case.fluids.values()} == {"ideal-gas"}
    written = lw.Case.parse(HEAD.replace('"ideal-gas"', '"cubic"') + VALVE)
    assert written.audit().work_lost_si == pytest.approx(other.audit().work_lost_si, rel=1e-12)


def test_options_of_one_backend_are_left_out_under_another():
    text = HEAD.replace(
        'components = "air"', 'components = "air"\n[fluids.air.options.cubic]\neos = "SRK"\n'
    )
    case = lw.Case.parse(text + VALVE)
    assert dict(case.fluids["air"].options) == {}
    assert dict(case.with_backend("cubic").fluids["air"].options) == {"eos": "SRK"}


def test_plain_options_belong_to_the_backend_the_file_states():
    text = HEAD.replace('components = "air"', 'components = "air"\noptions = {cp = "1005 J/kg/K"}')
    case = lw.Case.parse(text + VALVE)
    assert dict(case.fluids["air"].options) == {"cp": "1005 J/kg/K"}
    assert dict(case.with_backend("cubic").fluids["air"].options) == {}


def test_a_fluid_may_name_what_to_take_instead_of_a_backend():
    text = HEAD.replace(
        'components = "air"', 'components = "air"\ninstead_of = {cubic = "ideal-gas"}'
    )
    assert lw.Case.parse(text + VALVE).with_backend("cubic").fluids["air"].backend == "ideal-gas"


def test_a_case_cannot_be_changed_and_pickles():
    case = lw.Case.parse(HEAD + VALVE, name="line.toml")
    with pytest.raises(AttributeError):
        case.file = "other.toml"
    again = pickle.loads(pickle.dumps(case))
    assert again.file == "line.toml"
    assert again.audit().work_lost_si == case.audit().work_lost_si


def test_progress_is_told_of_every_fluid_and_step_once():
    told = []
    lw.Case.parse(HEAD + VALVE).audit(lambda done, total, what: told.append((done, total, what)))
    assert told == [(0, 2, "fluid air"), (1, 2, "step valve")]


def test_an_error_inside_a_step_is_the_cause_of_the_error_of_the_case():
    with pytest.raises(lw.CaseError) as raised:
        lw.Case.parse(HEAD + VALVE.replace("5 barg", "20 bar")).audit()
    assert isinstance(raised.value.__cause__, lw.ProcessError)
    assert raised.value.problems[0][:2] == ("steps.valve", "p_out")


def test_what_hangs_on_a_step_that_failed_is_not_reported_too():
    second = '[steps.second]\ntype = "throttling"\ninlet = "valve"\np_out = "2 bar"\n'
    with pytest.raises(lw.CaseError) as raised:
        lw.Case.parse(HEAD + VALVE.replace("5 barg", "20 bar") + second).audit()
    assert [table for table, _, _ in raised.value.problems] == ["steps.valve"]


def test_a_circle_names_the_steps_in_their_order():
    text = "".join(
        f'[steps.{name}]\ntype = "throttling"\ninlet = "{source}"\np_out = "2 bar"\n'
        for name, source in (("a", "c"), ("b", "a"), ("c", "b"))
    )
    with pytest.raises(lw.CircularReference) as raised:
        lw.Case.parse(HEAD + text)
    circle = raised.value.circle
    assert circle[0] == circle[-1]
    feeds = set(itertools.pairwise(circle))
    assert feeds == {("a", "b"), ("b", "c"), ("c", "a")}


def test_a_chain_of_a_thousand_steps_is_solved():
    steps = "".join(
        f'[steps.s{n}]\ntype = "throttling"\n'
        f'inlet = "{"feed" if n == 0 else f"s{n - 1}"}"\np_out = "{9.0 - n / 200.0} bar"\n'
        for n in reversed(range(1000))
    )
    audit = lw.Case.parse(HEAD + steps).audit()
    assert len(audit.links) == 999
    whole = audit.whole
    assert whole is not None
    assert whole.work_lost_si == pytest.approx(audit.work_lost_si, rel=1e-9)


def test_what_a_backend_remarks_of_two_fluids_alike_is_said_once():
    text = HEAD.replace('"ideal-gas"', '"cubic"').replace(
        "[streams.feed]", '[fluids.blast]\ncomponents = "air"\n[streams.feed]'
    )
    findings = lw.Case.parse(text + VALVE).audit().findings
    solids = [finding for finding in findings if "Solids" in finding.text]
    assert [finding.check for finding in solids] == ["fluid air, blast"]
