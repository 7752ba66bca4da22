"""What an import loads, and what works without the heavy libraries."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]
HEAVY = ("CoolProp", "thermo", "chemicals", "scipy", "pydantic", "rich", "hypothesis", "pytest")
WITHOUT = "import sys; sys.modules['CoolProp'] = sys.modules['thermo'] = None; "


def run(code: str) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, "-c", code], cwd=ROOT, capture_output=True, text=True, check=False
    )


def test_an_import_loads_no_heavy_library():
    code = "import sys, lostwork; print(*sorted({m.partition('.')[0] for m in sys.modules}))"
    loaded = set(run(code).stdout.split())
    assert "lostwork" in loaded
    assert not loaded & set(HEAVY)


@pytest.mark.parametrize("backend", ["ideal-gas", "cubic", "coolprop"])
def test_a_fluid_loads_only_the_library_of_its_own_backend(backend):
    code = (
        f"import sys, lostwork as lw; lw.Fluid('nitrogen', backend={backend!r}); "
        "print(*sorted({m.partition('.')[0] for m in sys.modules}))"
    )
    loaded = set(run(code).stdout.split())
    own = {"ideal-gas": set(), "cubic": {"thermo"}, "coolprop": {"CoolProp"}}[backend]
    assert own <= loaded
    if backend != "cubic":  # thermo itself looks for CoolProp
        assert not loaded & ({"CoolProp", "thermo"} - own)


def test_without_coolprop_and_thermo_the_ideal_gas_audits_a_plant():
    done = run(
        WITHOUT + "from lostwork.cases.command import main; sys.exit(main(["
        "'audit', 'examples/air_and_nitrogen_station.toml', '--backend', 'ideal-gas']))"
    )
    assert done.returncode == 0, done.stderr
    assert "The 12 steps can run as described." in done.stdout


@pytest.mark.parametrize(("backend", "extra"), [("coolprop", "coolprop"), ("cubic", "cubic")])
def test_a_backend_whose_library_is_missing_says_what_to_install(backend, extra):
    done = run(
        WITHOUT + "import lostwork as lw\n"
        f"try:\n    lw.Fluid('nitrogen', backend={backend!r})\n"
        "except lw.MissingExtra as error:\n    print(error)\n"
    )
    assert f"lostwork[{extra}]" in done.stdout, done.stderr
    assert "pip install" in done.stdout


def test_the_list_of_plugins_tells_what_is_missing():
    done = run(WITHOUT + "from lostwork.cases.command import main; sys.exit(main(['plugins']))")
    assert done.returncode == 0, done.stderr
    assert "CoolProp" in done.stdout
    assert "ideal-gas" in done.stdout
