"""Components by name, CAS number, formula or refrigerant number; what is not certain is refused."""

from __future__ import annotations

import pickle
import re
import time

import chemicals
import pytest

import lostwork as lw
from lostwork.properties.components import component
from lostwork.properties.formation import formation
from lostwork.properties.refrigerants import CAS_OF_REFRIGERANT

COMMON = {
    # name: formula in the order of Hill (common knowledge)
    "water": "H2O",
    "steam": "H2O",
    "ammonia": "H3N",
    "carbon dioxide": "CO2",
    "hydrogen sulphide": "H2S",
    "sulphur dioxide": "O2S",
    "n-butane": "C4H10",
    "isobutane": "C4H10",
    "n-hexane": "C6H14",
    "toluene": "C7H8",
    "ethylene": "C2H4",
    "propylene": "C3H6",
    "acetylene": "C2H2",
    "methanol": "CH4O",
    "ethanol": "C2H6O",
    "ethylene glycol": "C2H6O2",
    "hydrogen chloride": "ClH",
    "chlorine": "Cl2",
    "nitrous oxide": "N2O",
    "heavy water": "D2O",
    "monoethanolamine": "C2H7NO",
}
MIXTURES = ["flue gas", "natural gas", "biogas", "syngas", "town gas", "fuel oil", "brine", "LPG"]
ABBREVIATIONS = ["He2", "in", "c1", "be2", "m", "xyz"]


def atoms_of_refrigerant(number: str) -> dict[str, int]:
    """Atoms from a refrigerant number: double bonds, C - 1, H + 1, F; the rest is chlorine.

    ANSI/ASHRAE Standard 34, sec. 4, from memory.
    """
    digits = re.match(r"\d+", number)[0].rjust(4, "0")
    bonds, carbon, hydrogen, fluorine = (int(digit) for digit in digits)
    carbon, hydrogen = carbon + 1, hydrogen - 1
    chlorine = 2 * carbon + 2 - 2 * bonds - hydrogen - fluorine
    atoms = {"C": carbon, "H": hydrogen, "F": fluorine, "Cl": chlorine}
    return {symbol: count for symbol, count in atoms.items() if count}


@pytest.mark.parametrize("name", COMMON)
def test_a_compound_of_the_trade_is_found_by_its_names(name):
    found = component(name)
    assert chemicals.atoms_to_Hill(dict(found.elements)) == COMMON[name]
    assert component(name.upper()) == found
    assert component(found.cas) == found
    assert component(found.name) == found


@pytest.mark.parametrize("number", [n for n in CAS_OF_REFRIGERANT if not n.startswith(("6", "7"))])
def test_the_formula_of_a_refrigerant_is_the_one_its_number_tells(number):
    found = component(f"R{number}")
    assert dict(found.elements) == atoms_of_refrigerant(number)


@pytest.mark.parametrize("number", [n for n in CAS_OF_REFRIGERANT if n.startswith("7")])
def test_an_inorganic_refrigerant_has_the_molar_mass_of_its_number(number):
    """Series 700: the rest of the number is the molar mass, rounded (ASHRAE 34, from memory)."""
    assert round(component(f"R-{number}").molar_mass * 1e3) == int(number) - 700


@pytest.mark.parametrize("text", MIXTURES)
def test_a_word_for_a_mixture_is_no_component(text):
    with pytest.raises(lw.UnknownComponent) as refused:
        component(text)
    if "gas" in text:
        assert "give a composition" in str(refused.value)


@pytest.mark.parametrize("text", ABBREVIATIONS)
def test_an_abbreviation_is_not_guessed_at(text):
    with pytest.raises(lw.UnknownComponent):
        component(text)


@pytest.mark.parametrize("text", ["N", "O", "H", "Cl", "C4H10", "C8H10", "C2H6O"])
def test_every_compound_that_an_ambiguous_text_may_mean_can_be_asked_for(text):
    with pytest.raises(lw.AmbiguousComponent) as refused:
        component(text)
    found = {component(candidate) for candidate in refused.value.candidates}
    assert len(found) == len(refused.value.candidates)


@pytest.mark.parametrize(
    ("text", "meant"),
    [("nitrogn", "nitrogen"), ("mehtane", "methane"), ("carbon dioxid", "carbon dioxide")],
)
def test_a_misspelt_name_is_answered_by_the_nearest(text, meant):
    with pytest.raises(lw.UnknownComponent, match=meant) as refused:
        component(text)
    assert refused.value.nearest[0] == meant
    for near in refused.value.nearest:
        component(near)


@pytest.mark.parametrize("value", ["", "  ", None, 3.0, "x" * 500, "=C=O", "7732-18-6", ["water"]])
def test_what_is_no_name_at_all_is_refused(value):
    with pytest.raises(lw.UnknownComponent):
        component(value)


def test_formulas_tell_cobalt_from_carbon_monoxide():
    assert component("CO").name == "carbon monoxide"
    assert component("Co").name == "cobalt"


def test_an_unknown_name_is_refused_at_once():
    component("water")
    begun = time.perf_counter()
    with pytest.raises(lw.UnknownComponent):
        component("unobtanium oxide")
    assert time.perf_counter() - begun < 0.5


def test_a_component_is_a_value():
    first = component("propane")
    assert pickle.loads(pickle.dumps(first)) == first
    assert {first: 1}[component("74-98-6")] == 1
    assert first.molar_mass == pytest.approx(0.04409562, rel=1e-6)  # CIAAW atomic weights


CODATA = {
    # enthalpy of formation, kJ/mol, and absolute entropy, J/mol/K, at 298.15 K and 1 bar
    "hydrogen": (0.0, 130.680),
    "oxygen": (0.0, 205.152),
    "nitrogen": (0.0, 191.609),
    "water": (-241.826, 188.835),
    "carbon dioxide": (-393.51, 213.785),
    "carbon monoxide": (-110.53, 197.660),
    "ammonia": (-45.94, 192.77),
}


@pytest.mark.parametrize("name", CODATA)
def test_formation_data_are_the_key_values_where_these_exist(name):
    """Cox, Wagman & Medvedev, CODATA Key Values for Thermodynamics (1989)."""
    data = formation(component(name))
    h, s = CODATA[name]
    assert data.enthalpy == pytest.approx(1e3 * h, abs=0.5)
    assert data.entropy == pytest.approx(s, abs=5e-4)
    assert "CODATA" in data.source


@pytest.mark.parametrize("name", ["methane", "ethane", "propane", "methanol", "ethylene"])
def test_other_formation_data_are_those_of_the_handbook_at_298_kelvin(name):
    """CRC Handbook through `chemicals`, whose values at 0 K lie 8 kJ/mol and more away."""
    found = component(name)
    data = formation(found)
    assert data.enthalpy == pytest.approx(chemicals.Hfg(found.cas, method="CRC"), abs=600.0)
    assert data.source


def test_a_compound_without_published_entropy_has_no_formation_data():
    assert formation(component("R1233zd(E)")) is None


FRACTIONS = {"nitrogen": 0.7812, "oxygen": 0.2096, "argon": 0.0092}


def test_dry_air_is_the_published_mixture():
    """Lemmon, Jacobsen, Penoncello & Friend, J. Phys. Chem. Ref. Data 29 (2000) 331."""
    for name in ("air", "dry air", "Air"):
        spec = lw.Fluid(name, backend="ideal-gas").spec
        found = dict(zip((c.name for c in spec.components), spec.mole_fractions, strict=True))
        assert found == pytest.approx(FRACTIONS)
        assert spec.molar_mass == pytest.approx(0.0289586, rel=1e-4)


def test_a_composition_by_mass_and_by_amount_is_one_fluid():
    by_amount = lw.Fluid(FRACTIONS, backend="ideal-gas")
    masses = dict(
        zip((c.name for c in by_amount.spec.components), by_amount.spec.mass_fractions, strict=True)
    )
    by_mass = lw.Fluid(masses, backend="ideal-gas", basis="mass")
    assert by_mass.spec.mole_fractions == pytest.approx(by_amount.spec.mole_fractions, rel=1e-12)


def test_fractions_within_a_millionth_of_one_are_normalised_and_others_refused():
    spec = lw.Fluid({"nitrogen": 0.5, "argon": 0.5000004}, backend="ideal-gas").spec
    assert sum(spec.mole_fractions) == pytest.approx(1.0, abs=1e-15)
    with pytest.raises(lw.CompositionError, match="sum"):
        lw.Fluid({"nitrogen": 0.5, "argon": 0.50001}, backend="ideal-gas")


@pytest.mark.parametrize(
    "fractions",
    [
        {},
        {"nitrogen": -0.1, "argon": 1.1},
        {"nitrogen": float("nan"), "argon": 0.5},
        {"nitrogen": True},
        {"nitrogen": "0.5", "argon": "some"},
        {"nitrogen": 0.5, "N2": 0.5},
        {"R728": 0.5, "7727-37-9": 0.5},
    ],
    ids=str,
)
def test_a_composition_that_is_none_is_refused(fractions):
    with pytest.raises((lw.CompositionError, lw.QuantityError)):
        lw.Fluid(fractions, backend="ideal-gas")


def test_a_component_of_fraction_zero_is_left_out():
    fluid = lw.Fluid({"nitrogen": 1.0, "argon": 0.0}, backend="ideal-gas")
    assert [c.name for c in fluid.spec.components] == ["nitrogen"]
    assert fluid.is_pure
