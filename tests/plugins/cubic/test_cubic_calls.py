"""Options, limits, failed rows, notes, threads and pickling of the cubic backend."""

import os
import pickle
import subprocess
import sys
from concurrent.futures import ThreadPoolExecutor

import numpy as np
import pytest

from lostwork import Component, FluidSpec, PairRefused, PropertyError
from lostwork_plugins.cubic import lostwork_backends
from lostwork_plugins.cubic.backend import CubicBackend
from lostwork_plugins.cubic.refusal import MissingParameters, OptionRefused

GAS = {"methane": 0.6, "propane": 0.3, "n-pentane": 0.1}
WASH = {"ethanol": 0.3, "water": 0.7}


def test_the_plugin_offers_the_backend_by_its_descriptor():
    (descriptor,) = lostwork_backends()
    assert descriptor.name == "cubic"
    assert descriptor.load() is CubicBackend


def test_the_plugin_is_light_until_a_model_is_opened():
    code = "import sys, lostwork_plugins.cubic; sys.exit('thermo' in sys.modules)"
    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0


@pytest.mark.parametrize(
    ("options", "told"),
    [
        ({"eos": "VdW"}, 'Give "PR" or "SRK"'),
        ({"equation": "PR"}, "Options are eos"),
        ({"missing": "ignore"}, "refuse"),
        ({"interaction": 0.1}, "no mapping"),
        ({"interaction": {"methane": 0.1}}, "no pair"),
        ({"interaction": {("methane", "methane"): 0.1}}, "twice"),
        ({"interaction": {("methane", "propane"): "x"}}, "between -1 and 1"),
        ({"interaction": {("methane", "propane"): float("nan")}}, "between -1 and 1"),
        ({"interaction": {("methane", "ammonia"): 0.1}}, "not in the fluid"),
    ],
)
def test_an_option_that_cannot_be_used_is_refused_and_the_known_ones_are_told(
    model_of, options, told
):
    with pytest.raises(OptionRefused, match=told) as caught:
        model_of(GAS, **options)
    assert isinstance(caught.value, PropertyError)
    assert str(pickle.loads(pickle.dumps(caught.value))) == str(caught.value)


def test_a_pair_without_interaction_parameter_is_named(model_of):
    assert any("ethanol and water" in note for note in model_of(WASH).notes)
    with pytest.raises(MissingParameters, match="ethanol and water"):
        model_of(WASH, missing="refuse")


def test_no_peng_robinson_parameter_is_lent_to_soave(model_of):
    assert not any(
        "interaction" in note for note in model_of({"methane": 0.5, "ethane": 0.5}).notes
    )
    with pytest.raises(MissingParameters, match="SRK interaction parameter of methane and ethane"):
        model_of({"methane": 0.5, "ethane": 0.5}, eos="SRK", missing="refuse")


def test_without_its_parameter_ethanol_and_water_part_falsely_and_the_rows_say_so(model_of):
    loose = model_of(WASH).columns(("T", "p"), 300.0, 1e5)
    assert "two liquids" in loose.failed[0]
    bound = model_of(WASH, interaction={("ethanol", "water"): -0.1}, missing="refuse")
    assert not bound.columns(("T", "p"), 300.0, 1e5).failed
    assert not any("interaction" in note for note in bound.notes)


@pytest.mark.parametrize(
    "pair", [("water", "ethanol"), "ethanol / water", ("64-17-5", "7732-18-5")]
)
def test_a_given_parameter_may_be_named_in_any_way(model_of, pair):
    kij = {pair: -0.09}
    there = model_of(WASH, interaction=kij).columns(("T", "p"), 350.0, 2e7)
    plain = model_of(WASH, interaction={("ethanol", "water"): -0.09}).columns(
        ("T", "p"), 350.0, 2e7
    )
    assert there.h == plain.h


def test_a_component_without_parameters_is_refused_and_told_what_is_missing():
    unknown = Component("000-00-0", "unobtainium", "Xx", 0.1, (("Xx", 1.0),))
    with pytest.raises(MissingParameters) as caught:
        CubicBackend().open(FluidSpec((unknown,), (1.0,)), {})
    for what in ("critical temperature", "critical pressure", "acentric factor", "heat capacity"):
        assert what in str(caught.value)


@pytest.mark.parametrize(
    ("eos", "m"), [("PR", 0.37464 + 1.54226 * 0.0372), ("SRK", 0.480 + 1.574 * 0.0372)]
)
def test_air_is_refused_above_the_kink_of_alpha(model_of, eos, m):
    air = model_of({"nitrogen": 0.7812, "oxygen": 0.2096, "argon": 0.0092}, eos=eos)
    # Nitrogen is the first to turn: Tc = 126.192 K, acentric factor 0.0372.
    assert air.limits.T_max == pytest.approx(126.192 * (1.0 + 1.0 / m) ** 2, rel=0.003)
    above = air.columns(("T", "p"), air.limits.T_max + 1.0, 1e5)
    assert "outside" in above.failed[0]
    assert np.isnan(above.h)
    assert not air.columns(("T", "p"), air.limits.T_max, 1e5).failed


def test_bad_rows_are_marked_and_the_others_computed(model_of):
    for fluid in ("propane", GAS):
        model = model_of(fluid)
        T = np.array([300.0, 10.0, 1e4, np.nan, 300.0, 300.0, 400.0])
        p = np.array([1e5, 1e5, 1e5, 1e5, -1.0, 1e9, 1e6])
        states = model.columns(("T", "p"), T, p)
        assert sorted(states.failed) == [1, 2, 3, 4, 5]
        assert all(states.failed.values())
        for name in ("T", "p", "v", "h", "s"):
            column = getattr(states, name)
            assert column.dtype == np.float64
            assert np.flatnonzero(np.isnan(column)).tolist() == [1, 2, 3, 4, 5]
        beyond = model.columns(("p", "h"), np.full(3, 1e5), np.array([-1e9, 0.0, 1e9]))
        assert sorted(beyond.failed) == [0, 2]
        wet = model.columns(("T", "quality"), np.full(3, 250.0), np.array([-0.1, 0.5, 1.1]))
        assert sorted(wet.failed) == [0, 2]


def test_a_pure_state_on_the_saturation_line_is_not_guessed_from_temperature_and_pressure(model_of):
    model = model_of("propane")
    p = model.columns(("T", "quality"), 300.0, 0.0).p
    for factor in (1.0, 1.0 + 5e-7, 1.0 - 5e-7):
        row = model.columns(("T", "p"), 300.0, p * factor)
        assert "saturation pressure" in row.failed[0]
        assert "give the quality" in row.failed[0]
    below, above = (model.columns(("T", "p"), 300.0, p * f) for f in (1.0 - 2e-6, 1.0 + 2e-6))
    assert below.v > 10.0 * above.v


def test_quality_above_the_critical_point_fails(model_of):
    model = model_of("propane")
    assert "critical point" in model.columns(("T", "quality"), 400.0, 0.5).failed[0]
    assert "critical point" in model.columns(("p", "quality"), 5e6, 0.5).failed[0]


def test_a_scalar_call_gives_plain_floats_equal_to_those_of_a_column(model_of):
    for fluid in ("propane", GAS):
        model = model_of(fluid)
        one = model.columns(("T", "p"), 320.0, 3e5)
        many = model.columns(("T", "p"), np.array([250.0, 320.0]), np.array([2e6, 3e5]))
        for name in ("T", "p", "v", "h", "s", "quality"):
            assert type(getattr(one, name)) is float
            assert getattr(one, name) == pytest.approx(
                getattr(many, name)[1], rel=1e-11, nan_ok=True
            )


def test_an_empty_call_gives_empty_columns(model_of):
    for fluid in ("propane", GAS):
        for pair in model_of(fluid).native_pairs:
            states = model_of(fluid).columns(pair, np.empty(0), np.empty(0))
            assert states.h.shape == (0,)


def test_a_pair_the_model_does_not_solve_is_a_bad_call(model_of):
    with pytest.raises(PairRefused, match="p with h"):
        model_of("propane").columns(("h", "s"), 0.0, 0.0)


@pytest.mark.parametrize("fluid", ["propane", GAS], ids=str)
def test_a_model_pickled_into_a_fresh_process_gives_the_same_numbers(model_of, fluid, tmp_path):
    model = model_of(fluid, eos="SRK")
    path = tmp_path / "model.pickle"
    path.write_bytes(pickle.dumps(model))
    code = (
        "import pickle, sys\n"
        "model = pickle.load(open(sys.argv[1], 'rb'))\n"
        "print(repr(model.columns(('p', 'h'), 5e5, -2e5).s))\n"
    )
    told = subprocess.run(
        [sys.executable, "-c", code, os.fspath(path)], check=True, capture_output=True, text=True
    )
    assert float(told.stdout) == model.columns(("p", "h"), 5e5, -2e5).s


@pytest.mark.parametrize("fluid", ["propane", GAS], ids=str)
def test_threads_that_share_a_model_do_not_disturb_each_other(model_of, fluid):
    model = model_of(fluid)
    p = np.linspace(1e5, 3e6, 24)
    h = np.linspace(-2e5, 2e5, 24)
    alone = [model.columns(("p", "h"), float(a), float(b)).s for a, b in zip(p, h, strict=True)]
    assert np.isfinite(alone).all()
    rows = list(zip(p.tolist(), h.tolist(), strict=True))
    with ThreadPoolExecutor(6) as pool:
        together = list(pool.map(lambda row: model.columns(("p", "h"), *row).s, rows))
    assert together == alone


def test_borders_of_a_dome_are_found_once_for_calls_at_the_same_pressure(model_of, monkeypatch):
    from lostwork_plugins.cubic import borders

    found = []
    at_quality = borders.at_quality

    def counted(*given, **options):
        found.append(given)
        return at_quality(*given, **options)

    monkeypatch.setattr(borders, "at_quality", counted)
    model, p = model_of(GAS), np.full(3, 2e6)
    wet = model.columns(("p", "quality"), p, np.array([0.4, 0.5, 0.8]))
    searched = [model.columns(("p", "h"), p, wet.h) for _ in range(5)]
    assert len(found) == 2, "one bubble point and one dew point"
    assert all(np.array_equal(columns.T, searched[0].T) for columns in searched)
    np.testing.assert_allclose(searched[0].T, wet.T, rtol=1e-9)
