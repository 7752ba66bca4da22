"""What cannot be run is refused in words that say which value to change."""

from __future__ import annotations

import re

import pytest

import lostwork as lw


@pytest.fixture(scope="module")
def air_stream(constant_air):
    return lw.Stream(constant_air.state(T="350 K", p="4 bar"), rate="1 kg/s")


@pytest.fixture(scope="module")
def cold_water():
    water = lw.Fluid("water", backend="coolprop")
    return lw.Stream(water.state(T="20 degC", p="4 bar"), rate="1 kg/s")


WRONG_FIELDS = [
    ("throttling", {}, "p_out: give exactly one of p_out, pressure_ratio, pressure_drop; got none"),
    ("throttling", {"p_out": "2 bar", "pressure_ratio": 2}, "got p_out, pressure_ratio"),
    ("throttling", {"p_out": "2 kg"}, "p_out: '2 kg' has the wrong dimension"),
    ("throttling", {"p_out": 2.0}, "p_out: 2.0 has no unit"),
    ("throttling", {"outlet": "2 bar"}, "outlet: is no field of throttling"),
    ("compression", {"p_out": "9 bar"}, "exactly one of isentropic_efficiency, polytropic"),
    ("compression", {"isentropic_efficiency": 0.8}, "exactly one of p_out, pressure_ratio"),
    ("compression", {"p_out": "9 bar", "isentropic_efficiency": 1.3}, "above 0 and up to 1"),
    (
        "compression",
        {"p_out": "9 bar", "isentropic_efficiency": 0.8, "heat_loss": "3 kW"},
        "heat_loss_at: is needed with heat_loss",
    ),
    (
        "compression",
        {"p_out": "9 bar", "isentropic_efficiency": 0.8, "heat_loss_at": "300 K"},
        "heat_loss_at: means nothing without heat_loss or heat_loss_fraction",
    ),
    (
        "expansion",
        {"p_out": "1 bar", "T_out": "300 K", "mechanical_efficiency": 0.9},
        "mechanical_loss_at: is needed with mechanical_efficiency",
    ),
    ("heating", {"T_out": "400 K"}, "exactly one of at, electric; got none"),
    ("heating", {"T_out": "400 K", "at": "500 K", "electric": True}, "got at, electric"),
    ("heating", {"at": "500 K"}, "exactly one of T_out, duty, quality_out"),
    ("cooling", {"T_out": "300 K"}, "at: is needed"),
    ("nozzle", {"p_out": "2 bar"}, "give exactly two of p_out"),
    ("nozzle", {"p_out": "2 bar", "pressure_drop": "2 bar"}, "at most one of p_out"),
    ("diffuser", {"velocity_out": "20 m/s"}, "give exactly two of p_out"),
    ("pipe", {"heat_leak": "2 kW"}, "heat_leak_at: is needed with heat_leak"),
    ("pipe", {"heat_leak": "2 kW", "T_out": "300 K", "heat_leak_at": "300 K"}, "at most one of"),
    ("splitting", {"fractions": {"a": 1.0}}, "two or more outlets"),
    ("splitting", {"fractions": {"a": 0.5, "b": 0.4}}, "sum to 1"),
    ("flash-separation", {"T_out": "300 K"}, "at: is needed with T_out"),
]


@pytest.mark.parametrize(("kind", "fields", "words"), WRONG_FIELDS)
def test_fields_that_do_not_go_together_are_named(air_stream, kind, fields, words) -> None:
    with pytest.raises(lw.FieldError, match=re.escape(words)):
        lw.process(kind, name="step", inlet=air_stream, **fields)


WRONG_WAYS = [
    ("throttling", {"p_out": "5 bar"}, "lower p_out or take a compression"),
    ("throttling", {"pressure_drop": "4 bar"}, "give a smaller pressure_drop"),
    ("throttling", {"pressure_ratio": 0.5}, "1 or more"),
    ("expansion", {"p_out": "5 bar", "isentropic_efficiency": 0.8}, "lower p_out"),
    ("compression", {"p_out": "3 bar", "isentropic_efficiency": 0.8}, "raise p_out"),
    ("compression", {"p_out": "9 bar", "T_out": "340 K"}, "the other way round"),
    (
        "compression",
        {
            "p_out": "9 bar",
            "isentropic_efficiency": 0.8,
            "heat_loss": "9 kW",
            "heat_loss_at": "900 K",
        },
        "from the colder to the hotter",
    ),
    (
        "compression",
        {
            "p_out": "9 bar",
            "isentropic_efficiency": 0.8,
            "heat_loss": "9 kJ",
            "heat_loss_at": "300 K",
        },
        "heat_loss is to be a power",
    ),
    ("pumping", {"p_out": "9 bar", "isentropic_efficiency": 0.8}, "vapour enters the pump"),
    ("heating", {"T_out": "300 K", "at": "500 K"}, "take a cooling step"),
    ("cooling", {"T_out": "400 K", "at": "300 K"}, "take a heating step"),
    ("heating", {"T_out": "400 K", "at": "380 K"}, "from the colder to the hotter"),
    ("cooling", {"T_out": "320 K", "at": "330 K"}, "from the colder to the hotter"),
    ("pipe", {"T_out": "340 K", "heat_leak_at": "345 K"}, "from the colder to the hotter"),
    ("nozzle", {"p_out": "5 bar", "isentropic_efficiency": 0.9}, "lower p_out"),
    ("diffuser", {"p_out": "5 bar", "isentropic_efficiency": 0.9}, "higher velocity"),
    ("diffuser", {"velocity_out": "90 m/s", "isentropic_efficiency": 0.9}, "the wrong way"),
    ("flash-separation", {"p_out": "1 bar"}, "modelled without a liquid"),
]


@pytest.mark.parametrize(("kind", "fields", "words"), WRONG_WAYS)
def test_the_wrong_direction_is_refused_with_advice(air_stream, kind, fields, words) -> None:
    step = lw.process(kind, name="step 7", inlet=air_stream, **fields)
    with pytest.raises(lw.ProcessError, match=re.escape(words)) as refused:
        step.solve()
    assert refused.value.process == "step 7"


def test_exchanged_hot_and_cold_are_noticed(air_stream, cold_water) -> None:
    step = lw.process("heat-exchange", hot=cold_water, cold=air_stream, duty="1 kW")
    with pytest.raises(lw.ProcessError, match="exchange hot and cold"):
        step.solve()


@pytest.mark.parametrize(
    ("given", "words"),
    [
        ({"minimum_approach": "90 K"}, "more than the inlets are apart"),
        ({"T_out_hot": "360 K"}, "from the cold to the hot stream"),
        ({"duty": "80 kW"}, "temperatures cross"),
        ({"duty": "1 kW", "heat_loss": "1 kW", "heat_loss_at": "500 K"}, "hotter than the hot"),
    ],
)
def test_an_exchanger_that_cannot_be_is_refused(air_stream, cold_water, given, words) -> None:
    step = lw.process("heat-exchange", hot=air_stream, cold=cold_water, **given)
    with pytest.raises(lw.ProcessError, match=words):
        step.solve()


def test_streams_of_different_backends_do_not_mix(air_stream, cold_water) -> None:
    step = lw.process("mixing", inflows=[air_stream, cold_water])
    with pytest.raises(lw.ProcessError, match="different backends or options"):
        step.solve()


def test_a_mixer_does_not_raise_pressure(air_stream) -> None:
    step = lw.process("mixing", inflows=[air_stream, air_stream], p_out="5 bar")
    with pytest.raises(lw.ProcessError, match="above the lowest inlet pressure"):
        step.solve()


def test_a_composition_that_varies_by_row_asks_for_one_row_at_a_time() -> None:
    streams = [
        lw.Stream(lw.Fluid(name, backend="ideal-gas").state(T="300 K", p="1 bar"), rate=rate)
        for name, rate in (("nitrogen", ["1 kg/s", "2 kg/s"]), ("oxygen", "1 kg/s"))
    ]
    with pytest.raises(lw.ProcessError, match="take the rows one by one"):
        lw.process("mixing", inflows=streams).solve()


def test_rows_of_a_mixture_are_flashed_one_by_one() -> None:
    gas = lw.Fluid({"methane": 0.6, "propane": 0.4}, backend="cubic")
    inlet = lw.Stream(gas.state(T="260 K", p="30 bar"), rate="1 kg/s")
    step = lw.process("flash-separation", inlet=inlet, p_out=["10 bar", "12 bar"])
    with pytest.raises(lw.ProcessError, match="take the rows one by one"):
        step.solve()


def test_a_drum_above_the_critical_pressure_has_nothing_to_part(cold_water) -> None:
    gas = lw.Fluid("carbon dioxide", backend="coolprop")
    inlet = lw.Stream(gas.state(T="310 K", p="120 bar"), rate="1 kg/s")
    with pytest.raises(lw.ProcessError, match="above the critical pressure"):
        lw.process("flash-separation", inlet=inlet, p_out="90 bar").solve()


def test_given_properties_and_unknown_rates_are_for_measured_steps(constant_air) -> None:
    open_rate = lw.Stream(constant_air.state(T="350 K", p="4 bar"), name="feed")
    with pytest.raises(lw.ProcessError, match="the rate of the stream 'feed' is not known"):
        lw.process("throttling", inlet=open_rate, p_out="1 bar").solve()


def test_nothing_measured_is_no_step(air_stream) -> None:
    with pytest.raises(lw.FieldError, match="outflows: give one stream or more"):
        lw.process("as-measured", inflows=[air_stream], outflows={})
