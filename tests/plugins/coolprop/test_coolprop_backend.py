"""The backend: which model a fluid gets, and its promises on threads, pickles and zeros."""

from __future__ import annotations

import pickle
import subprocess
import sys
from concurrent.futures import ThreadPoolExecutor

import numpy as np
import pytest

from lostwork import Component, FluidSpec, PropertyError, UnknownComponent
from lostwork_plugins.coolprop import lostwork_backends
from lostwork_plugins.coolprop.backend import CoolPropBackend

AIR = {"Nitrogen": 0.7812, "Oxygen": 0.2096, "Argon": 0.0092}


def _part(cas: str, name: str) -> Component:
    return Component(cas=cas, name=name, formula="", molar_mass=0.02, elements=())


def test_the_plugin_describes_its_backend_without_importing_the_library():
    descriptor, _ = lostwork_backends()
    assert descriptor.name == "coolprop"
    assert descriptor.target == "lostwork_plugins.coolprop.backend:CoolPropBackend"
    assert descriptor.requires == ("CoolProp",)
    code = "import sys, lostwork_plugins.coolprop; assert 'CoolProp' not in sys.modules"
    subprocess.run([sys.executable, "-c", code], check=True)


@pytest.mark.parametrize(
    ("cas", "asked", "fluid"),
    [
        ("7727-37-9", None, "Nitrogen"),
        ("1333-74-0", None, "Hydrogen"),
        ("1333-74-0", "hydrogen", "Hydrogen"),
        ("1333-74-0", "parahydrogen", "ParaHydrogen"),
        ("7782-39-0", None, "Deuterium"),
        ("811-97-2", "R134a", "R134a"),
        ("7732-18-5", "steam", "Water"),
    ],
)
def test_a_cas_number_means_the_normal_fluid_unless_an_isomer_is_named(cas, asked, fluid):
    spec = FluidSpec((_part(cas, "x"),), (1.0,), asked)
    assert CoolPropBackend().open(spec, {}).fluid == fluid


def test_a_component_unknown_to_the_library_is_refused_with_the_nearest():
    spec = FluidSpec((_part("110-62-3", "pentane aldehyde"),), (1.0,))
    with pytest.raises(UnknownComponent, match="110-62-3"):
        CoolPropBackend().open(spec, {})
    with pytest.raises(UnknownComponent) as refusal:
        CoolPropBackend().open(FluidSpec((_part("1-11-1", "nitrogenn"),), (1.0,)), {})
    assert "Nitrogen" in refusal.value.nearest


@pytest.mark.parametrize(
    "options", [{"eos": "PR"}, {"equation": "PR"}, {"equation": "SRK"}, {"pseudo_pure": "yes"}]
)
def test_options_it_does_not_have_are_refused(model_of, options):
    with pytest.raises(PropertyError):
        model_of("Water", **options)


def test_the_option_that_names_the_default_equation_changes_nothing(model_of):
    a, b = model_of("Water"), model_of("Water", equation="HEOS")
    assert a.columns(("T", "p"), 300.0, 1e5) == b.columns(("T", "p"), 300.0, 1e5) or (
        a.columns(("T", "p"), 300.0, 1e5).s == b.columns(("T", "p"), 300.0, 1e5).s
    )


@pytest.mark.parametrize("name", ["Amarillo", "amarillo.mix", "typical natural gas", "R407C"])
def test_a_predefined_mixture_is_named_by_cas_numbers_and_sums_to_one(name):
    parts = CoolPropBackend().composition(name)
    assert sum(parts.values()) == pytest.approx(1.0, abs=1e-6)
    key = "74-82-8" if "R407C" not in name else "811-97-2"
    assert key in parts


def test_an_unknown_mixture_has_no_composition():
    assert CoolPropBackend().composition("swamp gas") is None


def test_the_gas_of_amarillo_has_its_published_composition():
    parts = CoolPropBackend().composition("Amarillo")
    # Amarillo gas, AGA Report No. 8 (1992): methane 90.6724, nitrogen 3.1284 per cent.
    assert parts["74-82-8"] == pytest.approx(0.906724)
    assert parts["7727-37-9"] == pytest.approx(0.031284)


@pytest.mark.parametrize("fluid", ["R134a", AIR], ids=["pure", "mixture"])
def test_four_threads_get_the_answers_of_one(model_of, fluid):
    model = model_of(fluid)
    count = 800 if isinstance(fluid, str) else 60
    rng = np.random.default_rng(11)
    T, p = rng.uniform(320.0, 400.0, (4, count)), rng.uniform(1e5, 6e5, (4, count))
    alone = [model.columns(("T", "p"), T[i], p[i]) for i in range(4)]
    with ThreadPoolExecutor(4) as pool:
        together = list(pool.map(lambda i: model.columns(("T", "p"), T[i], p[i]), range(4)))
        back = list(pool.map(lambda i: model.columns(("p", "h"), p[i], alone[i].h), range(4)))
    for one, many, inverse in zip(alone, together, back, strict=True):
        assert (one.s == many.s).all()
        assert inverse.s == pytest.approx(one.s, abs=1e-5)


@pytest.mark.parametrize(
    ("fluid", "name"), [("Water", None), (AIR, None), (AIR, "air")], ids=["pure", "mix", "pseudo"]
)
def test_a_model_pickles_as_its_recipe_into_a_fresh_process(model_of, tmp_path, fluid, name):
    model = model_of(fluid, name)
    here = model.columns(("T", "p"), 400.0, 1e5)
    parcel = tmp_path / "model.pickle"
    parcel.write_bytes(pickle.dumps(model))
    code = (
        "import pickle, pathlib, sys\n"
        "model = pickle.loads(pathlib.Path(sys.argv[1]).read_bytes())\n"
        "c = model.columns(('T', 'p'), 400.0, 1e5)\n"
        "print(repr(c.h), repr(c.s))"
    )
    run = subprocess.run(
        [sys.executable, "-c", code, str(parcel)], check=True, capture_output=True, text=True
    )
    assert run.stdout.split() == [repr(here.h), repr(here.s)]


REFERENCE_MOVED = """
import pickle, sys, threading
import CoolProp.CoolProp as library
moved, model = sys.argv[1], None
def aligned():
    c = model.columns(("T", "p"), 350.0, 3e5)
    back = model.columns(("p", "h"), 3e5, c.h)
    h, s = model.ideal_gas_limit()
    return c.h - h, c.s - s, back.s - s
def move():
    for fluid in ("R134a", "R32"):
        library.set_reference_state(fluid, "NBP")
if moved == "before":
    move()
model = pickle.loads(open(sys.argv[2], "rb").read())
results = [aligned()]
if moved == "after":
    move()
results.append(aligned())
thread = threading.Thread(target=lambda: results.append(aligned()))
thread.start(); thread.join()
for result in results:
    print(*map(repr, result))
"""


@pytest.mark.parametrize("fluid", ["R134a", {"R134a": 0.5, "R32": 0.5}], ids=["pure", "mixture"])
def test_a_reference_state_moved_by_the_host_program_moves_nothing(model_of, tmp_path, fluid):
    parcel = tmp_path / "model.pickle"
    parcel.write_bytes(pickle.dumps(model_of(fluid)))
    lines = []
    for moved in ("never", "before", "after"):
        run = subprocess.run(
            [sys.executable, "-c", REFERENCE_MOVED, moved, str(parcel)],
            check=True,
            capture_output=True,
            text=True,
        )
        lines += [tuple(map(float, line.split())) for line in run.stdout.splitlines()]
    assert len(lines) == 9
    for h, s, s_back in lines:
        assert h == pytest.approx(lines[0][0], abs=1e-5)
        assert s == pytest.approx(lines[0][1], abs=1e-7)
        assert s_back == pytest.approx(lines[0][1], abs=1e-5)
