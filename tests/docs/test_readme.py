"""Every command and block of code in the README and in DEVELOPERS.md runs as printed."""

from __future__ import annotations

import os
import re
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]
README = (ROOT / "README.md").read_text(encoding="utf-8")
DEVELOPERS = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
_BLOCK = re.compile(r"(<!-- (?P<mark>[a-z ]+) -->\n)?```(?P<language>\w+)\n(?P<text>.*?)```", re.S)
BLOCKS = _BLOCK.findall(README)
PYTHON = [text for _, _, language, text in BLOCKS if language == "python"]
FOR_CONTRIBUTORS = [
    text for _, _, language, text in _BLOCK.findall(DEVELOPERS) if language == "python"
]
COMMANDS = [
    line
    for _, mark, language, text in BLOCKS
    if language == "bash" and not mark
    for line in text.strip().splitlines()
]
MARKED = {mark: text.strip() for _, mark, language, text in BLOCKS if mark}


def _run(command: list[str], folder: Path, **more: str) -> subprocess.CompletedProcess[str]:
    environment = {**os.environ, **more}
    return subprocess.run(
        command, cwd=folder, env=environment, capture_output=True, text=True, check=False
    )


def test_the_readme_states_the_job_in_its_first_paragraph() -> None:
    assert "lost" in README.split("\n\n")[1]


def test_what_the_page_for_contributors_points_at_is_there() -> None:
    paths = re.findall(r"`((?:sdk|plugins|tests|examples|\.ci)/[\w./]+)`", DEVELOPERS)
    assert len(paths) > 8
    assert [path for path in paths if not (ROOT / path).exists()] == []
    headings = {
        line.lstrip("# ").lower().replace(" ", "-")
        for line in DEVELOPERS.splitlines()
        if line.startswith("## ")
    }
    assert set(re.findall(r"\]\(#([\w-]+)\)", DEVELOPERS)) == headings


def test_no_block_of_the_readme_escapes_these_tests() -> None:
    assert (
        len(PYTHON)
        + len(MARKED)
        + sum(1 for _, mark, language, _ in BLOCKS if language == "bash" and not mark)
        == README.count("```") // 2
    )
    assert set(MARKED) == {"main command", "test command"}


@pytest.mark.parametrize("text", [*PYTHON, *FOR_CONTRIBUTORS])
def test_a_python_block_runs_as_printed(text: str) -> None:
    done = _run([sys.executable, "-c", text], ROOT)
    assert done.returncode == 0, done.stderr


@pytest.mark.parametrize("command", COMMANDS)
def test_a_command_runs_as_printed(command: str) -> None:
    path = f"{Path(sys.executable).parent}{os.pathsep}{os.environ['PATH']}"
    done = _run(["bash", "-c", command], ROOT, PATH=path)
    assert done.returncode == 0, done.stderr
    assert done.stdout.strip()


def test_the_main_command_prints_an_audited_plant_from_a_fresh_copy(tmp_path: Path) -> None:
    copy = tmp_path / "clone"
    shutil.copytree(
        ROOT, copy, ignore=shutil.ignore_patterns(".git", ".venv*", ".*_cache", "__pycache__")
    )
    done = _run(["bash", "-c", MARKED["main command"]], copy)
    assert done.returncode == 0, done.stderr
    assert "work lost" in done.stdout
    assert "all steps" in done.stdout


def test_the_test_command_is_the_one_that_guards_what_lands() -> None:
    assert "pytest" in MARKED["test command"]
    assert "<!-- test command -->" in (ROOT / ".ci" / "run").read_text(encoding="utf-8")
