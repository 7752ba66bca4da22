"""The command: what it prints, and how it ends."""

from __future__ import annotations

import json
import os
import subprocess
import sys

import pytest

import lostwork as lw
from lostwork.cases import running
from lostwork.cases.command import main
from lostwork.cases.progress import Progress

CASE = """
[case]
title = "Two valves"
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
[streams.warm]
fluid = "air"
T = "40 degC"
p = "9 bar"
rate = "2 kg/s"
[steps.first]
type = "throttling"
inlet = "feed"
p_out = "5 bar"
[steps.second]
type = "throttling"
inlet = "first"
p_out = "2 bar"
"""

IMPOSSIBLE = """
[steps.claim]
type = "as-measured"
inflows = ["second"]
outflows = {out = "feed_again"}
heat = [{amount = "unknown", at = "15 degC"}]
[streams.feed_again]
fluid = "air"
T = "20 degC"
p = "9 bar"
"""

UNBALANCED = IMPOSSIBLE.replace('heat = [{amount = "unknown", at = "15 degC"}]', "")


@pytest.fixture
def case_file(tmp_path):
    file = tmp_path / "valves.toml"
    file.write_text(CASE)
    return file


def test_an_audit_that_can_be_ends_with_zero(case_file, capsys):
    assert main(["audit", str(case_file)]) == 0
    told = capsys.readouterr()
    assert told.err == ""
    assert "Two valves" in told.out
    assert "pressure drop" in told.out
    assert "can run as described" in told.out


def test_a_step_that_is_impossible_ends_with_one(case_file, capsys):
    case_file.write_text(CASE + IMPOSSIBLE)
    assert main(["audit", str(case_file)]) == 1
    assert "!! IMPOSSIBLE: claim" in capsys.readouterr().out


def test_a_step_that_does_not_close_ends_with_one(case_file, capsys):
    case_file.write_text(CASE + UNBALANCED.replace("20 degC", "200 degC"))
    assert main(["audit", str(case_file)]) == 1
    assert "!! UNBALANCED: claim" in capsys.readouterr().out


def test_a_case_that_is_wrong_ends_with_two_and_prints_nothing(case_file, capsys):
    case_file.write_text(CASE.replace('p_out = "5 bar"', 'p_out = "5"'))
    assert main(["audit", str(case_file)]) == 2
    told = capsys.readouterr()
    assert told.out == ""
    assert told.err.count("\n") == 1


def test_two_routes_that_disagree_are_told_as_a_defect(case_file, capsys, monkeypatch):
    def disagree(self, progress=None):
        raise lw.InternalDisagreement(what="exergy destroyed", first="1 W", second="2 W")

    monkeypatch.setattr(lw.Case, "audit", disagree)
    assert main(["audit", str(case_file)]) == 3
    told = capsys.readouterr().err
    assert "defect: exergy destroyed: two routes disagree" in told
    assert "Traceback" not in told


def test_a_bug_is_told_as_a_bug_with_its_traceback(case_file, capsys, monkeypatch):
    def fail(self, progress=None):
        raise ZeroDivisionError("a bug")

    monkeypatch.setattr(lw.Case, "audit", fail)
    assert main(["audit", str(case_file)]) == 3
    told = capsys.readouterr().err
    assert "ZeroDivisionError: a bug" in told
    assert "please report it" in told


def test_an_interruption_ends_as_a_shell_counts_it(case_file, capsys, monkeypatch):
    def interrupt(self, progress=None):
        raise KeyboardInterrupt

    monkeypatch.setattr(lw.Case, "audit", interrupt)
    assert main(["audit", str(case_file)]) == 130
    assert "interrupted" in capsys.readouterr().err


def test_the_form_is_told_by_the_suffix_of_the_output(case_file, tmp_path, capsys):
    target = tmp_path / "report.json"
    assert main(["audit", str(case_file), "--output", str(target)]) == 0
    assert json.loads(target.read_text())["title"] == "Two valves"
    assert capsys.readouterr().out == ""
    assert [path.name for path in tmp_path.iterdir() if path.name.startswith(".")] == []


def test_a_form_that_is_named_wins_over_the_suffix(case_file, tmp_path):
    target = tmp_path / "report.json"
    assert main(["audit", str(case_file), "--as", "csv", "--output", str(target)]) == 0
    assert target.read_text().startswith("rank,step")


def test_an_output_is_replaced_whole_or_left_as_it_was(case_file, tmp_path):
    target = tmp_path / "report.txt"
    target.write_text("earlier")
    case_file.write_text(CASE.replace("9 bar", "9"))
    assert main(["audit", str(case_file), "--output", str(target)]) == 2
    assert target.read_text() == "earlier"


def test_another_backend_is_taken_for_one_run(case_file, capsys):
    assert main(["audit", str(case_file), "--backend", "cubic", "--as", "csv"]) == 0
    cubic = capsys.readouterr().out
    assert main(["audit", str(case_file), "--as", "csv"]) == 0
    assert capsys.readouterr().out != cubic


def test_backends_are_compared(case_file, capsys):
    assert main(["compare", str(case_file), "ideal-gas", "cubic"]) == 0
    told = capsys.readouterr().out
    assert "by property backend" in told
    assert "The verdicts are the same under ideal-gas, cubic." in told


def test_plugins_are_listed_with_version_and_what_they_offer(capsys):
    assert main(["plugins"]) == 0
    told = capsys.readouterr().out
    for words in (
        "ideal_gas (lostwork ",
        "backend ideal-gas",
        "process throttling",
        "nothing fail",
    ):
        assert words in told


def test_a_plugin_that_failed_is_listed_with_reason_and_fix(capsys, monkeypatch):
    from importlib.metadata import EntryPoint

    from lostwork.plugins import Plugins

    broken = EntryPoint("broken", "no_such_package_of_ours", "lostwork")
    monkeypatch.setattr(running, "plugins", lambda: Plugins([broken]))
    assert main(["plugins"]) == 0
    told = capsys.readouterr().out
    assert "failed to load" in told
    assert "no_such_package_of_ours" in told
    assert "fix:" in told


def test_a_missing_extra_is_listed_with_the_line_that_installs_it(capsys, monkeypatch):
    from lostwork.plugins.descriptors import Descriptor

    monkeypatch.setattr(Descriptor, "missing", property(lambda self: self.requires))
    assert main(["plugins"]) == 0
    assert 'NOT AVAILABLE, CoolProp is missing: pip install "lostwork[coolprop]"' in (
        capsys.readouterr().out
    )


def test_fields_of_a_type_are_listed_with_what_they_take(capsys):
    assert main(["fields", "throttling"]) == 0
    told = capsys.readouterr().out
    for words in ("inlet", "needed; the name of a stream", "p_out", "an absolute pressure"):
        assert words in told
    assert 'type = "throttling"' in told


def test_every_installed_process_type_can_be_listed(capsys):
    assert main(["fields"]) == 0
    listed = capsys.readouterr().out
    for name in lw.plugins().processes:
        assert name in listed
        assert main(["fields", name]) == 0, capsys.readouterr().err


@pytest.mark.parametrize("arguments", [["--help"], ["--version"], ["audit", "--help"]])
def test_help_ends_with_zero(arguments, capsys):
    assert main(arguments) == 0
    assert "lostwork" in capsys.readouterr().out


def run(*arguments, env=None):
    return subprocess.run(
        [sys.executable, *arguments],
        capture_output=True,
        text=True,
        timeout=120,
        check=False,
        env=env,
    )


def test_help_imports_no_heavy_library():
    code = (
        "import sys; from lostwork.cases.command import main; main(['--help']); "
        "heavy = {'CoolProp', 'thermo', 'pint', 'numpy', 'rich', 'pydantic'} & set(sys.modules); "
        "sys.exit(', '.join(heavy) or 0)"
    )
    ended = run("-c", code)
    assert ended.returncode == 0, ended.stderr


def test_a_reader_that_leaves_early_does_not_change_the_exit_code(case_file):
    case_file.write_text(CASE + IMPOSSIBLE)
    script = f'"{sys.executable}" -m lostwork audit "{case_file}" | true; exit ${{PIPESTATUS[0]}}'
    ended = subprocess.run(
        ["bash", "-c", script], capture_output=True, text=True, timeout=120, check=False
    )
    assert ended.returncode == 1
    assert ended.stderr == ""


def test_a_terminal_that_knows_ascii_only_is_served(case_file):
    case_file.write_text(CASE.replace("Two valves", "Zwei Dämpfer – kalt"))
    ended = run(
        "-m",
        "lostwork",
        "audit",
        str(case_file),
        env=os.environ | {"PYTHONIOENCODING": "ascii"},
    )
    assert ended.returncode == 0, ended.stderr
    assert "Zwei D?mpfer" in ended.stdout


def test_progress_is_silent_where_nobody_watches(capsys):
    with Progress() as progress:
        progress(0, 2, "fluid air")
    assert capsys.readouterr().err == ""


def test_progress_is_shown_after_a_while_where_somebody_watches(monkeypatch, capsys):
    import time

    from lostwork.cases import progress as module

    monkeypatch.setattr(sys.stderr, "isatty", lambda: True, raising=False)
    monkeypatch.setattr(module, "_PATIENCE", 0.01)
    monkeypatch.setenv("FORCE_COLOR", "1")
    with Progress() as progress:
        progress(1, 4, "step compressor")
        time.sleep(0.5)
        progress(2, 4, "step valve")
    assert "step compressor" in capsys.readouterr().err
