"""The examples are programs a user would start from: each runs, says it is invented, and tells."""

from __future__ import annotations

import re
import subprocess
import sys
from pathlib import Path

import pytest

import lostwork as lw

FOLDER = Path(__file__).resolve().parents[2] / "examples"
SCRIPTS = sorted(FOLDER.glob("*.py"))
CASES = sorted(FOLDER.glob("*.toml"))


def _printed(script: Path) -> str:
    done = subprocess.run(
        [sys.executable, str(script)], capture_output=True, text=True, check=False
    )
    assert done.returncode == 0, done.stderr
    return done.stdout


@pytest.mark.parametrize("path", [*SCRIPTS, *CASES], ids=lambda path: path.name)
def test_an_example_says_that_it_is_invented(path: Path) -> None:
    assert "invented" in path.read_text(encoding="utf-8")[:400].lower()


@pytest.mark.parametrize("path", SCRIPTS, ids=lambda path: path.name)
def test_a_script_runs_and_prints(path: Path) -> None:
    assert _printed(path).strip()


@pytest.mark.parametrize("path", CASES, ids=lambda path: path.name)
def test_a_case_is_audited_and_can_run(path: Path) -> None:
    audit = lw.Case.read(path).audit()
    assert audit.acceptable
    assert audit.work_lost.to("kW").magnitude > 0.0
    assert audit.whole is not None
    assert audit.whole.work_lost_si == pytest.approx(audit.work_lost_si, rel=1e-6)


def test_the_station_has_eight_steps_or_more() -> None:
    assert len(lw.Case.read(FOLDER / "air_and_nitrogen_station.toml").audit().balances) >= 8


def test_the_embedding_example_is_short_and_finds_the_claim_impossible() -> None:
    script = FOLDER / "embedding.py"
    code = [line for line in script.read_text(encoding="utf-8").splitlines() if line.strip()]
    assert len(code) < 15
    assert "impossible" in _printed(script)


def test_the_loss_of_the_stepwise_study_falls_as_one_over_the_number_of_steps() -> None:
    printed = _printed(FOLDER / "stepwise_study.py")
    rows = re.findall(r"^\s+(50|100)\s.*?(\d+\.\d)$", printed, re.M)
    by_steps = {int(steps): float(product) for steps, product in rows}
    assert by_steps[100] == pytest.approx(by_steps[50], rel=0.02)
