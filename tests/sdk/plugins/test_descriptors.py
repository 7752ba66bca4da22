"""What a descriptor says, refuses and loads."""

from __future__ import annotations

import pickle
import sys
from dataclasses import FrozenInstanceError, replace

import pytest

from lostwork.errors import DescriptorError, MissingExtra, PluginFailed
from lostwork.plugins import (
    BackendDescriptor,
    CheckDescriptor,
    Descriptor,
    ExporterDescriptor,
    ProcessDescriptor,
)

KINDS = [BackendDescriptor, CheckDescriptor, ExporterDescriptor, ProcessDescriptor]
STEAM = BackendDescriptor(
    name="steam",
    summary="Water and steam.",
    target="steam_tables:Steam",
    api_version=1,
    extra="steam",
    requires=("absent_tables",),
    capabilities=frozenset({"two phases"}),
    distribution="acme-gases",
    plugin="steam",
)
FREE = replace(STEAM, requires=(), extra=None)


@pytest.mark.parametrize(
    ("field", "value"),
    [
        ("name", ""),
        ("name", "a:b"),
        ("name", " steam"),
        ("name", "ste\nam"),
        ("name", 3),
        ("summary", ""),
        ("summary", "two\nlines"),
        ("summary", None),
        ("target", "steam_tables"),
        ("target", "steam_tables:"),
        ("target", ":Steam"),
        ("target", "steam tables:Steam"),
        ("target", "steam..tables:Steam"),
        ("target", "os:system('x')"),
        ("api_version", 0),
        ("api_version", "1"),
        ("api_version", True),
        ("api_version", 1.0),
        ("extra", ""),
        ("extra", "a]; rm"),
        ("requires", "CoolProp"),
        ("requires", ("a.b",)),
        ("requires", (3,)),
        ("requires", None),
        ("capabilities", "two phases"),
        ("capabilities", {""}),
        ("capabilities", 5),
    ],
)
def test_a_malformed_field_is_refused_and_named(field, value):
    with pytest.raises(DescriptorError) as refused:
        replace(STEAM, **{field: value})
    assert refused.value.field == field
    assert field in str(refused.value)
    assert isinstance(refused.value, ValueError)


@pytest.mark.parametrize("suffix", ["json", ".", ".a/b", 3])
def test_a_suffix_without_its_dot_is_refused(suffix):
    with pytest.raises(DescriptorError, match="file_suffix"):
        ExporterDescriptor("json", "JSON.", "a:B", api_version=1, file_suffix=suffix)


@pytest.mark.parametrize("suffix", ["", ".json", ".tar.gz"])
def test_a_suffix_with_its_dot_is_taken(suffix):
    given = ExporterDescriptor("json", "JSON.", "a:B", api_version=1, file_suffix=suffix)
    assert given.file_suffix == suffix


def test_the_version_of_the_interface_must_be_stated():
    with pytest.raises(TypeError, match="api_version"):
        BackendDescriptor("steam", "Water and steam.", "steam_tables:Steam")


def test_lists_are_frozen():
    given = replace(STEAM, requires=["absent_tables"], capabilities={"two phases"})
    assert given == STEAM
    assert hash(given) == hash(STEAM)
    with pytest.raises(FrozenInstanceError):
        given.name = "water"


@pytest.mark.parametrize("kind", KINDS)
def test_a_descriptor_survives_pickling(kind):
    given = kind("steam", "Water and steam.", "steam_tables:Steam", api_version=1, extra="x")
    assert isinstance(given, Descriptor)
    assert pickle.loads(pickle.dumps(given)) == given


def test_a_descriptor_that_has_loaded_a_local_class_still_survives_pickling(site):
    site.module(
        "steam_tables", "def make():\n    class Steam: pass\n    return Steam\nSteam = make()"
    )
    used = replace(FREE)
    used.load()
    again = pickle.loads(pickle.dumps(used))
    assert again == used
    assert again.load() is used.load()


def test_the_target_is_imported_at_first_use_and_kept(site):
    site.module("steam_tables", "class Steam:\n    class Saturated: pass")
    given = replace(FREE)
    assert given.available
    assert "steam_tables" not in sys.modules
    loaded = given.load()
    assert loaded is sys.modules.pop("steam_tables").Steam
    assert given.load() is loaded
    assert replace(given, target="steam_tables:Steam.Saturated").load().__name__ == "Saturated"


@pytest.mark.parametrize(
    ("changes", "line"),
    [
        ({}, 'pip install "acme-gases[steam]"'),
        ({"distribution": "lostwork"}, 'pip install "lostwork[steam]"'),
        ({"extra": None}, "pip install absent_tables"),
        ({"distribution": ""}, "pip install absent_tables"),
    ],
)
def test_an_absent_library_is_an_error_with_the_line_that_installs_it(site, changes, line):
    # The target itself imports nothing: the library would be missed only later, in use.
    site.module("steam_tables", "class Steam: pass")
    with pytest.raises(MissingExtra) as refused:
        replace(STEAM, **changes).load()
    assert (refused.value.library, refused.value.install) == ("absent_tables", line)
    assert line in str(refused.value)


def test_absent_libraries_are_told_without_an_import(site):
    site.module("present_tables", "raise RuntimeError('imported')")
    given = replace(STEAM, requires=("absent_tables", "present_tables", "sys"))
    assert given.missing == ("absent_tables",)
    assert not given.available
    assert "present_tables" not in sys.modules


def test_a_loaded_library_without_a_spec_counts_as_present(monkeypatch):
    monkeypatch.setitem(sys.modules, "absent_tables", type(sys)("absent_tables"))
    assert STEAM.available


def test_a_library_that_was_barred_counts_as_absent(monkeypatch):
    monkeypatch.setitem(sys.modules, "absent_tables", None)
    assert STEAM.missing == ("absent_tables",)


def test_a_library_installed_after_a_failure_is_found(site):
    site.module("steam_tables", "class Steam: pass")
    given = replace(STEAM)
    with pytest.raises(MissingExtra):
        given.load()
    site.module("absent_tables", "")
    assert given.load().__name__ == "Steam"


@pytest.mark.parametrize(
    ("source", "cause", "fix"),
    [
        ("import another_absent_one", ModuleNotFoundError, "pip install another_absent_one"),
        ("class Stem: pass", AttributeError, "--upgrade acme-gases"),
        ("def broken(:", SyntaxError, "--upgrade acme-gases"),
        ("raise OSError('no table')", OSError, "--upgrade acme-gases"),
        ("import sys; sys.exit()", SystemExit, "--upgrade acme-gases"),
    ],
)
def test_an_import_that_fails_otherwise_is_chained(site, source, cause, fix):
    site.module("steam_tables", source)
    with pytest.raises(PluginFailed) as refused:
        replace(FREE).load()
    assert refused.value.stage == "load"
    assert isinstance(refused.value.__cause__, cause)
    assert fix in str(refused.value)


def test_a_target_that_does_not_exist_is_a_failure_of_the_plugin():
    with pytest.raises(PluginFailed, match="steam_tables"):
        replace(FREE).load()


def test_a_missing_extra_raised_by_the_target_itself_passes(site):
    site.module(
        "steam_tables", "from lostwork import MissingExtra\nraise MissingExtra('a','b','c')"
    )
    with pytest.raises(MissingExtra):
        replace(FREE).load()


def test_an_interrupt_while_the_target_is_imported_passes(site):
    site.module("steam_tables", "raise KeyboardInterrupt")
    with pytest.raises(KeyboardInterrupt):
        replace(FREE).load()
