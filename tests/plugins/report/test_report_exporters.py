"""Reports: the table for people, JSON and CSV for programs."""

from __future__ import annotations

import csv
import io
import json
from importlib.resources import files

import jsonschema
import numpy as np
import pytest

import lostwork as lw

SITE = lw.Surroundings(T="300 K", p="1 bar")
PLAIN = lw.Presentation(title="Let-down station", note="Invented.")


def export(name, subject, presentation=PLAIN):
    exporter: lw.Exporter = lw.plugins().exporter(name).load()
    return exporter(subject, presentation)


def step(name, gain, *, rate="2 kg/s", h_out="500 kJ/kg", **extra):
    """A step whose fluid gains `gain` J/kg/K of entropy."""
    gains = [gain] if np.ndim(gain) == 0 else gain
    s_out = [f"{1000.0 + g!s} J/kg/K" for g in gains]
    inlet = lw.GivenState(h="500 kJ/kg", s="1000 J/kg/K")
    outlet = lw.GivenState(h=h_out, s=s_out[0] if np.ndim(gain) == 0 else s_out)
    return lw.Balance(
        name=name,
        inflows=[lw.Stream(inlet, rate=rate, name=f"{name} in")],
        outflows=[lw.Stream(outlet, rate=rate, name=f"{name} out")],
        surroundings=SITE,
        **extra,
    )


@pytest.fixture
def audit():
    purpose = lw.Purpose(
        expended=10e3, recovered=7.5e3, expended_name="work", recovered_name="stream"
    )
    return lw.Audit(
        [
            step("valve", 20.0, mechanisms={"pressure drop": 40.0}),
            step("machine", 5.0, mechanisms={"friction": 10.0}, purpose=purpose),
        ],
        remarks=[lw.Finding(step="valve", check="noise", text="it whistles")],
    )


@pytest.fixture
def impossible():
    return lw.Audit([step("valve", 20.0), step("claimed device", -1.0)])


@pytest.fixture
def array():
    return lw.Audit([step("valve", [20.0, -1.0, 10.0, -2.0])])


@pytest.fixture
def comparison():
    audits = {"one": lw.Audit([step("valve", 20.0)]), "other": lw.Audit([step("valve", -1.0)])}
    failed = lw.StateNotFound(fluid="gas", given="T and p", reason="it would condense")
    return lw.Comparison("Let-down station", audits, {"third": failed})


# --- table


def row_of(text, name):
    (line,) = [line for line in text.splitlines() if f" {name} " in line and "%" not in line][:1]
    return line.split()


def test_the_table_ranks_losses_with_share_efficiency_verdict_and_mechanism(audit):
    text = export("table", audit)
    # 2 kg/s that gain 20 J/kg/K against 300 K lose 12 kW; 5 J/kg/K lose 3 kW.
    assert row_of(text, "valve")[:6] == ["1", "valve", "12.00", "80.0", "-", "possible"]
    assert row_of(text, "machine")[:6] == ["2", "machine", "3.000", "20.0", "75.0", "possible"]
    assert row_of(text, "machine")[-1] == "friction"
    assert " kW " in text
    total = next(line for line in text.splitlines() if line.strip().startswith("all steps"))
    assert total.split() == ["all", "steps", "15.00", "100.0"]


def test_the_table_says_what_was_lost_by_mechanism_and_around_the_whole(audit):
    text = export("table", audit)
    by_mechanism = text[text.index("by mechanism") :]
    assert by_mechanism.index("pressure drop") < by_mechanism.index("friction")
    assert "work lost, sum of the steps    15.00   kW" in text
    assert "work lost, around the whole    15.00   kW" in text
    assert "valve, noise: it whistles" in text


def test_title_and_note_stand_above(audit):
    assert export("table", audit).startswith("Let-down station\nInvented.\n")


def test_a_file_gets_no_colour_and_nothing_cut_off(audit):
    long = "let-down valve " * 10 + "north"
    text = export("table", lw.Audit([step(long, 20.0)]))
    assert "\x1b" not in text
    assert long in text
    assert "…" not in text
    assert text.isascii()


@pytest.mark.parametrize("width", [60, 80, 132])
def test_in_a_narrow_terminal_names_are_folded_and_numbers_are_not(audit, width):
    named = lw.Audit([step("let-down valve " * 6, 20.0), step("x" * 90, 5.0)])
    text = export("table", named, lw.Presentation(width=width))
    ranked = text[text.index("Work lost, step") : text.index("Work lost, by")]
    assert max(len(line) for line in ranked.splitlines()) <= width
    for figure in ("12.00", "3.000", "80.0", "possible"):
        assert figure in ranked
    assert "…" not in text
    letters = "".join(ranked.split())
    assert letters.count("x") >= 90


def test_an_impossible_step_cannot_be_missed_without_colour(impossible):
    text = export("table", impossible)
    assert row_of(text, "device")[0] == "!!"
    assert "IMPOSSIBLE" in row_of(text, "device")
    assert text.rstrip().splitlines()[-1] == "!! 1 of 2 steps cannot stand as described."
    assert "!! IMPOSSIBLE: claimed device: 2 W/K of entropy would have to be destroyed" in text


def test_colour_is_there_only_where_it_is_understood(impossible):
    assert "\x1b[" in export("table", impossible, lw.Presentation(width=100, colour=True))
    assert "\x1b[" not in export("table", impossible, lw.Presentation(width=100))


def test_a_step_that_does_not_close_is_as_loud():
    text = export("table", lw.Audit([step("heater", 20.0, h_out="600 kJ/kg")]))
    assert "UNBALANCED" in text
    assert "!! UNBALANCED: heater: energy does not close" in text


def test_a_shared_stream_that_differs_at_its_ends_is_as_loud():
    first = step("first", 20.0)
    entering = lw.Stream(
        lw.GivenState(h="500 kJ/kg", s="1000 J/kg/K"), rate="3 kg/s", name="first out"
    )
    leaving = lw.Stream(lw.GivenState(h="500 kJ/kg", s="1010 J/kg/K"), rate="3 kg/s")
    second = lw.Balance(name="second", inflows=[entering], outflows=[leaving], surroundings=SITE)
    text = export("table", lw.Audit([first, second]))
    assert "!! DIFFERS: first out, from first to second: mass is 1 kg more where it enters" in text
    assert "1 shared streams differ" not in text
    assert "1 shared stream differs" in text


def test_a_batch_shows_what_stands_inside_before_and_after():
    gas = lw.Fluid("nitrogen", backend="ideal-gas")
    before = lw.Content(gas.state(T="300 K", p="10 bar"), mass="3 kg")
    after = lw.Content(gas.state(T="300 K", p="5 bar"), mass="3 kg")
    balance = lw.Balance(name="free expansion", before=before, after=after, surroundings=SITE)
    text = export("table", lw.Audit([balance]))
    assert "mass inside before " in text
    assert "mass in " not in text
    assert " kJ " in text


def test_remarks_are_folded_to_the_terminal():
    words = "a remark of many words " * 20
    audit = lw.Audit([step("valve", 20.0)], remarks=[lw.Finding("valve", "noise", words)])
    text = export("table", audit, lw.Presentation(width=70))
    assert max(len(line) for line in text.splitlines()) <= 70


def test_an_impossible_loss_next_to_nothing_is_shown_in_full():
    text = export("table", lw.Audit([step("valve", 20.0), step("claim", -1e-6)]))
    assert row_of(text, "claim")[:3] == ["!!", "claim", "-6e-07"]


def test_round_off_is_not_shown_as_a_result():
    text = export("table", lw.Audit([step("valve", 20.0), step("pipe", 1e-12)]))
    assert row_of(text, "pipe")[2] in ("0", "~0")
    assert row_of(text, "pipe")[-2:] == ["reversible", "-"]


def test_an_array_shows_means_the_gravest_verdict_and_its_rows(array):
    text = export("table", array)
    assert "means over 4 rows; rows are counted from 0" in text
    assert "IMPOSSIBLE (rows 1, 3)" in text
    assert row_of(text, "valve")[2] == "4.050"


def test_the_unit_fits_the_largest_loss():
    for rate, unit, figure in (("0.002 kg/s", "W", "12.00"), ("2000 kg/s", "MW", "12.00")):
        text = export("table", lw.Audit([step("valve", 20.0, rate=rate)]))
        assert f" {unit} " in text
        assert row_of(text, "valve")[2] == figure


def test_text_that_looks_like_markup_is_printed_as_it_is():
    text = export("table", lw.Audit([step("valve [red]north[/red] :boom:", 20.0)]))
    assert "valve [red]north[/red] :boom:" in text


def test_a_comparison_shows_every_backend_and_what_changes(comparison):
    text = export("table", comparison)
    assert "CHANGES: possible (one), IMPOSSIBLE (other)" in text
    assert "third could not compute this case:" in text
    assert "it would condense" in text
    assert "!! The verdict hangs on the backend for: valve." in text


# --- JSON


def schema(name):
    text = files("lostwork_plugins.report").joinpath(f"{name}.schema.json").read_text("utf-8")
    loaded = json.loads(text)
    jsonschema.Draft202012Validator.check_schema(loaded)
    return jsonschema.Draft202012Validator(loaded)


@pytest.mark.parametrize("which", ["audit", "impossible", "array"])
def test_the_json_of_an_audit_keeps_to_its_schema(which, request):
    written = json.loads(export("json", request.getfixturevalue(which)))
    schema("audit").validate(written)
    assert written["format"] == "lostwork-audit"
    assert written["version"] == 1


def test_the_json_of_a_comparison_keeps_to_its_schema(comparison):
    written = json.loads(export("json", comparison))
    schema("comparison").validate(written)
    assert written["failures"]["third"].startswith("gas at T and p")


def test_the_schema_refuses_what_is_no_audit(audit):
    written = json.loads(export("json", audit))
    for spoil in (
        {"version": 2},
        {"status": "fine"},
        {"steps": []},
        {"work_lost": "15 kW"},
        {"surprise": 1},
    ):
        assert not schema("audit").is_valid({**written, **spoil})


def test_the_json_holds_the_figures_in_full_and_in_SI(audit):
    written = json.loads(export("json", audit))
    valve, machine = written["steps"]
    assert valve["work_lost"] == audit.balances[0].work_lost_si
    assert valve["losses"] == {"pressure drop": pytest.approx(12e3)}
    assert valve["efficiency"] is None
    assert machine["efficiency"] == 0.75
    assert machine["purpose"]["expended_name"] == "work"
    assert written["units"]["work"] == "W"
    assert written["surroundings"] == {"T": 300.0, "p": 1e5}


def test_the_json_of_an_array_has_a_figure_for_each_row(array):
    (valve,) = json.loads(export("json", array))["steps"]
    assert valve["shape"] == [4]
    assert valve["work_lost"] == pytest.approx([12e3, -600.0, 6e3, -1200.0])
    assert valve["verdict"]["statuses"] == ["possible", "impossible", "possible", "impossible"]


def test_the_json_has_no_NaN(audit):
    reversible = lw.Audit([step("pipe", 0.0)])
    written = json.loads(
        export("json", reversible), parse_constant=lambda word: pytest.fail(f"{word} in JSON")
    )
    assert written["steps"][0]["share"] is None


# --- CSV


def rows(text):
    return list(csv.DictReader(io.StringIO(text)))


def test_the_csv_has_a_row_for_each_step(audit):
    valve, machine = rows(export("csv", audit))
    assert (valve["rank"], valve["step"], valve["row"]) == ("1", "valve", "")
    assert float(valve["work lost, W"]) == pytest.approx(12e3)
    assert float(valve["entropy generated, W/K"]) == pytest.approx(40.0)
    assert valve["efficiency, 1"] == ""
    assert float(machine["efficiency, 1"]) == 0.75
    assert float(machine["by friction, W"]) == pytest.approx(3e3)
    assert machine["by pressure drop, W"] == ""


def test_the_csv_has_a_row_for_each_row_of_an_array(array):
    read = rows(export("csv", array))
    assert [row["row"] for row in read] == ["0", "1", "2", "3"]
    assert [row["verdict"] for row in read] == ["possible", "impossible"] * 2
    assert float(read[3]["work lost, W"]) == pytest.approx(-1200.0)


def test_the_csv_of_a_comparison_has_a_row_for_each_step_and_backend(comparison):
    read = rows(export("csv", comparison))
    assert [(row["backend"], row["verdict"]) for row in read] == [
        ("one", "possible"),
        ("other", "impossible"),
    ]
    assert {row["verdict changes"] for row in read} == {"yes"}


def test_csv_heads_are_the_same_for_one_point_and_for_many(audit, array):
    first, second = (set(rows(export("csv", a))[0]) for a in (audit, array))
    assert {head for head in first if not head.startswith("by ")} == {
        head for head in second if not head.startswith("by ")
    }
