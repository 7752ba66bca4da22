"""Charges let down or pushed together at once and in steps, against closed forms and textbooks.

Closed forms of the ideal gas of constant heat capacity: a step against the outer pressure p_o does
p_o (V2 - V1); n R T ln(p1 / p2) is the work of the slow isothermal path; adiabatic and sudden,
T2 / T1 = (1 + (gamma - 1) p_o / p1) / gamma.  The numbers were worked out by hand from these for
1 mol, R = 8.31446261815324 J/mol/K (SI 2019), and checked by quadrature.
"""

from __future__ import annotations

import math

import pytest

import lostwork as lw

R, T = 8.31446261815324, 300.0
SITE = lw.Surroundings(T="300 K", p="1 bar")
GAS = lw.Fluid("nitrogen", backend="ideal-gas", gamma=1.4)


def charge(p: str, fluid: lw.Fluid = GAS) -> lw.Content:
    return lw.Content(fluid.state(T="300 K", p=p), mass="1 mol")


def balance(kind: str, start: str, **fields: object) -> lw.Balance:
    return lw.process(kind, charge=charge(start), **fields).balance(SITE)


def test_a_sudden_isothermal_expansion_gives_the_work_against_the_load_only():
    step = balance("sudden-expansion", "10 bar", p_outer="1 bar", held="T")
    assert -step.work_total.magnitude == pytest.approx(2244.904906901375, rel=1e-9)
    assert step.entropy_generated.magnitude == pytest.approx(11.66174132447798, rel=1e-9)
    assert step.exergy_destroyed.magnitude == pytest.approx(3498.5223973433945, rel=1e-9)
    assert -step.work_reversible.magnitude == pytest.approx(5743.427304244769, rel=1e-9)
    # The load is the atmosphere itself: it takes all the work there is.
    assert step.work_useful.magnitude == pytest.approx(0.0, abs=1e-6)


def test_a_sudden_isothermal_compression_takes_four_times_the_reversible_work():
    step = balance("sudden-compression", "1 bar", p_outer="10 bar", held="T")
    assert step.work_total.magnitude == pytest.approx(22449.04906901375, rel=1e-9)
    assert step.work_reversible.magnitude == pytest.approx(5743.427304244769, rel=1e-9)
    assert step.heat_total.magnitude == pytest.approx(-22449.04906901375, rel=1e-9)
    assert step.entropy_generated.magnitude == pytest.approx(55.68540588256326, rel=1e-9)


def test_a_sudden_adiabatic_expansion_ends_warmer_than_the_isentrope():
    step = lw.process("sudden-expansion", charge=charge("10 bar"), p_outer="1 bar")
    books = step.balance(SITE)
    assert pytest.approx(222.85714285714286, rel=1e-9) == step.end.state.si.T
    assert -books.work_total.magnitude == pytest.approx(1603.5035049295536, rel=1e-9)
    assert books.entropy_generated.magnitude == pytest.approx(10.49455430059463, rel=1e-9)
    assert books.exergy_destroyed.magnitude == pytest.approx(3148.3662901783887, rel=1e-9)
    assert -books.work_reversible.magnitude == pytest.approx(4751.869795107942, rel=1e-9)


def test_the_deficit_against_the_isentrope_is_not_the_work_lost():
    start = GAS.state(T="300 K", p="10 bar")
    slow = lw.Path.quasi_static(start, held="s", until={"p": "1 bar"})
    jump = lw.Path.stepwise(start, p_end="1 bar", steps=1)
    molar = GAS.molar_mass.magnitude
    assert pytest.approx(155.38424037693636, rel=1e-9) == slow.end.si.T
    assert -slow.work.magnitude * molar == pytest.approx(3006.0058184544937, rel=1e-9)
    short = jump.shortfall(slow)
    assert short.work.magnitude * molar == pytest.approx(1402.50231352494, rel=1e-9)
    assert short.compared == "same end pressure"


def test_a_sudden_adiabatic_compression_heats_far_beyond_the_isentrope():
    step = lw.process("sudden-compression", charge=charge("1 bar"), p_outer="10 bar")
    books = step.balance(SITE)
    assert pytest.approx(1071.4285714285713, rel=1e-9) == step.end.state.si.T
    assert books.work_total.magnitude == pytest.approx(16035.035049295535, rel=1e-9)
    assert books.entropy_generated.magnitude == pytest.approx(17.899331659268608, rel=1e-9)
    assert books.work_reversible.magnitude == pytest.approx(10665.235551514954, rel=1e-9)


STEPS_HELD_AT_T = {
    # steps: work by equal decrements and by equal ratios, J; entropy generated likewise, J/K
    1: (2244.9049069013745, 2244.904906901375, 11.66174132447798, 11.66174132447798),
    2: (3163.2750960883004, 3411.1192072704785, 8.600507360521561, 7.774360323247634),
    5: (4277.600663583826, 4602.587045735155, 4.886088802203144, 3.802800861698713),
    10: (4889.438881643586, 5130.150611983648, 2.846628075337278, 2.044255640870405),
    100: (5644.072066900425, 5677.808263445823, 0.3311841244811477, 0.21873013599648453),
}


@pytest.mark.parametrize("steps", STEPS_HELD_AT_T)
def test_steps_in_a_bath_give_the_harmonic_sums(steps):
    start, molar = GAS.state(T="300 K", p="10 bar"), GAS.molar_mass.magnitude
    even, ratio, even_s, ratio_s = STEPS_HELD_AT_T[steps]
    for spacing, work, entropy in (("decrement", even, even_s), ("ratio", ratio, ratio_s)):
        path = lw.Path.stepwise(start, p_end="1 bar", steps=steps, spacing=spacing, held="T")
        assert -path.work.magnitude * molar == pytest.approx(work, rel=1e-9)
        assert path.entropy_generated.magnitude * molar == pytest.approx(entropy, rel=1e-8)


STEPS_WITHOUT_HEAT = {
    1: (222.85714285714286, 222.85714285714286),
    2: (200.3153988868275, 194.23197134900056),
    5: (177.8504433361897, 171.8568263777424),
    10: (167.52846970900495, 163.7229254436537),
    100: (156.66432090243947, 156.2243742908852),
}


@pytest.mark.parametrize("steps", STEPS_WITHOUT_HEAT)
def test_adiabatic_steps_end_at_the_temperatures_of_their_energy_balances(steps):
    start = GAS.state(T="300 K", p="10 bar")
    for spacing, end in zip(("decrement", "ratio"), STEPS_WITHOUT_HEAT[steps], strict=True):
        path = lw.Path.stepwise(start, p_end="1 bar", steps=steps, spacing=spacing)
        assert pytest.approx(end, rel=1e-9) == path.end.si.T


def test_the_loss_times_the_number_of_steps_has_its_limit():
    """For n steps n sigma / R tends to (ln r)^2 / 2 (ratios), (r - 1)^2 / (2 r) (decrements)."""
    start, molar, steps = GAS.state(T="300 K", p="10 bar"), GAS.molar_mass.magnitude, 4000
    for spacing, limit in (("ratio", 2.6509490552391997), ("decrement", 4.05)):
        path = lw.Path.stepwise(start, p_end="1 bar", steps=steps, spacing=spacing, held="T")
        product = steps * path.entropy_generated.magnitude * molar / R
        assert product == pytest.approx(limit, rel=2e-3)
    assert 0.5 * math.log(10.0) ** 2 == pytest.approx(2.6509490552391997, rel=1e-12)


def test_two_gases_mix_with_their_mixing_entropy_and_one_gas_with_itself_without():
    """-R sum n ln x = 18.702 J/K for 1 and 3 mol at 298.15 K (Gibbs)."""

    def joined(first: str, second: str) -> lw.Balance:
        one, other = (
            lw.Content(
                lw.Fluid(name, backend="ideal-gas").state(T="298.15 K", p="1 bar"), mass=amount
            )
            for name, amount in ((first, "1 mol"), (second, "3 mol"))
        )
        step = lw.process("equilibration", first=one, second=other, contact="joined")
        return step.balance(lw.Surroundings(T="298.15 K", p="1 bar"))

    different, same = joined("nitrogen", "argon"), joined("argon", "argon")
    assert different.entropy_generated.magnitude == pytest.approx(18.70205815522751, rel=1e-7)
    assert different.work_lost.magnitude == pytest.approx(5576.0186389810815, rel=1e-7)
    assert same.verdict.status is lw.Status.reversible


@pytest.mark.parametrize("backend", ["ideal-gas", "coolprop", "cubic"])
def test_nitrogen_and_oxygen_from_two_tanks_end_where_the_book_says(backend):
    """Moran & Shapiro, Fundamentals of Engineering Thermodynamics, ch. 12 (from memory): 261 K,
    1.62 atm, 5.0 kJ/K; by exact arithmetic with constant cv 260.58 K, 1.611 atm, 4.947 kJ/K.
    """
    site = lw.Surroundings(T="298.15 K", p="1 atm")

    def tank(name: str, T: str, p: str, amount: str) -> lw.Content:
        return lw.Content(lw.Fluid(name, backend=backend).state(T=T, p=p), mass=amount)

    step = lw.process(
        "equilibration",
        first=tank("nitrogen", "250 K", "2 atm", "0.79 kmol"),
        second=tank("oxygen", "300 K", "1 atm", "0.21 kmol"),
        contact="joined",
    )
    books = step.balance(site)
    assert pytest.approx(260.58, abs=0.5) == step.end.state.si.T
    assert step.end.state.si.p / 101325.0 == pytest.approx(1.611, rel=5e-3)
    assert books.entropy_generated.to("kJ/K").magnitude == pytest.approx(4.947, rel=5e-3)


def test_combustion_gases_in_a_cylinder_have_the_exergy_of_the_book():
    """Moran & Shapiro, ch. 7 (from memory): 368.91 kJ/kg at 867 degC and 7 bar, air as ideal gas.

    The book's air table takes a molar mass of 28.97 and heat capacities of its own; they differ
    from ours by some tenths of a per cent.
    """
    air = lw.Fluid("air", backend="ideal-gas")
    site = lw.Surroundings(T="300 K", p="1.013 bar")
    gas = air.state(T="1140 K", p="7 bar")
    assert gas.exergy(site, closed=True).to("kJ/kg").magnitude == pytest.approx(368.91, rel=5e-3)
    at_rest = air.state(T="300 K", p="1.013 bar")
    displaced = 101300.0 * (gas.si.v - at_rest.si.v) / 1e3
    assert displaced == pytest.approx(-38.75, rel=2e-3)


@pytest.fixture(scope="module")
def water():
    return lw.Fluid("water", backend="coolprop")


def test_water_boiled_reversibly_and_by_stirring_as_in_the_book(water):
    """Moran & Shapiro, ch. 6 and 7 (from memory): W 186.38, Q 2114.1 kJ/kg; stirred -1927.82
    kJ/kg, 4.9961 kJ/kg/K, 1464.61 kJ/kg; steam tables of the book against IAPWS-95: 0.03 %.
    """
    site = lw.Surroundings(T="293.15 K", p="1 bar")
    wet, dry = (lw.Content(water.state(T="150 degC", quality=x), mass="1 kg") for x in (0.0, 1.0))
    push = -wet.state.si.p * (dry.state.si.v - wet.state.si.v)
    boiled = lw.Balance(
        name="boiled",
        before=wet,
        after=dry,
        heat=[lw.Heat.unknown(at="150 degC")],
        work=[lw.Work(lw.quantity(push, "J"))],
        surroundings=site,
    )
    assert -boiled.work_total.to("kJ").magnitude == pytest.approx(186.38, rel=1e-3)
    assert boiled.heat_total.to("kJ").magnitude == pytest.approx(2114.1, rel=1e-3)
    assert boiled.verdict.status is lw.Status.reversible
    stirred = lw.Balance(
        name="stirred", before=wet, after=dry, work=[lw.Work.unknown()], surroundings=site
    )
    assert stirred.work_total.to("kJ").magnitude == pytest.approx(1927.82, rel=1e-3)
    assert stirred.entropy_generated.to("kJ/K").magnitude == pytest.approx(4.9961, rel=1e-3)
    assert stirred.exergy_destroyed.to("kJ").magnitude == pytest.approx(1464.61, rel=1e-3)


def test_steam_expanding_in_a_cylinder_with_a_heat_loss_as_in_the_book(water):
    """Cengel & Boles, Thermodynamics: An Engineering Approach, ch. 8 (from memory): exergies 35.0
    and 25.4 kJ, work 8.8 kJ of which 5.3 useful, 4.3 kJ destroyed.
    """
    site = lw.Surroundings(T="25 degC", p="100 kPa")
    before = lw.Content(water.state(T="300 degC", p="1 MPa"), mass="0.05 kg")
    after = lw.Content(water.state(T="150 degC", p="200 kPa"), mass="0.05 kg")
    step = lw.Balance(
        name="expansion",
        before=before,
        after=after,
        heat=[lw.Heat("-2 kJ", at="25 degC")],
        work=[lw.Work.unknown()],
        surroundings=site,
    )
    assert before.exergy(site).to("kJ").magnitude == pytest.approx(35.0, abs=0.05)
    assert after.exergy(site).to("kJ").magnitude == pytest.approx(25.4, abs=0.1)
    assert -step.work_total.to("kJ").magnitude == pytest.approx(8.8, abs=0.05)
    assert -step.work_useful.to("kJ").magnitude == pytest.approx(5.3, abs=0.05)
    assert step.exergy_destroyed.to("kJ").magnitude == pytest.approx(4.3, abs=0.05)
