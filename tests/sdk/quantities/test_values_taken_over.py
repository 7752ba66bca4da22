"""Every way a value with a unit may be given ends in the same SI number."""

import pickle
from copy import deepcopy
from decimal import Decimal
from fractions import Fraction
from threading import Thread

import numpy as np
import pint
import pytest
from hypothesis import given
from hypothesis import strategies as st

from lostwork import quantities
from lostwork.errors import QuantityError
from lostwork.quantities import (
    AMOUNT,
    AMOUNT_RATE,
    DENSITY,
    ENERGY,
    FRACTION,
    MASS,
    MASS_RATE,
    MOLAR_ENERGY,
    POWER,
    PRESSURE,
    PRESSURE_DIFFERENCE,
    SPECIFIC_ENERGY,
    SPECIFIC_ENTROPY,
    TEMPERATURE,
    TEMPERATURE_DIFFERENCE,
    VELOCITY,
    VOLUME,
    VOLUME_RATE,
    Dimension,
    in_unit,
    quantity,
    to_si,
    to_si_any,
)

APPLICATION = pint.get_application_registry()

# Numbers of the units: the international foot, pound and inch (1959) are exact, standard gravity
# is 9.80665 m/s2, the refrigeration ton is 12 000 Btu/h.
PSI = 0.45359237 * 9.80665 / 0.0254**2
BTU = 1055.056


@pytest.mark.parametrize(
    ("text", "dimension", "expected"),
    [
        ("8 bar", PRESSURE, 8e5),
        ("8bar", PRESSURE, 8e5),
        ("  8   bar ", PRESSURE, 8e5),
        ("+8.0e0 bar", PRESSURE, 8e5),
        ("1_000 kPa", PRESSURE, 1e6),
        ("1\u2009013\u202f250 mbar", PRESSURE, 101325e3),
        (".5 MPa", PRESSURE, 5e5),
        ("\u22125 kW", POWER, -5e3),
        ("14.696 psia", PRESSURE, 14.696 * PSI),
        ("2 bara", PRESSURE, 2e5),
        ("2 bar(a)", PRESSURE, 2e5),
        ("2 bar a", PRESSURE, 2e5),
        ("2 bar abs", PRESSURE, 2e5),
        ("200 kPaa", PRESSURE, 2e5),
        ("200 mbara", PRESSURE, 2e4),
        ("2 kgf/cm2", PRESSURE, 2 * 98066.5),
        ("10 mmHg", PRESSURE, 1333.22387415),
        ("0.2 bar", PRESSURE_DIFFERENCE, 2e4),
        ("-0.2 bar", PRESSURE_DIFFERENCE, -2e4),
        ("25 degC", TEMPERATURE, 298.15),
        ("25 °C", TEMPERATURE, 298.15),
        ("25℃", TEMPERATURE, 298.15),
        ("25 deg C", TEMPERATURE, 298.15),
        ("25 celsius", TEMPERATURE, 298.15),
        ("25 Celsius", TEMPERATURE, 298.15),
        ("77 degF", TEMPERATURE, 298.15),
        ("77 °F", TEMPERATURE, 298.15),
        ("536.67 degR", TEMPERATURE, 298.15),
        ("298.15 K", TEMPERATURE, 298.15),
        ("298.15 \u212a", TEMPERATURE, 298.15),
        ("10 K", TEMPERATURE_DIFFERENCE, 10.0),
        ("10 delta_degC", TEMPERATURE_DIFFERENCE, 10.0),
        ("18 delta_degF", TEMPERATURE_DIFFERENCE, 10.0),
        ("18 degR", TEMPERATURE_DIFFERENCE, 10.0),
        ("1.2e3 kg/h", MASS_RATE, 1200 / 3600),
        ("1.2e3kg/h", MASS_RATE, 1200 / 3600),
        ("1200 kg per hour", MASS_RATE, 1200 / 3600),
        ("1.2 t/h", MASS_RATE, 1200 / 3600),
        ("1 lbm/s", MASS_RATE, 0.45359237),
        ("20 lbmol/h", AMOUNT_RATE, 20 * 453.59237 / 3600),
        ("0.24 BTU/(lb*degF)", SPECIFIC_ENTROPY, 0.24 * BTU / 0.45359237 * 1.8),
        ("0.24 btu/lb/degF", SPECIFIC_ENTROPY, 0.24 * BTU / 0.45359237 * 1.8),
        ("1 kJ/kg/K", SPECIFIC_ENTROPY, 1e3),
        ("1 kJ/(kg K)", SPECIFIC_ENTROPY, 1e3),
        ("1 kJ/(kg·°C)", SPECIFIC_ENTROPY, 1e3),
        ("1 kJ kg-1 K-1", SPECIFIC_ENTROPY, 1e3),
        ("1 kJ·kg⁻¹·K⁻¹", SPECIFIC_ENTROPY, 1e3),
        ("1 kJ*kg^-1*K**-1", SPECIFIC_ENTROPY, 1e3),
        ("1 kilojoule / kilogram / kelvin ** 1", SPECIFIC_ENTROPY, 1e3),
        ("1.2 kilogram / meter ** 3", DENSITY, 1.2),
        ("1 m2/s2", SPECIFIC_ENERGY, 1.0),
        ("1 m²/s²", SPECIFIC_ENERGY, 1.0),
        ("1 (m/s)^2", SPECIFIC_ENERGY, 1.0),
        ("1 N.m", ENERGY, 1.0),
        ("3 kWh", ENERGY, 10.8e6),
        ("2 MMBtu/h", POWER, 2e6 * BTU / 3600),
        ("1 TR", POWER, 12000 * BTU / 3600),
        ("1 cfm", VOLUME_RATE, 0.3048**3 / 60),
        ("1 CFM", VOLUME_RATE, 0.3048**3 / 60),
        ("1 ft3/min", VOLUME_RATE, 0.3048**3 / 60),
        ("1 gpm", VOLUME_RATE, 231 * 0.0254**3 / 60),
        ("1.2 kg/m3", DENSITY, 1.2),
        ("5 µm/s", VELOCITY, 5e-6),
        ("5 \u03bcm/s", VELOCITY, 5e-6),
        ("85 %", FRACTION, 0.85),
        ("85%", FRACTION, 0.85),
        ("85 percent", FRACTION, 0.85),
        ("0.85", FRACTION, 0.85),
        ("850 g/kg", FRACTION, 0.85),
    ],
)
def test_a_text_is_a_number_and_a_unit(text, dimension, expected):
    first, again = to_si(text, dimension, "x"), to_si(text, dimension, "x")
    assert type(first) is float
    assert first == pytest.approx(expected, rel=1e-12)
    assert again == first


@pytest.mark.parametrize(
    ("text", "moles"),
    [
        # one kmol of ideal gas fills 22.413 969 54 m3 at 0 degC, 101 325 Pa (CODATA 2018)
        ("22.41396954 Nm3", 1000.0),
        ("22.41396954 Nm³", 1000.0),
        ("22.41396954 Nm^3", 1000.0),
        ("23.6448 Sm3", 1000.0),
        # one pound mole fills 379.48 cubic feet at 60 degF, 14.696 psi
        ("379.48 scf", 453.59237),
        ("379.48 SCF", 453.59237),
    ],
)
def test_a_standard_volume_of_gas_is_an_amount(text, moles):
    assert to_si(text, AMOUNT, "n") == pytest.approx(moles, rel=2e-5)


def test_rates_of_standard_volume_agree_with_one_another():
    per_minute = to_si("1 scfm", AMOUNT_RATE, "n")
    assert to_si("60 scfh", AMOUNT_RATE, "n") == pytest.approx(per_minute)
    assert to_si("1440 scfd", AMOUNT_RATE, "n") == pytest.approx(per_minute)
    assert to_si("0.00144 MMSCFD", AMOUNT_RATE, "n") == pytest.approx(per_minute)
    assert to_si("36 kJ/Nm3", MOLAR_ENERGY, "h") == pytest.approx(36e3 * 22.41396954e-3)


@pytest.mark.parametrize(
    "text", ["4 barg", "4 bar(g)", "4 bar g", "4 bar gauge", "400 kPag", "4000 mbarg", "400 kPa(g)"]
)
def test_a_gauge_pressure_stands_on_the_barometer(text):
    assert to_si(text, PRESSURE, "p", barometer=98000.0) == pytest.approx(498000.0)
    assert to_si(text, PRESSURE, "p", barometer=101325.0) == pytest.approx(501325.0)


def test_an_absolute_pressure_ignores_the_barometer():
    assert to_si("4 bar", PRESSURE, "p", barometer=98000.0) == 4e5
    assert to_si("-0.5 barg", PRESSURE, "p", barometer=1e5) == pytest.approx(5e4)


@pytest.mark.parametrize("magnitude", [8, 8.0, np.float64(8), np.int32(8), Decimal(8), Fraction(8)])
def test_a_quantity_of_one_value_becomes_a_float(magnitude):
    si = to_si(APPLICATION.Quantity(magnitude, "bar"), PRESSURE, "p")
    assert type(si) is float
    assert si == 8e5


def test_quantities_of_any_registry_are_taken_over():
    other = pint.UnitRegistry()
    other.define("siteday = 20 hour")
    decimal = pint.UnitRegistry(non_int_type=Decimal)
    imperial = pint.UnitRegistry(system="imperial")
    assert to_si(other.Quantity(25.0, "degC"), TEMPERATURE, "T") == pytest.approx(298.15)
    assert to_si(other.Quantity(2.0, "MJ/siteday"), POWER, "P") == pytest.approx(2e6 / 72e3)
    assert to_si(decimal.Quantity(Decimal("1.5"), "bar"), PRESSURE, "p") == pytest.approx(1.5e5)
    assert to_si(imperial.Quantity(1.0, "pound"), MASS, "m") == pytest.approx(0.45359237)
    assert to_si(pint.Quantity(8.0, "bar"), PRESSURE, "p") == 8e5


def test_a_unit_means_what_its_own_registry_says():
    other = pint.UnitRegistry(on_redefinition="ignore")
    other.define("horsepower = 735.49875 * watt = hp")
    metric = other.Quantity(1.0, "hp")
    assert to_si(metric, POWER, "P") == pytest.approx(735.49875)
    assert to_si("1 hp", POWER, "P") == pytest.approx(745.69987, rel=1e-7)


def test_pickled_quantities_are_taken_over():
    kept = pickle.loads(pickle.dumps(pint.UnitRegistry().Quantity([1.0, 2.0], "bar")))
    assert to_si(kept, PRESSURE, "p").tolist() == [1e5, 2e5]


def test_an_offset_unit_in_a_compound_is_a_difference():
    u = APPLICATION
    assert to_si(u.Quantity(1.0, "J/kg/delta_degC"), SPECIFIC_ENTROPY, "cp") == 1.0
    assert to_si(u.Quantity(1.0, u.J / u.kg / u.degC), SPECIFIC_ENTROPY, "cp") == 1.0
    fahrenheit = u.Quantity(1.0, u.J / u.kg / u.degF)
    assert to_si(fahrenheit, SPECIFIC_ENTROPY, "cp") == pytest.approx(1.8)


@pytest.fixture
def swapped():
    before = APPLICATION.get()
    yield pint.set_application_registry
    pint.set_application_registry(before)


def test_the_application_registry_may_be_swapped(swapped):
    assert to_si("2 kg", MASS, "m") == 2.0
    host = pint.UnitRegistry()
    host.define("sack = 25 kg")
    host.define("scf = 1.2 mole")
    host.define("barg = bar")
    with pytest.raises(QuantityError):
        to_si("2 sack", MASS, "m")
    swapped(host)
    assert to_si("2 sack", MASS, "m") == 50.0
    assert to_si("2 sack/h", MASS_RATE, "m") == pytest.approx(50 / 3600)
    assert to_si("1 scf", AMOUNT, "n") == pytest.approx(1.2), "the host's own name goes first"
    assert quantity(1.0, "kJ/kg")._REGISTRY is host
    with pytest.raises(QuantityError, match="gauge"):
        to_si(host.Quantity(2.0, "barg"), PRESSURE, "p")
    with pytest.raises(QuantityError, match="gauge"):
        to_si("2 barg", PRESSURE, "p")


def test_a_unit_that_the_host_defines_later_is_found(swapped):
    host = pint.UnitRegistry()
    swapped(host)
    with pytest.raises(QuantityError):
        to_si("2 drum", VOLUME, "V")
    host.define("drum = 0.2 m^3")
    assert to_si("2 drum", VOLUME, "V") == pytest.approx(0.4)


def test_the_registry_of_the_host_is_left_as_it_was(swapped):
    host = pint.UnitRegistry()
    swapped(host)
    units, prefixes = dict(host._units), dict(host._prefixes)
    for text, dimension in [
        ("3 hPa", PRESSURE),
        ("3 Gcal/h", POWER),
        ("3 Nm3/h", AMOUNT_RATE),
        ("3 psia", PRESSURE),
        ("3 MMBtu/h", POWER),
        ("3 mg/µs", MASS_RATE),
        ("20 °C", TEMPERATURE),
    ]:
        to_si(text, dimension, "x")
    quantity(1.0, "MJ/kg")
    in_unit(1e5, PRESSURE, "daPa")
    for wrong in ("3 fish", "3 kcfm", "3 barg"):
        with pytest.raises(QuantityError):
            to_si(wrong, PRESSURE, "p")
    assert dict(host._units) == units
    assert dict(host._prefixes) == prefixes
    assert not host.autoconvert_offset_to_baseunit


def test_arrays_keep_their_shape_and_share_no_memory():
    given_values = np.arange(1.0, 25.0).reshape(2, 3, 4)
    for unit, scale in (("bar", 1e5), ("Pa", 1.0)):
        held = APPLICATION.Quantity(given_values, unit)
        si = to_si(held, PRESSURE, "p")
        assert si.dtype == np.float64
        assert si.shape == (2, 3, 4)
        np.testing.assert_allclose(si, given_values * scale, rtol=1e-15)
        assert not np.shares_memory(si, given_values)
    fractions = np.array([0.1, 0.2])
    assert not np.shares_memory(to_si(fractions, FRACTION, "x"), fractions)


@pytest.mark.parametrize("dtype", [np.float32, np.int64, np.uint8, np.float16])
def test_arrays_of_other_numbers_become_doubles(dtype):
    si = to_si(APPLICATION.Quantity(np.array([1, 2], dtype=dtype), "degC"), TEMPERATURE, "T")
    assert si.dtype == np.float64
    np.testing.assert_allclose(si, [274.15, 275.15], rtol=1e-15)


def test_slices_and_transposed_arrays_are_read_in_order():
    values = np.arange(1.0, 200_001.0).reshape(400, 500)
    si = to_si(APPLICATION.Quantity(values.T[::2], "kPa"), PRESSURE, "p")
    np.testing.assert_allclose(si, values.T[::2] * 1e3, rtol=1e-15)


def test_a_value_in_an_array_of_no_axis_is_a_float():
    assert type(to_si(APPLICATION.Quantity(np.array(3.0), "bar"), PRESSURE, "p")) is float
    assert type(to_si(np.array(0.5), FRACTION, "x")) is float


def test_squares_beyond_a_double_do_not_make_a_finite_value_infinite():
    si = to_si(APPLICATION.Quantity(np.array([1e200, 2e200]), "J"), ENERGY, "E")
    assert si.tolist() == [1e200, 2e200]


def test_a_list_may_mix_units_and_forms():
    mixed = ["1 bar", APPLICATION.Quantity(100.0, "kPa"), pint.UnitRegistry().Quantity(1, "atm")]
    np.testing.assert_allclose(to_si(mixed, PRESSURE, "p"), [1e5, 1e5, 101325.0])
    np.testing.assert_allclose(to_si(tuple(mixed), PRESSURE, "p"), [1e5, 1e5, 101325.0])
    objects = np.empty((1, 3), dtype=object)
    objects[0] = mixed
    assert to_si(objects, PRESSURE, "p").shape == (1, 3)
    nested = [["1 bar", "2 bar"], ["3 bar", "4 bar"], ["5 bar", "6 bar"]]
    assert to_si(nested, PRESSURE, "p").shape == (3, 2)
    assert to_si(np.array(nested), PRESSURE, "p").shape == (3, 2)
    rows = [APPLICATION.Quantity(np.array([1.0, 2.0]), "bar"), ["3 bar", "4 bar"]]
    np.testing.assert_allclose(to_si(rows, PRESSURE, "p"), [[1e5, 2e5], [3e5, 4e5]])
    assert to_si([0.2, "30 %", 0.5], FRACTION, "x").tolist() == pytest.approx([0.2, 0.3, 0.5])


def test_the_first_dimension_that_fits_is_taken():
    choice = (POWER, ENERGY)
    assert to_si_any("3 kJ", choice, "duty") == (3e3, ENERGY)
    assert to_si_any("3 kJ", choice, "duty") == (3e3, ENERGY)
    assert to_si_any(APPLICATION.Quantity(3.0, "kW"), choice, "duty") == (3e3, POWER)
    numbers, dimension = to_si_any(["3 kJ", "4 kJ"], choice, "duty")
    assert dimension is ENERGY
    assert numbers.tolist() == [3e3, 4e3]
    assert to_si_any(0.5, (MASS, FRACTION), "x") == (0.5, FRACTION)
    assert to_si_any("1 barg", (POWER, PRESSURE), "x", barometer=1e5) == (2e5, PRESSURE)


def test_a_quantity_made_here_is_of_the_application_registry_and_owns_its_numbers():
    numbers = np.array([1.0, 2.0])
    made = quantity(numbers, "kJ/kg")
    assert isinstance(made, APPLICATION.Quantity)
    assert made.to("J/kg").magnitude.tolist() == [1e3, 2e3]
    made.ito("J/kg")
    assert numbers.tolist() == [1.0, 2.0]
    assert quantity(0.5, "").dimensionless
    assert quantity(25.0, "degC").to("K").magnitude == pytest.approx(298.15)
    made = to_si(quantity(3.0, "scfm"), AMOUNT_RATE, "n")
    assert made == pytest.approx(to_si("3 scfm", AMOUNT_RATE, "n"), rel=1e-14)


def test_numbers_are_told_in_the_unit_of_a_report():
    assert in_unit(298.15, TEMPERATURE, "degC") == pytest.approx(25.0)
    assert in_unit(10.0, TEMPERATURE_DIFFERENCE, "degF") == pytest.approx(18.0)
    assert in_unit(10.0, TEMPERATURE_DIFFERENCE, "delta_degF") == pytest.approx(18.0)
    told = in_unit(np.array([[1e5, 2e5]]), PRESSURE, "bara")
    np.testing.assert_allclose(told, [[1.0, 2.0]])
    assert in_unit(0.25, FRACTION, "%") == pytest.approx(25.0)
    assert type(in_unit(5, MASS, "g")) is float


UNITS = {
    TEMPERATURE: ("K", "degC", "degF", "degR"),
    PRESSURE: ("Pa", "kPa", "bar", "psi", "atm", "mmHg", "bara", "kgf/cm2"),
    SPECIFIC_ENERGY: ("J/kg", "kJ/kg", "BTU/lb", "kcal/kg", "m2/s2"),
    SPECIFIC_ENTROPY: ("J/(kg*K)", "kJ/kg/K", "BTU/(lb*degF)", "kcal/(kg*degC)"),
    MASS_RATE: ("kg/s", "kg/h", "lb/h", "t/day"),
    AMOUNT_RATE: ("mol/s", "kmol/h", "Nm3/h", "scfm", "lbmol/h"),
}


@given(
    st.sampled_from([(d, a, b) for d, units in UNITS.items() for a in units for b in units]),
    st.floats(1e-3, 1e9),
)
def test_a_value_is_the_same_in_every_unit(case, si):
    dimension, one, other = case
    for unit in (one, other):
        text = f"{in_unit(si, dimension, unit)!r} {unit}"
        # in degC the fraction of a small temperature is lost to the offset of 273.15
        assert to_si(text, dimension, "x") == pytest.approx(si, rel=1e-12, abs=1e-10)
    made = quantity(in_unit(si, dimension, one), one)
    assert to_si(made, dimension, "x") == pytest.approx(si, rel=1e-12, abs=1e-10)


@given(st.lists(st.floats(-1e300, 1e300), max_size=50), st.sampled_from(["J", "kJ", "kWh", "Btu"]))
def test_an_array_and_its_elements_agree(values, unit):
    together = to_si(APPLICATION.Quantity(np.array(values), unit), ENERGY, "E")
    apart = [to_si(APPLICATION.Quantity(value, unit), ENERGY, "E") for value in values]
    assert together.tolist() == apart


def test_threads_read_the_same_numbers():
    host = pint.UnitRegistry()
    results = []

    def read():
        for power in range(300):
            results.append(to_si(f"{power + 1} kJ/(kg*K)", SPECIFIC_ENTROPY, "s"))
            results.append(to_si(host.Quantity(power + 1.0, "kJ/kg/K"), SPECIFIC_ENTROPY, "s"))

    threads = [Thread(target=read) for _ in range(4)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert len(results) == 4 * 600
    assert {round(value) for value in results} == {1000 * n for n in range(1, 301)}


def test_every_example_in_a_message_can_be_read():
    constants = [d for d in vars(quantities).values() if isinstance(d, Dimension)]
    assert len(constants) >= 29
    for dimension in constants:
        if dimension is not FRACTION:
            assert to_si(dimension.example.strip('"'), dimension, "x") > 0


def test_dimensions_stay_one_object_when_copied():
    assert pickle.loads(pickle.dumps(PRESSURE)) is PRESSURE
    assert deepcopy(TEMPERATURE) is TEMPERATURE
    own = Dimension("a viscosity", "Pa*s", '"1 mPa*s"', 0.0)
    assert to_si("1 cP", own, "eta") == pytest.approx(1e-3)
    assert pickle.loads(pickle.dumps(own)).name == "a viscosity"
