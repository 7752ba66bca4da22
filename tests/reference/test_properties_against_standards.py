"""States against standards and tables: water, formation data, departures, cold fluids, CO2.

IAPWS R6-95 (2018), tables 7 and 8, and IAPWS R7-97 (2012), tables 5 and 15, from memory and checked
with the `iapws` library; CODATA Key Values (Cox, Wagman & Medvedev 1989); Smith, Van Ness & Abbott,
ch. 6; Barron, Cryogenic Systems, 2nd ed., table 3.1 (from memory).
"""

from __future__ import annotations

import math

import iapws
import pytest

import lostwork as lw

WATER = lw.Fluid("water", backend="coolprop")


def on_the_zero_of_the_standard(state: lw.State) -> tuple[float, float]:
    """Enthalpy and entropy counted from the liquid at the triple point, where u = s = 0, kJ."""
    triple = WATER.state(T="273.16 K", quality=0.0).si
    si = state.si
    return (si.h - triple.u) / 1e3, (si.s - triple.s) / 1e3


IAPWS_95 = [
    # T (K), density (kg/m3), p (MPa), s (kJ/kg/K)
    (300.0, 996.556, 0.0992418352, 0.393062643),
    (300.0, 1005.308, 20.0022515, 0.387405401),
    (500.0, 0.435, 0.0999679423, 7.94488271),
    (647.0, 358.0, 22.0384756, 4.32092307),
]


@pytest.mark.parametrize(("T", "density", "p", "s"), IAPWS_95)
def test_water_by_temperature_and_density_is_that_of_iapws_95(T, density, p, s):
    state = WATER.state(T=lw.quantity(T, "K"), rho=lw.quantity(density, "kg/m^3"))
    assert state.si.p / 1e6 == pytest.approx(p, rel=2e-7)
    assert on_the_zero_of_the_standard(state)[1] == pytest.approx(s, rel=1e-7)


SATURATION = [
    # T (K), p (MPa), density, h and s of the liquid, then of the vapour
    (
        275.0,
        0.698451167e-3,
        999.887406,
        7.759722016,
        0.02830946696,
        0.00550664919,
        2504.289953,
        9.10660121,
    ),
    (450.0, 0.932203564, 890.34125, 749.161585, 2.10865845, 4.8120036, 2774.41078, 6.60921221),
    (625.0, 16.9082693, 567.090385, 1686.26976, 3.80194683, 118.29028, 2550.71625, 5.18506121),
]


@pytest.mark.parametrize("row", SATURATION, ids=lambda row: f"{row[0]} K")
def test_boiling_water_is_that_of_iapws_95(row):
    T, p, liquid_density, liquid_h, liquid_s, vapour_density, vapour_h, vapour_s = row
    for quality, density, h, s in (
        (0.0, liquid_density, liquid_h, liquid_s),
        (1.0, vapour_density, vapour_h, vapour_s),
    ):
        state = WATER.state(T=lw.quantity(T, "K"), quality=quality)
        found = on_the_zero_of_the_standard(state)
        assert state.si.p / 1e6 == pytest.approx(p, rel=3e-7)
        assert 1.0 / state.si.v == pytest.approx(density, rel=3e-7)
        assert found[0] == pytest.approx(h, rel=3e-7, abs=1e-5)
        assert found[1] == pytest.approx(s, rel=3e-7, abs=1e-7)


IF97 = [
    # T (K), p (MPa), v (m3/kg), h (kJ/kg), s (kJ/kg/K)
    (300.0, 3.0, 0.100215168e-2, 115.331273, 0.392294792),
    (300.0, 80.0, 0.971180894e-3, 184.142828, 0.368563852),
    (500.0, 3.0, 0.120241800e-2, 975.542239, 2.58041912),
    (300.0, 0.0035, 39.4913866, 2549.91145, 8.52238967),
    (700.0, 0.0035, 92.3015898, 3335.68375, 10.1749996),
    (700.0, 30.0, 0.542946619e-2, 2631.49474, 5.17540298),
]


@pytest.mark.parametrize(("T", "p", "v", "h", "s"), IF97)
def test_water_agrees_with_the_industrial_formulation_as_far_as_that_goes(T, p, v, h, s):
    """IF97 fits IAPWS-95 to some 1e-4, and worse near the critical point (IAPWS R7-97, sec. 5)."""
    state = WATER.state(T=lw.quantity(T, "K"), p=lw.quantity(p, "MPa"))
    found = on_the_zero_of_the_standard(state)
    assert state.si.v == pytest.approx(v, rel=5e-4)
    assert found[0] == pytest.approx(h, abs=0.3)
    assert found[1] == pytest.approx(s, abs=5e-4)
    by_library = iapws.IAPWS97(T=T, P=p)
    assert by_library.s == pytest.approx(s, rel=1e-8)


FORMATION = [
    # CODATA: S0 at 298.15 K and 1 bar (J/mol/K), enthalpy of formation (kJ/mol)
    ("hydrogen", 130.680, 0.0),
    ("oxygen", 205.152, 0.0),
    ("nitrogen", 191.609, 0.0),
    ("carbon monoxide", 197.660, -110.53),
    ("carbon dioxide", 213.785, -393.51),
    ("water", 188.835, -241.826),
    ("ammonia", 192.77, -45.94),
    ("argon", 154.846, 0.0),
    ("helium", 126.153, 0.0),
    ("neon", 146.328, 0.0),
]


@pytest.mark.parametrize(("name", "s", "h"), FORMATION)
@pytest.mark.parametrize("backend", ["ideal-gas", "coolprop", "cubic"])
def test_a_gas_stands_at_its_formation_enthalpy_and_absolute_entropy(backend, name, s, h):
    fluid = lw.Fluid(name, backend=backend)
    thin = 10.0
    si = fluid.state_si(("T", "p"), 298.15, thin).si
    # Down from 1 bar by the equation's own gas constant, which differs in the fifth or sixth digit.
    gas_constant = si.p * si.v / si.T * fluid.molar_mass_si
    entropy = si.s * fluid.molar_mass_si - gas_constant * math.log(1e5 / thin)
    assert entropy == pytest.approx(s, abs=1e-3)
    assert si.h * fluid.molar_mass_si / 1e3 == pytest.approx(h, abs=2e-3)


def test_departures_of_butane_by_peng_robinson():
    """Smith, Van Ness & Abbott, ch. 6: 500 K and 50 bar: Z 0.6907, -4988 J/mol, -7.426 J/mol/K;
    with the constants of the original publication 0.69091, -4984.7 and -7.4209. Critical data
    differ a little between collections: within 0.3 %.
    """
    butane = lw.Fluid("n-butane", backend="cubic")
    M = butane.molar_mass_si
    real, thin = (butane.state_si(("T", "p"), 500.0, p).si for p in (5e6, 1.0))
    assert real.p * real.v * M / (lw.R * 500.0) == pytest.approx(0.6907, rel=3e-3)
    assert (real.h - thin.h) * M == pytest.approx(-4988.0, rel=5e-3)
    to_1_pascal = lw.R * 15.424948470398375  # ln(5e6)
    assert (real.s - thin.s) * M + to_1_pascal == pytest.approx(-7.426, rel=5e-3)


LIQUEFACTION = [
    # From 300 K, 1 atm to the boiling liquid; kJ/kg.
    ("helium", 6819.0, 0.003),
    ("neon", 1335.0, 0.003),
    ("nitrogen", 768.1, 0.003),
    ("argon", 478.6, 0.005),
    ("oxygen", 635.6, 0.003),
    ("methane", 1091.0, 0.003),
    ("ethane", 353.1, 0.005),
    ("propane", 140.4, 0.007),
    ("ammonia", 359.1, 0.003),
    ("hydrogen", 12019.0, 0.006),
]


@pytest.mark.parametrize(("name", "work", "within"), LIQUEFACTION)
def test_ideal_work_of_liquefaction_is_that_of_the_cryogenic_table(name, work, within):
    """Table values rest on the equations of the 1980s; equations since move them by up to 0.6 %."""
    site = lw.Surroundings(T="300 K", p="101325 Pa")
    liquid = lw.Fluid(name, backend="coolprop").state(p="101325 Pa", quality=0.0)
    assert liquid.exergy(site).to("kJ/kg").magnitude == pytest.approx(work, rel=within)


@pytest.mark.parametrize("name", ["nitrogen", "oxygen", "argon", "methane"])
def test_a_cubic_equation_liquefies_simple_fluids_at_nearly_the_same_cost(name):
    """The same table; a cubic equation places simple liquids within two per cent."""
    work = {row[0]: row[1] for row in LIQUEFACTION}[name]
    site = lw.Surroundings(T="300 K", p="101325 Pa")
    liquid = lw.Fluid(name, backend="cubic").state(p="101325 Pa", quality=0.0)
    assert liquid.exergy(site).to("kJ/kg").magnitude == pytest.approx(work, rel=0.02)


@pytest.mark.parametrize(
    ("cold", "work"), [(1.8, 165.6666667), (4.2, 70.42857143), (20.0, 14.0), (77.36, 2.877973113)]
)
def test_a_watt_of_cold_costs_what_carnot_says(cold, work):
    """T0 / T - 1 watts at 300 K (Carnot)."""
    fridge = lw.Balance(
        name="refrigerator",
        heat=[lw.Heat("1 W", at=lw.quantity(cold, "K")), lw.Heat.unknown(at="300 K")],
        work=[lw.Work(lw.quantity(2.0 * work, "W"))],
        surroundings=lw.Surroundings(T="300 K", p="1 atm"),
    )
    assert fridge.work_reversible.magnitude == pytest.approx(work, rel=1e-8)
    assert fridge.work_lost.magnitude == pytest.approx(work, rel=1e-8)


def test_polytropic_efficiency_of_a_co2_compressor_from_its_temperatures():
    """Schultz, J. Eng. Power 84 (1962) 69: 20 to 60 bar, 310 to 420 K; the isentropic efficiency
    worked out with the equation of Span & Wagner (1996): 0.73153; 0.058898 kJ/kg/K generated.
    """
    gas = lw.Fluid("carbon dioxide", backend="coolprop")
    inlet = lw.Stream(gas.state(T="310 K", p="20 bar"), rate="1 kg/s")
    machine = lw.process("compression", inlet=inlet, p_out="60 bar", T_out="420 K")
    books = machine.balance(lw.Surroundings(T="25 degC", p="1 bar"))
    assert books.entropy_generated.to("kW/K").magnitude == pytest.approx(0.05889792677, rel=1e-3)
    best = lw.process("compression", inlet=inlet, p_out="60 bar", isentropic_efficiency=1.0)
    ideal = best.balance(books.surroundings).work_total / books.work_total
    assert ideal.magnitude == pytest.approx(0.7315283613, rel=1e-3)
