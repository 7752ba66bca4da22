"""The books of a step: every status, every unknown, both routes, rows, and calls that are wrong."""

from __future__ import annotations

import pickle

import numpy as np
import pytest

import lostwork as lw

SITE = lw.Surroundings(T="15 degC", p="1 bar")
AIR = lw.Fluid("air", backend="ideal-gas")


def given(h: object, s: object, **more: object) -> lw.GivenState:
    return lw.GivenState(h=h, s=s, **more)


def step(s_out: object = "6.95 kJ/kg/K", work: object = "-342 kW", **more: object) -> lw.Balance:
    """An expander of 2 kg/s that gives 342 kW."""
    fields = {
        "name": "expander",
        "inflows": [lw.Stream(given("612 kJ/kg", "6.9 kJ/kg/K"), rate="2 kg/s")],
        "outflows": [lw.Stream(given("441 kJ/kg", s_out), rate="2 kg/s")],
        "work": work if isinstance(work, list) else [lw.Work(work)],
        "surroundings": SITE,
    }
    return lw.Balance(**{**fields, **more})


@pytest.mark.parametrize(
    ("s_out", "work", "status"),
    [
        ("6.95 kJ/kg/K", "-342 kW", "possible"),
        ("6.90 kJ/kg/K", "-342 kW", "reversible"),
        ("6.85 kJ/kg/K", "-342 kW", "impossible"),
        ("6.95 kJ/kg/K", "-300 kW", "unbalanced"),
    ],
)
def test_a_step_has_the_status_its_entropy_and_energy_give_it(s_out, work, status):
    assert step(s_out, work).verdict.status == status


def test_errors_of_instruments_leave_a_small_violation_undecided():
    measured = step("6.8995 kJ/kg/K", "-341 kW", closing="1 %")
    assert measured.verdict.status is lw.Status.undecided
    assert step("6.8995 kJ/kg/K").verdict.status is lw.Status.impossible


def test_what_cannot_be_raises_by_its_cause():
    with pytest.raises(lw.SecondLawViolation, match="expander"):
        step("6.85 kJ/kg/K").require_possible()
    with pytest.raises(lw.BalanceNotClosed, match="energy does not close"):
        step(work="-300 kW").require_possible()
    assert step().require_possible().name == "expander"


def test_the_two_routes_to_the_loss_are_one_number():
    balance = step()
    assert balance.work_lost.to("kW").magnitude == pytest.approx(288.15 * 0.1)
    assert balance.exergy_destroyed.magnitude == pytest.approx(balance.work_lost.magnitude)
    assert balance.work_reversible.to("kW").magnitude == pytest.approx(-342.0 - 28.815)


def test_reversible_work_of_a_compressor_is_less_than_it_takes():
    inlet, outlet = AIR.state(T="20 degC", p="1 bar"), AIR.state(T="200 degC", p="4 bar")
    compressor = lw.Balance(
        name="compressor",
        inflows=[lw.Stream(inlet, rate="1 kg/s")],
        outflows=[lw.Stream(outlet, rate="1 kg/s")],
        work=[lw.Work.unknown()],
        surroundings=SITE,
    )
    taken, best = compressor.work_total.magnitude, compressor.work_reversible.magnitude
    assert 0.0 < best < taken
    assert taken - best == pytest.approx(compressor.work_lost.magnitude)


def test_the_energy_balance_finds_one_heat_or_one_work_and_no_more():
    assert step(work=[lw.Work.unknown()]).work_total.to("kW").magnitude == pytest.approx(-342.0)
    found = step(heat=[lw.Heat.unknown(at="15 degC")], work=[lw.Work("-300 kW")])
    assert found.heat_total.to("kW").magnitude == pytest.approx(-42.0)
    with pytest.raises(lw.IllPosed, match="more than one"):
        step(heat=[lw.Heat.unknown(at="15 degC")], work=[lw.Work.unknown()])


def test_the_mass_balance_finds_one_rate_and_refuses_one_that_flows_backwards():
    cold, warm = given("100 kJ/kg", "1 kJ/kg/K"), given("200 kJ/kg", "1.4 kJ/kg/K")

    def mixer(outflow: object) -> lw.Balance:
        return lw.Balance(
            name="mixer",
            inflows=[lw.Stream(cold, rate="2 kg/s"), lw.Stream(warm)],
            outflows=[lw.Stream(given("150 kJ/kg", "1.3 kJ/kg/K"), rate=outflow)],
            surroundings=SITE,
        )

    assert mixer("5 kg/s").inflows[1].mass_si == pytest.approx(3.0)
    with pytest.raises(lw.IllPosed, match="backwards"):
        mixer("1 kg/s")
    with pytest.raises(lw.IllPosed):
        lw.Balance(
            name="x", inflows=[lw.Stream(cold)], outflows=[lw.Stream(warm)], surroundings=SITE
        )


def test_kinetic_and_potential_energy_are_in_energy_and_exergy():
    state = AIR.state(T="20 degC", p="1 bar")
    fall = lw.Balance(
        name="water wheel of air",
        inflows=[lw.Stream(state, rate="1 kg/s", velocity="30 m/s", elevation="100 m")],
        outflows=[lw.Stream(state, rate="1 kg/s")],
        work=[lw.Work.unknown()],
        surroundings=SITE,
    )
    assert -fall.work_total.magnitude == pytest.approx(450.0 + 980.665)
    assert fall.verdict.status is lw.Status.reversible


def test_a_transient_counts_what_is_stored():
    before = lw.Content(AIR.state(T="20 degC", p="1 bar"), mass="1 kg")
    after = lw.Content(AIR.state(T="20 degC", p="2 bar"), mass="2 kg")
    line = lw.Stream(AIR.state(T="20 degC", p="3 bar"), mass="1 kg")
    filling = lw.Balance(
        name="filling",
        inflows=[line],
        before=before,
        after=after,
        heat=[lw.Heat.unknown(at="20 degC")],
        surroundings=SITE,
    )
    assert not filling.per_time
    assert filling.heat_total.magnitude < 0.0
    assert filling.verdict.status is lw.Status.possible
    assert filling.work_lost.check("[energy]")


def test_an_array_is_judged_row_by_row_and_the_gravest_speaks():
    outlet = given(
        lw.quantity(np.full(3, 441e3), "J/kg"),
        lw.quantity(np.array([6950.0, 6900.0, 6850.0]), "J/kg/K"),
    )
    rows = step(outflows=[lw.Stream(outlet, rate="2 kg/s")])
    assert rows.shape == (3,)
    assert rows.verdict.statuses.tolist() == ["possible", "reversible", "impossible"]
    assert rows.verdict.status is lw.Status.impossible
    assert rows.verdict.rows("impossible") == (2,)
    with pytest.raises(lw.SecondLawViolation, match="row 2"):
        rows.require_possible()


def test_lists_of_two_lengths_are_told_by_name():
    outlet = given(lw.quantity(np.full(3, 441e3), "J/kg"), "6.95 kJ/kg/K")
    with pytest.raises(lw.ShapesDiffer, match="outflow 1 has 3") as refused:
        step(
            outflows=[lw.Stream(outlet, rate="2 kg/s")],
            work=[lw.Work(lw.quantity(np.array([-342e3, -343e3]), "W"))],
        )
    assert dict(refused.value.shapes)["work 1"] == (2,)


@pytest.mark.parametrize(
    "wrong",
    [
        {"inflows": lw.Stream(given("612 kJ/kg", "6.9 kJ/kg/K"), rate="2 kg/s")},
        {"work": ["-342 kW"]},
        {"heat": 3.0},
        {"outflows": [None]},
        {"inflows": [], "outflows": [], "work": []},
        {"inflows": [lw.Stream(given("612 kJ/kg", "6.9 kJ/kg/K"), mass="2 kg")]},
        {"work": [lw.Work(lw.quantity(np.empty(0), "W"))]},
        {"closing": "x"},
        {"closing": "1 bar"},
    ],
    ids=str,
)
def test_a_call_that_is_wrong_is_refused_by_our_own_error(wrong):
    with pytest.raises(lw.LostworkError):
        _ = step(**wrong).verdict


@pytest.mark.parametrize("make", [
    lambda: lw.Stream(given("1 kJ/kg", "1 J/kg/K"), rate="-1 kg/s"),
    lambda: lw.Stream(given("1 kJ/kg", "1 J/kg/K"), rate=2.0),
    lambda: lw.Stream(given("1 kJ/kg", "1 J/kg/K"), rate="nan kg/s"),
    lambda: lw.Stream("air", rate="1 kg/s"),
    lambda: lw.Heat("3 kW", at="-300 degC"),
    lambda: lw.Heat("3 kW", at="10 delta_degC"),
    lambda: lw.Heat("3 bar", at="10 degC"),
    lambda: lw.Work(3.0),
    lambda: lw.Surroundings(T="0 K", p="1 bar"),
    lambda: lw.Surroundings(T="15 degC", p="0.5 barg"),
    lambda: lw.Content(AIR.state(T="300 K", p="1 bar"), mass="-1 kg"),
])  # fmt: skip
def test_matter_and_transfers_that_cannot_be_are_refused(make):
    with pytest.raises(lw.LostworkError):
        make()


def test_heat_and_work_compare_hash_and_pickle():
    heat, work = lw.Heat("3 kW", at="80 degC"), lw.Work("-2 kW", name="shaft")
    assert heat == lw.Heat("3000 W", at="353.15 K")
    assert len({heat, lw.Heat("3 kW", at="80 degC")}) == 1
    for thing in (heat, work):
        assert pickle.loads(pickle.dumps(thing)) == thing
    with pytest.raises(AttributeError):
        heat.si = 1.0


def test_a_balance_survives_a_pickle_and_prints_its_verdict():
    balance = step()
    again = pickle.loads(pickle.dumps(balance))
    assert again.verdict.status is balance.verdict.status
    assert again.work_lost_si == balance.work_lost_si
    assert "possible" in repr(balance)
    assert "expander" in repr(balance)


def test_an_audit_sums_its_steps_and_names_what_two_steps_share():
    gas = lw.Stream(AIR.state(T="20 degC", p="6 bar"), rate="1 kg/s", name="gas")
    first = lw.process("throttling", name="first", inlet=gas, p_out="4 bar")
    second = lw.process("throttling", name="second", inlet=first.outlet, p_out="1 bar")
    audit = lw.Audit([second.balance(SITE), first.balance(SITE)])
    assert [ranked.name for ranked in audit.ranking()] == ["second", "first"]
    assert sum(ranked.share for ranked in audit.ranking()) == pytest.approx(1.0)
    assert audit.whole.work_lost_si == pytest.approx(audit.work_lost_si, rel=1e-9)
    assert [(link.leaves, link.enters) for link in audit.links] == [("first", "second")]
    with pytest.raises(lw.AuditError, match="two balances are called"):
        lw.Audit([first.balance(SITE), first.balance(SITE)])
    with pytest.raises(lw.AuditError, match="surroundings"):
        lw.Audit([first.balance(SITE), second.balance(lw.Surroundings(T="0 degC", p="1 bar"))])
    with pytest.raises(lw.AuditError, match="at least one"):
        lw.Audit([])


def test_a_loop_is_joined_by_the_names_of_its_ends():
    gas = lw.Stream(AIR.state(T="20 degC", p="6 bar"), rate="1 kg/s", name="gas")
    blower = lw.process(
        "compression", name="blower", inlet=gas, p_out="7 bar", isentropic_efficiency=0.7
    )
    cooler = lw.process(
        "cooling", name="cooler", inlet=blower.outlet, T_out="20 degC", p_out="6 bar", at="15 degC"
    )
    balances = [blower.balance(SITE), cooler.balance(SITE)]
    audit = lw.Audit(balances, joined={"cooler.outlet": "gas"})
    assert audit.acceptable
    assert not audit.whole.inflows
    with pytest.raises(lw.AuditError, match="joined"):
        lw.Audit(balances, joined={"cooler.drain": "gas"})
    with pytest.raises(lw.OutOfLimits, match="agreement"):
        lw.Audit(balances, agreement="200 %")
