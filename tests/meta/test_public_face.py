"""The public face: what is listed is there, documented, typed and used by the plugins alone."""

from __future__ import annotations

import ast
import inspect
import pickle
import re
import tomllib
from dataclasses import fields, is_dataclass
from pathlib import Path

import pytest

import lostwork as lw

ROOT = Path(__file__).resolve().parents[2]
PLUGINS = ROOT / "plugins" / "lostwork_plugins"
SOURCES = sorted(PLUGINS.rglob("*.py"))
PUBLIC = [(name, getattr(lw, name)) for name in lw.__all__]
DOCUMENTED = [(n, v) for n, v in PUBLIC if inspect.isclass(v) or inspect.isfunction(v)]
ERRORS = [
    v for _, v in PUBLIC if inspect.isclass(v) and issubclass(v, lw.LostworkError) and fields(v)
]
FIXED = {
    "Surroundings", "Fluid", "Stream", "Content", "Heat", "Work", "Balance", "Verdict", "Path",
    "Audit", "State", "process", "compare", "Case",
}  # fmt: skip


def test_every_listed_name_is_there_once():
    assert len(set(lw.__all__)) == len(lw.__all__)
    assert set(lw.__all__) >= FIXED
    assert set(lw.__all__) <= set(dir(lw))


def test_an_unlisted_name_is_an_attribute_error():
    with pytest.raises(AttributeError, match="Flood"):
        _ = lw.Flood


@pytest.mark.parametrize(
    ("name", "thing"), DOCUMENTED, ids=lambda v: v if isinstance(v, str) else ""
)
def test_every_public_name_is_documented_and_its_parameters_are_real(name, thing):
    text = inspect.getdoc(thing)
    assert text, name
    named = _parameters_in(text)
    if named and not is_dataclass(thing):
        known = set(inspect.signature(thing).parameters)
        assert named <= known, f"{name} documents {named - known}"


def _parameters_in(text: str) -> set[str]:
    section = re.search(r"Parameters\n-+\n(.*?)(?:\n\n[A-Z]\w+\n-+\n|\Z)", text, re.S)
    if section is None:
        return set()
    heads = re.findall(r"^(\*{0,2}\w[\w, *]*?)(?: : .*)?$", section[1], re.M)
    return {part.strip().lstrip("*") for head in heads for part in head.split(",")}


@pytest.mark.parametrize("kind", ERRORS, ids=lambda kind: kind.__name__)
def test_every_error_keeps_its_fields_through_a_pickle(kind):
    values = {f.name: _value_for(str(f.type)) for f in fields(kind)}
    error = kind(**values)
    again = pickle.loads(pickle.dumps(error))
    assert type(again) is kind
    assert {name: getattr(again, name) for name in values} == values
    assert str(again) == str(error)


def _value_for(annotation: str) -> object:
    if "tuple[tuple[str, tuple" in annotation:
        return (("T", (3,)), ("p", (2,)))
    if "tuple[tuple[str, str, str]" in annotation:
        return (("table", "field", "text"),)
    if "tuple[tuple[str, str]" in annotation:
        return (("field", "text"),)
    if annotation.startswith("tuple"):
        return ("a", "b")
    return 2 if "int" in annotation else "text"


@pytest.mark.parametrize("path", SOURCES, ids=lambda path: str(path.relative_to(PLUGINS)))
def test_a_built_in_plugin_uses_public_names_only(path):
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.ImportFrom) and (node.module or "").partition(".")[0] == "lostwork":
            assert node.module == "lostwork", f"{path}: from {node.module}"
            assert {alias.name for alias in node.names} <= set(lw.__all__)
        if isinstance(node, ast.Attribute) and getattr(node.value, "id", "") == "lw":
            assert node.attr in {*lw.__all__, "__version__"}, f"{path}: lw.{node.attr}"


def test_entry_points_and_folders_of_plugins_agree():
    project = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))["project"]
    folders = {path.parent.name for path in PLUGINS.glob("*/__init__.py")}
    assert set(project["entry-points"]["lostwork"]) == folders


def test_both_packages_say_that_they_are_typed():
    assert (ROOT / "sdk" / "lostwork" / "py.typed").exists()
    assert (PLUGINS / "py.typed").exists()
