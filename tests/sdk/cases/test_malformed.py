"""Malformed case files and calls: each is a clear error of ours, no traceback, exit 2.

Every entry changes one thing in a case that is sound, and says which table, field and expectation
the message must name.
"""

from __future__ import annotations

import os
import subprocess
import sys

import pytest

import lostwork as lw
from lostwork.cases.command import main
from lostwork.cases.text import LARGEST
from lostwork.plugins.descriptors import Descriptor

SOUND = """
[case]
title = "Air compressor and let-down valve"
backend = "ideal-gas"

[surroundings]
T = "15 degC"
p = "1.013 bar"

[fluids.air]
components = "air"

[streams.suction]
fluid = "air"
T = "20 degC"
p = "1 bar"
rate = "2 kg/s"

[steps.compressor]
type = "compression"
inlet = "suction"
p_out = "8 bar"
isentropic_efficiency = "78 %"

[steps.valve]
type = "throttling"
inlet = "compressor"
p_out = "3 bar"
"""

TANK = """
[charges.tank]
fluid = "air"
T = "20 degC"
p = "10 bar"
"""

TEST_RUN = """
[streams.discharge]
fluid = "air"
T = "300 degC"
p = "8 bar"
[steps.compressor]
type = "as-measured"
inflows = ["suction"]
outflows = {outlet = "discharge"}
"""


def altered(old: str, new: str) -> str:
    assert SOUND.count(old) >= 1, old
    return SOUND.replace(old, new, 1)


def with_measured(lines: str) -> str:
    return SOUND[: SOUND.index("[steps.compressor]")] + TEST_RUN + lines


def suction(old: str, new: str) -> str:
    return altered(old, new)


T_SUCTION = 'T = "20 degC"'
P_SUCTION = 'p = "1 bar"'
RATE = 'rate = "2 kg/s"'
COMPONENTS = 'components = "air"'
P_OUT = 'p_out = "8 bar"'
EFFICIENCY = 'isentropic_efficiency = "78 %"'
SUCTION, COMPRESSOR = "[streams.suction]", "[steps.compressor]"

FILES = {
    # --- quantities
    "a power of powers in a pressure": (
        suction(P_SUCTION, 'p = "9**9**9 bar"'),
        [SUCTION, "p:", "9**9**9 bar", "expected an absolute pressure"],
    ),
    "an expression in a temperature": (
        suction(T_SUCTION, "T = \"__import__('os').getpid() K\""),
        [SUCTION, "T:", "expected a temperature"],
    ),
    "a bare number for a temperature": (
        suction(T_SUCTION, "T = 293.15"),
        [SUCTION, "T:", "has no unit", "expected a temperature", "degC"],
    ),
    "a bare number in text": (
        suction(P_SUCTION, 'p = "1"'),
        [SUCTION, "p:", "has no unit", "expected an absolute pressure"],
    ),
    "not a number as text": (
        suction(T_SUCTION, 'T = "nan degC"'),
        [SUCTION, "T:", "expected a temperature"],
    ),
    "not a number as TOML": (
        suction(T_SUCTION, "T = nan"),
        [SUCTION, "T:", "expected a temperature"],
    ),
    "an infinite pressure": (
        suction(P_SUCTION, 'p = "inf bar"'),
        [SUCTION, "p:", "expected an absolute pressure"],
    ),
    "a pressure for a temperature": (
        suction(T_SUCTION, 'T = "20 bar"'),
        [SUCTION, "T:", "wrong dimension", "expected a temperature"],
    ),
    "a difference for a temperature": (
        suction(T_SUCTION, 'T = "20 delta_degC"'),
        [SUCTION, "T:", "wrong kind of temperature", "expected a temperature"],
    ),
    "coulombs for degrees": (
        suction(T_SUCTION, 'T = "20 C"'),
        [SUCTION, "T:", "20 C", "expected a temperature", "degC"],
    ),
    "an unknown unit": (
        suction(P_SUCTION, 'p = "1 furlong"'),
        [SUCTION, "p:", "1 furlong", "expected an absolute pressure"],
    ),
    "a unit that does not exist": (
        suction(RATE, 'rate = "2 kilogrammes-a-second"'),
        [SUCTION, "rate:", "expected a mass flow rate"],
    ),
    "below absolute zero": (
        suction(T_SUCTION, 'T = "-300 degC"'),
        [SUCTION, "T:", "-300 degC", "expected a temperature"],
    ),
    "a negative pressure": (
        suction(P_SUCTION, 'p = "-1 bar"'),
        [SUCTION, "p:", "-1 bar", "expected an absolute pressure"],
    ),
    "a gauge pressure for the barometer": (
        altered('p = "1.013 bar"', 'p = "0 barg"'),
        ["[surroundings] p:", "gauge", "expected an absolute pressure"],
    ),
    "a gauge pressure below vacuum": (
        suction(P_SUCTION, 'p = "-2 barg"'),
        [SUCTION, "p:", "-2 barg", "expected an absolute pressure"],
    ),
    "a truth value for a temperature": (
        suction(T_SUCTION, "T = true"),
        [SUCTION, "T:", "True", "expected a text of a number and a unit"],
    ),
    "a date for a pressure": (
        suction(P_SUCTION, "p = 2024-01-01"),
        [SUCTION, "p:", "expected a text of a number and a unit"],
    ),
    "an empty list": (
        suction(T_SUCTION, "T = []"),
        [SUCTION, "T:", "expected a text of a number and a unit, or a list"],
    ),
    "a wrong entry in a list": (
        suction(T_SUCTION, 'T = ["20 degC", "30 bar"]'),
        [SUCTION, "T[1]:", "30 bar", "expected a temperature"],
    ),
    # --- states
    "h with T": (
        suction(P_SUCTION, 'h = "300 kJ/kg"'),
        [SUCTION, "T and h:", "several roots", "Give p with h"],
    ),
    "one property only": (
        suction(P_SUCTION, ""),
        [SUCTION, "T:", "exactly two properties", "Give two of T, p"],
    ),
    "three properties": (
        suction(P_SUCTION, P_SUCTION + '\nv = "0.8 m^3/kg"'),
        [SUCTION, "T and p and v:", "exactly two properties"],
    ),
    "a quality of a gas": (
        suction(P_SUCTION, "quality = 0.5"),
        [SUCTION, "T and quality:", "without a liquid", "Give T with p"],
    ),
    "a quality above one": (
        suction(P_SUCTION, "quality = 1.5"),
        [SUCTION, "quality:", "from 0 to 1", "1.5"],
    ),
    "a state out of limits": (
        suction(T_SUCTION, 'T = "90000 degC"'),
        [SUCTION, "T and p:", "air"],
    ),
    # --- rates
    "a negative rate": (
        suction(RATE, 'rate = "-2 kg/s"'),
        [SUCTION, "rate:", "-2 kg/s", "negative"],
    ),
    "a rate and a mass": (
        suction(RATE, RATE + '\nmass = "3 kg"'),
        [SUCTION, "rate", "give a rate or a mass, not both"],
    ),
    "a mass for a rate": (
        suction(RATE, 'rate = "2 kg"'),
        [SUCTION, "rate:", "wrong dimension", "expected a mass flow rate"],
    ),
    "a charge without an amount": (
        SOUND + TANK,
        ["[charges.tank]", "mass:", "expected one of mass, amount, volume, got 0"],
    ),
    "a charge with two amounts": (
        SOUND + TANK + 'mass = "3 kg"\nvolume = "2 m^3"\n',
        ["[charges.tank]", "mass, volume:", "expected one of mass, amount, volume, got 2"],
    ),
    "a mass for the volume of a charge": (
        SOUND + TANK + 'volume = "3 kg"\n',
        ["[charges.tank]", "volume:", "wrong dimension", "expected a volume"],
    ),
    # --- fluids
    "an unknown component": (
        altered(COMPONENTS, 'components = "unobtainium"'),
        ["[fluids.air]", "components:", "unobtainium"],
    ),
    "a composition that sums to 0.98": (
        altered(COMPONENTS, "components = {nitrogen = 0.78, oxygen = 0.20}"),
        ["[fluids.air]", "components:", "0.98", "sum to 1 within 1e-6"],
    ),
    "a negative fraction": (
        altered(COMPONENTS, "components = {nitrogen = 1.2, oxygen = -0.2}"),
        ["[fluids.air]", "components:", "-0.2", "from 0 to 1"],
    ),
    "an empty composition": (
        altered(COMPONENTS, "components = {}"),
        ["[fluids.air]", "components:", "expected a name"],
    ),
    "a fraction that is text": (
        altered(COMPONENTS, 'components = {nitrogen = "most", oxygen = 0.2}'),
        ["[fluids.air]", "components:", "'nitrogen' is no number"],
    ),
    "an unknown basis": (
        altered(COMPONENTS, COMPONENTS + '\nbasis = "weight"'),
        ["[fluids.air]", "basis:", "expected 'amount' or 'mass'", "weight"],
    ),
    "an unknown backend": (
        altered('backend = "ideal-gas"', 'backend = "ideal-gass"'),
        ["[fluids.air]", "backend:", "ideal-gass", "perhaps 'ideal-gas' is meant"],
    ),
    "no backend at all": (
        altered('backend = "ideal-gas"', ""),
        ["[fluids.air]", "backend:", "missing here and in [case]", "expected one of", "ideal-gas"],
    ),
    "an unknown option": (
        altered(COMPONENTS, COMPONENTS + '\noptions = {colour = "red"}'),
        ["[fluids.air]", "options:", "colour"],
    ),
    "a word of ours among the options": (
        altered(COMPONENTS, COMPONENTS + '\noptions = {backend = "cubic"}'),
        ["[fluids.air]", "options:", "'backend' is no option"],
    ),
    "no components": (
        altered(COMPONENTS, ""),
        ["[fluids.air]", "components:", "is missing", "expected a name"],
    ),
    "an unknown fluid": (
        suction('fluid = "air"', 'fluid = "aire"'),
        [SUCTION, "fluid:", "'aire'", "perhaps 'air' is meant"],
    ),
    # --- steps
    "an unknown type of step": (
        altered('"compression"', '"compresion"'),
        [COMPRESSOR, "type:", "compresion", "perhaps 'compression'"],
    ),
    "a type that is missing": (
        altered('type = "compression"', ""),
        [COMPRESSOR, "type:", "is missing", "expected one of", "throttling"],
    ),
    "an unknown field of a step": (
        altered("isentropic_efficiency", "isentropic_eficiency"),
        [COMPRESSOR, "isentropic_eficiency:", "perhaps 'isentropic_efficiency'"],
    ),
    "a step without its inlet": (
        altered('inlet = "suction"', ""),
        [COMPRESSOR, "inlet:", "is missing", "expected the name of a stream"],
    ),
    "a name inside a step": (
        altered(P_OUT, P_OUT + '\nname = "K-101"'),
        [COMPRESSOR, "name:", "is that of its table"],
    ),
    "a reference to nothing": (
        altered('inlet = "suction"', 'inlet = "sucktion"'),
        [COMPRESSOR, "inlet:", "'sucktion'", "perhaps 'suction' is meant"],
    ),
    "a part of a stream": (
        altered('inlet = "suction"', 'inlet = "suction.outlet"'),
        [COMPRESSOR, "inlet:", "'suction.outlet'", "perhaps 'suction'"],
    ),
    "an outlet that is not there": (
        altered('inlet = "compressor"', 'inlet = "compressor.side"'),
        ["[steps.valve]", "inlet:", "'compressor.side' is not there", "compressor.outlet"],
    ),
    "a bare step with two outlets": (
        SOUND
        + '[steps.tee]\ntype = "splitting"\ninlet = "valve"\nfractions = {a = 0.4, b = 0.6}\n'
        + '[steps.end]\ntype = "throttling"\ninlet = "tee"\np_out = "2 bar"\n',
        ["[steps.end]", "inlet:", "no single outlet", "expected one of tee.a, tee.b"],
    ),
    "a number for a reference": (
        altered('inlet = "suction"', "inlet = 5"),
        [COMPRESSOR, "inlet:", "expected the name of a stream", "got 5"],
    ),
    "a list where one stream is taken": (
        altered('inlet = "suction"', 'inlet = ["suction"]'),
        [COMPRESSOR, "inlet:", "expected the name of a stream"],
    ),
    "steps in a circle": (
        altered('inlet = "suction"', 'inlet = "valve"'),
        ["circle", "compressor", "valve", "->", "[streams]"],
    ),
    "a step that feeds itself": (
        altered('inlet = "suction"', 'inlet = "compressor"'),
        ["circle: compressor -> compressor"],
    ),
    "one stream into two steps": (
        altered('inlet = "compressor"', 'inlet = "suction"').replace(
            'p_out = "3 bar"', 'p_out = "0.5 bar"'
        ),
        ["[steps]", "'suction'", "compressor", "valve", "splitting"],
    ),
    "a name for a stream and a step": (
        altered("[streams.suction]", "[streams.compressor]").replace('"suction"', '"compressor"'),
        [COMPRESSOR, "taken by [streams.compressor]", "expected a name of its own"],
    ),
    "a compressor that lowers the pressure": (
        altered(P_OUT, 'p_out = "0.5 bar"'),
        [COMPRESSOR, "p_out:", "50000 Pa", "raise p_out"],
    ),
    "a valve that raises the pressure": (
        altered('p_out = "3 bar"', 'p_out = "30 bar"'),
        ["[steps.valve]", "p_out:", "3e+06 Pa", "lower p_out"],
    ),
    "an efficiency of 120 %": (
        altered(EFFICIENCY, 'isentropic_efficiency = "120 %"'),
        [COMPRESSOR, "isentropic_efficiency:", "above 0 and up to 1", "120 %"],
    ),
    "an efficiency of zero": (
        altered(EFFICIENCY, "isentropic_efficiency = 0"),
        [COMPRESSOR, "isentropic_efficiency:", "above 0 and up to 1"],
    ),
    "a length for a pressure in a step": (
        altered(P_OUT, 'p_out = "8 m"'),
        [COMPRESSOR, "p_out:", "8 m", "expected an absolute pressure"],
    ),
    "two ways to say the pressure": (
        altered(P_OUT, P_OUT + "\npressure_ratio = 8"),
        [COMPRESSOR, "pressure_ratio:", "exactly one of", "p_out"],
    ),
    "heat without its temperature": (
        with_measured('heat = [{amount = "-30 kW"}]'),
        [COMPRESSOR, "heat.at:", "expected the temperature of the boundary"],
    ),
    "heat as bare text": (
        with_measured('heat = ["-30 kW"]'),
        [COMPRESSOR, "heat:", "expected a table of a heat", 'at = "80 degC"'],
    ),
    "heat with a field too many": (
        with_measured('heat = [{amount = "-30 kW", at = "80 degC", colour = "red"}]'),
        [COMPRESSOR, "heat.colour:", "expected only amount, at, name"],
    ),
    "work in bar": (
        with_measured('work = ["30 bar"]'),
        [COMPRESSOR, "work.amount:", "30 bar", "expected a power"],
    ),
    "a loop closed by a step that is not there": (
        suction('rate = "2 kg/s"', 'rate = "2 kg/s"\ncloses = "valv"'),
        [SUCTION, "closes:", "'valv' is no step", "perhaps 'valve' is meant"],
    ),
    "a loop closed by an outlet that is not there": (
        suction('rate = "2 kg/s"', 'rate = "2 kg/s"\ncloses = "valve.drain"'),
        [SUCTION, "closes:", "'valve.drain' is not there", "valve.outlet"],
    ),
    "a loop closed by an outlet that goes elsewhere": (
        suction('rate = "2 kg/s"', 'rate = "2 kg/s"\ncloses = "compressor"'),
        [SUCTION, "closes:", "enters a step already", "expected an outlet that enters none"],
    ),
    "a loop closed by a stream that nothing takes": (
        SOUND
        + '[streams.idle]\nfluid = "air"\nT = "1 degC"\np = "5 bar"\nrate = "1 kg/s"\n'
        + 'closes = "valve"\n',
        ["[streams.idle]", "closes:", "enters no step", "expected one that takes"],
    ),
    "an agreement of more than all": (
        altered('backend = "ideal-gas"', 'backend = "ideal-gas"\nagreement = "120 %"'),
        ["[case]", "agreement:", "one fraction from 0 to below 1", "120 %"],
    ),
    "two unknowns": (
        with_measured('work = ["unknown"]\nheat = [{amount = "unknown", at = "15 degC"}]'),
        [COMPRESSOR, "more than one heat or work is unknown"],
    ),
    "lists of two lengths in a stream": (
        suction(T_SUCTION, 'T = ["20 degC", "30 degC", "40 degC"]').replace(
            P_SUCTION, 'p = ["1 bar", "2 bar"]'
        ),
        [SUCTION, "T and p:", "different lengths", "T has 3, p has 2", "one length"],
    ),
    "lists of two lengths in a step": (
        suction(T_SUCTION, 'T = ["20 degC", "30 degC", "40 degC"]').replace(
            P_OUT, 'p_out = ["8 bar", "9 bar"]'
        ),
        [COMPRESSOR, "different lengths", "inlet has 3, p_out has 2", "one length"],
    ),
    "an empty list in a step": (
        altered(P_OUT, "p_out = []"),
        [COMPRESSOR, "p_out:", "empty list", "expected an absolute pressure"],
    ),
    "lists of two lengths in two steps": (
        suction(T_SUCTION, 'T = ["20 degC", "30 degC", "40 degC"]')
        + '[streams.other]\nfluid = "air"\nT = ["1 degC", "2 degC"]\np = "5 bar"\n'
        + 'rate = "1 kg/s"\n[steps.other_valve]\ntype = "throttling"\ninlet = "other"\n'
        + 'p_out = "2 bar"\n',
        ["[steps]", "different lengths", "other_valve has 2", "one length"],
    ),
    "lists of two lengths in stream and surroundings": (
        suction(T_SUCTION, 'T = ["20 degC", "30 degC", "40 degC"]').replace(
            'T = "15 degC"', 'T = ["5 degC", "15 degC"]'
        ),
        [COMPRESSOR, "different lengths", "T0 has 2", "one length"],
    ),
    # --- tables
    "no surroundings": (
        altered('[surroundings]\nT = "15 degC"\np = "1.013 bar"', ""),
        ["[surroundings]", "is missing", "expected the temperature and pressure outside"],
    ),
    "surroundings without a pressure": (
        altered('p = "1.013 bar"', ""),
        ["[surroundings] p:", "is missing", "expected an absolute pressure"],
    ),
    "no steps": (
        SOUND[: SOUND.index("[steps.")],
        ["[steps]", "is missing", "expected a table [steps.NAME]"],
    ),
    "an unknown table": (
        SOUND + "[colours]\nred = 1\n",
        ["'colours' is no table of a case", "expected", "[surroundings]"],
    ),
    "an unknown field of a stream": (
        suction(T_SUCTION, 'temperature = "20 degC"'),
        [SUCTION, "temperature:", "is no field", "expected one of"],
    ),
    "text where a table belongs": (
        SOUND.replace('[fluids.air]\ncomponents = "air"', '[fluids]\nair = "air"'),
        ["[fluids.air]", "expected a table", "got 'air'"],
    ),
    "a number for the title": (
        altered('title = "Air compressor and let-down valve"', "title = 5"),
        ["[case] title:", "expected text in quotes", "got 5"],
    ),
    "a title that steers the terminal": (
        altered('title = "Air', 'title = "\\u001b[2JAir'),
        ["[case] title:", "expected one line of printable text"],
    ),
    "a step whose name is a formula": (
        altered("[steps.valve]", '[steps."=1+1"]'),
        ["[steps.=1+1]", "expected a name that begins with a letter"],
    ),
    "a list of steps": (
        SOUND[: SOUND.index("[steps.")] + '[[steps]]\ntype = "compression"\n',
        ["[steps]", "expected a table"],
    ),
    # --- files
    "a syntax error": (SOUND + "\nthis is no TOML", ["is not valid TOML", "line 30"]),
    "a table twice": (SOUND + "[steps.valve]\n", ["is not valid TOML", "line"]),
    "an empty file": ("", ["is empty", "expected the tables [surroundings]"]),
    "a huge file": ("# " + "x" * LARGEST, ["is larger than", "expected a TOML case file"]),
    "lists within lists": ("a = " + "[" * 5000, ["nested too deep", "expected at most 8"]),
    "tables within tables": (
        SOUND + ".".join(["[a", *"b" * 60000]) + "]\n",
        ["line 29 nests tables too deep", "expected at most 8"],
    ),
    "a number of ten thousand digits": (SOUND + "x = " + "9" * 10000, ["is not valid TOML"]),
    "binary": (b"\x7fELF\x02\x01\xff\xfe" * 20, ["is not UTF-8 text", "expected TOML"]),
    "zero bytes": (b"\x00" * 64, ["is not valid TOML"]),
}


@pytest.mark.parametrize("name", FILES)
def test_a_malformed_file_is_refused_and_says_where(name, tmp_path, capsys):
    text, telling = FILES[name]
    file = tmp_path / "plant.toml"
    file.write_bytes(text if isinstance(text, bytes) else text.encode())
    code = main(["audit", str(file)])
    captured = capsys.readouterr()
    assert code == 2, captured
    assert captured.out == ""
    assert "Traceback" not in captured.err
    assert "plant.toml" in captured.err
    for words in telling:
        assert words in captured.err, captured.err


CALLS = {
    "no command": ([], ["required", "COMMAND"]),
    "an unknown command": (["judge", "FILE"], ["invalid choice", "judge", "audit"]),
    "no file": (["audit"], ["required", "CASE"]),
    "a flag that is none": (["audit", "FILE", "--fast"], ["--fast"]),
    "a flag cut short": (["audit", "FILE", "--back", "cubic"], ["--back"]),
    "a file that is not there": (["audit", "nowhere.toml"], ["nowhere.toml", "expected the path"]),
    "a name no file can have": (["audit", "a\0b"], ["cannot be read", "expected a TOML case"]),
    "a directory": (["audit", "DIRECTORY"], ["is a directory", "expected the path"]),
    "an unknown exporter": (
        ["audit", "FILE", "--as", "tabel"],
        ["--as tabel", "no exporter is called 'tabel'", "Installed", "table"],
    ),
    "an unknown backend": (
        ["audit", "FILE", "--backend", "guesswork"],
        ["no backend is called 'guesswork'", "Installed", "ideal-gas"],
    ),
    "an output in a directory that is not there": (
        ["audit", "FILE", "--output", "DIRECTORY/nowhere/report.json"],
        ["--output", "cannot be written", "expected a file in a directory"],
    ),
    "a directory for an output": (
        ["audit", "FILE", "--output", "DIRECTORY"],
        ["--output", "cannot be written"],
    ),
    "a comparison without backends": (["compare", "FILE"], ["required", "BACKEND"]),
    "a comparison with a backend twice": (
        ["compare", "FILE", "ideal-gas", "ideal-gas"],
        ["'ideal-gas' is named twice", "expected different backends"],
    ),
    "a comparison with an unknown backend": (
        ["compare", "FILE", "ideal-gas", "guesswork"],
        ["no backend is called 'guesswork'"],
    ),
    "fields of an unknown type": (
        ["fields", "perpetual-motion"],
        ["no process is called 'perpetual-motion'", "Installed", "compression"],
    ),
}


@pytest.mark.parametrize("name", CALLS)
def test_a_wrong_call_is_refused_and_says_what_was_expected(name, tmp_path, capsys):
    arguments, telling = CALLS[name]
    file = tmp_path / "plant.toml"
    file.write_text(SOUND)
    places = {"FILE": str(file), "DIRECTORY": str(tmp_path)}
    filled = [places.get(a, a.replace("DIRECTORY", str(tmp_path))) for a in arguments]
    code = main(filled)
    captured = capsys.readouterr()
    assert code == 2, captured
    assert captured.out == ""
    assert "Traceback" not in captured.err
    for words in telling:
        assert words in captured.err, captured.err


def test_there_are_at_least_fifty_of_them():
    assert len(FILES) + len(CALLS) >= 50


def test_the_case_they_alter_is_sound(tmp_path, capsys):
    file = tmp_path / "plant.toml"
    file.write_text(SOUND)
    assert main(["audit", str(file)]) == 0, capsys.readouterr().err


def test_a_missing_library_is_told_with_the_line_that_installs_it(tmp_path, capsys, monkeypatch):
    monkeypatch.setattr(Descriptor, "missing", property(lambda self: self.requires))
    descriptor = lw.plugins().backend("cubic")
    monkeypatch.delitem(descriptor.__dict__, "_object", raising=False)
    file = tmp_path / "plant.toml"
    file.write_text(SOUND.replace('"ideal-gas"', '"cubic"'))
    assert main(["audit", str(file)]) == 2
    told = capsys.readouterr().err
    assert "[fluids.air] backend:" in told
    assert 'pip install "lostwork[cubic]"' in told
    assert "Traceback" not in told


def test_several_mistakes_are_told_at_once(tmp_path, capsys):
    text = SOUND.replace(T_SUCTION, "T = 293.15").replace('"air"\n\n', '"air"\ncolour = "blue"\n')
    file = tmp_path / "plant.toml"
    file.write_text(text.replace('type = "throttling"', 'type = "throttling"\nhue = 3'))
    assert main(["audit", str(file)]) == 2
    assert "[fluids.air] colour:" in capsys.readouterr().err
    file.write_text(SOUND.replace(T_SUCTION, "T = 293.15").replace(EFFICIENCY, "speed = 3"))
    assert main(["audit", str(file)]) == 2
    with pytest.raises(lw.CaseError) as raised:
        lw.Case.parse(SOUND.replace('inlet = "suction"', 'inlet = "x"').replace(P_OUT, "z = 1"))
    assert {field for _, field, _ in raised.value.problems} == {"inlet", "z"}


@pytest.mark.parametrize(
    ("text", "telling"),
    [
        (SOUND.replace(P_SUCTION, 'p = "9**9**9 bar"'), "[streams.suction] p:"),
        (SOUND + "x = [", "is not valid TOML"),
    ],
)
def test_the_installed_command_ends_the_same_way(text, telling, tmp_path):
    file = tmp_path / "plant.toml"
    file.write_text(text)
    ended = subprocess.run(
        [sys.executable, "-m", "lostwork", "audit", str(file)],
        capture_output=True,
        text=True,
        timeout=120,
        check=False,
        env=os.environ | {"COLUMNS": "80"},
    )
    assert ended.returncode == 2
    assert ended.stdout == ""
    assert "Traceback" not in ended.stderr
    assert telling in ended.stderr
