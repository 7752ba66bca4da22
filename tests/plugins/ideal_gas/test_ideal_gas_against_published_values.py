"""Ideal gases against tables, CoolProp's ideal part, and the integrals that chemicals carries."""

from __future__ import annotations

import numpy as np
import pytest
from chemicals import heat_capacity as published
from scipy.integrate import quad

from lostwork_plugins.ideal_gas.refusal import NoIdealGasModel

P0 = 1e5


def _rise(model, T_from, T_to):
    """Molar enthalpy and entropy rise at 1 bar, J/mol and J/mol/K."""
    low = model.columns(("T", "p"), float(T_from), P0)
    high = model.columns(("T", "p"), float(T_to), P0)
    return (high.h - low.h) * model.molar_mass, (high.s - low.s) * model.molar_mass


def _cp(model, T):
    return _rise(model, T - 0.5, T + 0.5)[0]


# Ideal-gas table of air after Keenan, Chao and Kaye (Gas Tables, 1983), as printed in the common
# textbooks: T in K, h in kJ/kg, s0 in kJ/kg/K.  From memory.
AIR_TABLE = [
    (400.0, 400.98, 1.99194),
    (500.0, 503.02, 2.21952),
    (600.0, 607.02, 2.40902),
    (800.0, 821.95, 2.71787),
    (1000.0, 1046.04, 2.96770),
]


@pytest.mark.parametrize(("T", "h", "s"), AIR_TABLE)
def test_air_rises_from_300_K_as_in_the_gas_tables(air, T, h, s):
    at_300, at_T = (air.columns(("T", "p"), t, P0) for t in (300.0, T))
    assert at_T.h - at_300.h == pytest.approx((h - 300.19) * 1e3, rel=2e-3)
    assert at_T.s - at_300.s == pytest.approx((s - 1.70203) * 1e3, rel=2e-3)


# NIST-JANAF Thermochemical Tables, 4th ed. (Chase, 1998): T in K, cp in J/mol/K.  From memory.
JANAF_CP = [
    ("nitrogen", 300.0, 29.125),
    ("nitrogen", 500.0, 29.580),
    ("nitrogen", 1000.0, 32.697),
    ("nitrogen", 2000.0, 35.971),
    ("oxygen", 300.0, 29.385),
    ("oxygen", 500.0, 31.091),
    ("oxygen", 1000.0, 34.870),
    ("carbon dioxide", 300.0, 37.221),
    ("carbon dioxide", 500.0, 44.627),
    ("carbon dioxide", 1000.0, 54.308),
    ("water", 300.0, 33.596),
    ("water", 500.0, 35.226),
    ("water", 1000.0, 41.268),
]


@pytest.mark.parametrize(("gas", "T", "cp"), JANAF_CP)
def test_heat_capacity_agrees_with_the_janaf_tables(open_model, gas, T, cp):
    assert _cp(open_model(gas), T) == pytest.approx(cp, rel=4e-3)


# Same tables: H(1000 K) - H(298.15 K) in kJ/mol and S at both in J/mol/K.  From memory.
JANAF_RISE = [
    ("nitrogen", 21.463, 228.170 - 191.609),
    ("oxygen", 22.703, 243.578 - 205.147),
    ("carbon dioxide", 33.397, 269.299 - 213.795),
    ("water", 26.000, 232.738 - 188.834),
]


@pytest.mark.parametrize(("gas", "h", "s"), JANAF_RISE)
def test_enthalpy_and_entropy_rise_as_in_the_janaf_tables(open_model, gas, h, s):
    rise = _rise(open_model(gas), 298.15, 1000.0)
    assert rise[0] == pytest.approx(h * 1e3, rel=2e-3)
    assert rise[1] == pytest.approx(s, rel=2e-3)


@pytest.mark.parametrize(
    ("gas", "name", "low", "high", "within"),
    [
        ("nitrogen", "Nitrogen", 100.0, 1500.0, 4e-3),
        ("oxygen", "Oxygen", 100.0, 1500.0, 4e-3),
        ("carbon dioxide", "CarbonDioxide", 250.0, 1500.0, 4e-3),
        ("water", "Water", 300.0, 1200.0, 4e-3),
        ("methane", "Methane", 150.0, 600.0, 4e-3),
        ("propane", "n-Propane", 250.0, 600.0, 4e-3),
        # Here the sources themselves differ: TRC and Poling stand together, 2 % off Tillner-Roth.
        ("1,1,1,2-tetrafluoroethane", "R134a", 250.0, 450.0, 2e-2),
        ("helium", "Helium", 50.0, 1500.0, 4e-3),
    ],
)
def test_rises_agree_with_the_ideal_part_of_the_reference_equations(
    open_model, gas, name, low, high, within
):
    coolprop = pytest.importorskip("CoolProp")
    fluid = coolprop.AbstractState("HEOS", name)
    fluid.specify_phase(coolprop.iphase_gas)
    seen = []
    for T in (low, high):
        # So thin that only the ideal part is left; then s is brought to 1 bar.
        fluid.update(coolprop.DmolarT_INPUTS, 1e-6, T)
        constant = fluid.gas_constant()
        seen.append((fluid.hmolar(), fluid.smolar() + constant * np.log(1e-6 * constant * T / P0)))
    h, s = _rise(open_model(gas), low, high)
    assert h == pytest.approx(seen[1][0] - seen[0][0], rel=within)
    assert s == pytest.approx(seen[1][1] - seen[0][1], rel=within)


@pytest.mark.parametrize(
    "gas", ["nitrogen", "water", "carbon dioxide", "1,1,1,2-tetrafluoroethane"]
)
def test_trc_integrals_agree_with_the_closed_forms_of_chemicals(open_model, gas, spec_of):
    model = open_model(gas, correlation="TRC")
    row = published.TRC_gas_data.loc[spec_of(gas).components[0].cas]
    a = [float(row[f"a{i}"]) for i in range(8)]
    for low, high in [(60.0, 298.15), (298.15, 700.0), (700.0, 2900.0)]:
        h, s = _rise(model, low, high)
        closed_h = published.TRCCp_integral(high, *a) - published.TRCCp_integral(low, *a)
        closed_s = published.TRCCp_integral_over_T(high, *a) - published.TRCCp_integral_over_T(
            low, *a
        )
        assert h == pytest.approx(closed_h, rel=1e-8)
        assert s == pytest.approx(closed_s, rel=1e-8)


def test_poling_integrals_agree_with_the_closed_forms_of_chemicals(open_model, spec_of):
    model = open_model("methane", correlation="Poling")
    row = published.Cp_data_Poling.loc[spec_of("methane").components[0].cas]
    a = [float(row[f"a{i}"]) for i in range(5)]

    def closed(integral):
        return integral(900.0, *a) - integral(60.0, *a)

    h, s = _rise(model, 60.0, 900.0)
    assert h == pytest.approx(closed(published.Poling_integral), rel=1e-12)
    assert s == pytest.approx(closed(published.Poling_integral_over_T), rel=1e-12)


@pytest.mark.parametrize("gas", ["water", "nitrogen", "methane"])
def test_shomate_integrals_agree_with_the_piecewise_ones_of_chemicals(open_model, gas, spec_of):
    model = open_model(gas, correlation="Shomate")
    pieces = published.WebBook_Shomate_gases[spec_of(gas).components[0].cas]
    low, high = model.limits.T_min, model.limits.T_max
    h, s = _rise(model, low, high)
    assert h == pytest.approx(pieces.calculate_integral(low, high), rel=1e-12)
    assert s == pytest.approx(pieces.calculate_integral_over_T(low, high), rel=1e-12)


@pytest.mark.parametrize("gas", ["nitrogen", "carbon dioxide", "water", "hydrogen", "propane"])
@pytest.mark.parametrize("span", [(50.0, 60.0), (55.25, 298.15), (298.15, 299.0), (300.0, 1400.0)])
def test_h_and_s_are_the_integrals_of_one_heat_capacity(open_model, gas, span, spec_of):
    row = published.TRC_gas_data.loc[spec_of(gas).components[0].cas]
    a = [float(row[f"a{i}"]) for i in range(8)]
    joints = [a[7]] if span[0] < a[7] < span[1] else None
    tight = {"epsabs": 0.0, "epsrel": 1e-13, "limit": 200, "points": joints}
    reference_h, _ = quad(lambda T: published.TRCCp(T, *a), *span, **tight)
    reference_s, _ = quad(lambda T: published.TRCCp(T, *a) / T, *span, **tight)
    h, s = _rise(open_model(gas), *span)
    # A difference of two values of some 1e5 J/mol cannot be better than their last digit.
    assert h == pytest.approx(reference_h, rel=1e-12, abs=1e-10)
    assert s == pytest.approx(reference_s, rel=1e-12, abs=1e-12)


def test_within_a_kelvin_entropy_and_enthalpy_follow_one_heat_capacity(air):
    T = np.linspace(60.0, 4900.0, 2000)
    step = 1e-2
    low = air.columns(("T", "p"), T - step, np.full_like(T, P0))
    high = air.columns(("T", "p"), T + step, np.full_like(T, P0))
    # Midpoint rule: the error is (step/T)^2, the rounding eps * h / (cp * step).
    assert np.allclose((high.h - low.h) / T, high.s - low.s, rtol=3e-8)


def test_published_data_of_a_gas_without_a_sound_range_are_left_out(open_model):
    # Its TRC coefficients give a negative heat capacity within their own range.
    with pytest.raises(NoIdealGasModel, match="no correlation of the heat capacity"):
        open_model("2-butylnaphthalene")
