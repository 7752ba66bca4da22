"""Whatever stands in a case in place of a value, the command answers or refuses, and says why."""

from __future__ import annotations

import contextlib
import io

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import lostwork as lw
from lostwork.cases.command import main

SOUND = """
[case]
title = "Compressor, tee and valve"
backend = "ideal-gas"
closing = "1 %"
[surroundings]
T = "15 degC"
p = "1.013 bar"
[fluids.air]
components = {nitrogen = 0.79, oxygen = 0.21}
basis = "amount"
[streams.suction]
fluid = "air"
T = "20 degC"
p = "1 bar"
rate = "2 kg/s"
[charges.tank]
fluid = "air"
p = "9 bar"
T = "20 degC"
mass = "3 kg"
[steps.compressor]
type = "compression"
inlet = "suction"
p_out = "8 bar"
isentropic_efficiency = "78 %"
[steps.tee]
type = "splitting"
inlet = "compressor"
fractions = {a = 0.4, b = 0.6}
[steps.valve]
type = "throttling"
inlet = "tee.a"
p_out = "3 bar"
""".strip().splitlines()

ASSIGNMENTS = [place for place, line in enumerate(SOUND) if "=" in line]
VALUES = [
    *('""', '"x"', '"1 bar"', '"20 degC"', '"80 %"', '"1e308 bar"', '"1e-300 K"', '"0 kg/s"'),
    *("5", "-1", "0", "1e400", "nan", "-inf", "true", "2024-01-01", "[]", "{}", "[[]]", "[[1], 2]"),
    *('["1 bar", "2 bar"]', '["1 bar", "2 bar", "3 bar"]', '["1 degC", "2 degC"]', '[1, "2 bar"]'),
    *('"suction"', '["suction"]', '"valve.outlet"', '"tank"', '"tee"', '{a = "tee.b"}'),
    *("{a = 1}", '{amount = "unknown"}', '"cubic"', '"as-measured"', '"mixing"', '"\\u001b[2J"'),
]
spoilt_lines = st.lists(
    st.tuples(st.sampled_from(ASSIGNMENTS), st.sampled_from(VALUES)), min_size=1, max_size=3
)


def spoilt(changes):
    lines = list(SOUND)
    for place, value in changes:
        lines[place] = f"{lines[place].split(' = ')[0]} = {value}"
    return "\n".join(lines)


@pytest.fixture(scope="module")
def file(tmp_path_factory):
    return tmp_path_factory.mktemp("spoilt") / "case.toml"


@settings(max_examples=200, deadline=None, derandomize=True)
@given(changes=spoilt_lines)
def test_a_spoilt_case_is_answered_or_refused_and_never_a_bug(file, changes):
    file.write_text(spoilt(changes))
    told = io.StringIO()
    with contextlib.redirect_stderr(told), contextlib.redirect_stdout(io.StringIO()):
        code = main(["audit", str(file)])
    assert code in (0, 1, 2), told.getvalue()
    assert (code == 2) == bool(told.getvalue())
    assert "\x1b" not in told.getvalue()


def test_the_case_that_is_spoilt_is_sound():
    assert lw.Case.parse("\n".join(SOUND)).audit().acceptable
