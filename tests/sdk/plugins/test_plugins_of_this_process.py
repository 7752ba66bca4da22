"""The plugins of the process, the hooks on offer, and the entry points of this distribution."""

from __future__ import annotations

import importlib.metadata
import inspect
import json
import subprocess
import sys
import threading
import time
from pathlib import Path

import pluggy
import pytest

import lostwork
from lostwork.errors import PluginFailed
from lostwork.plugins import Plugins, _reading, hooks, loader, plugins

HOOKS = [
    name
    for name, function in vars(hooks).items()
    if inspect.isfunction(function) and name.startswith("lostwork_")
]


@pytest.fixture
def unread(monkeypatch):
    """Forget the plugins of this process."""
    monkeypatch.setattr(loader, "_process_wide", None)


def in_a_new_process(program: str) -> list[object]:
    done = subprocess.run(
        [sys.executable, "-c", program], capture_output=True, text=True, check=True
    )
    return json.loads(done.stdout)


def test_every_thread_gets_the_same_plugins_read_once(unread, monkeypatch):
    readings = []

    class Counted(Plugins):
        def __init__(self, **options):
            readings.append(options)
            time.sleep(0.05)
            super().__init__([], **options)

    monkeypatch.setattr(loader, "Plugins", Counted)
    start = threading.Barrier(16)
    got = []

    def ask():
        start.wait()
        got.append(plugins())

    threads = [threading.Thread(target=ask) for _ in range(16)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert len(readings) == 1
    assert len(got) == 16
    assert len({id(one) for one in got}) == 1


def test_plugins_named_in_the_environment_are_left_out(unread, site, plugin_offering, monkeypatch):
    site.module("noisy_plugin", "raise RuntimeError")
    site.module("quiet_plugin", plugin_offering("quiet"))
    site.distribution("gases", {"noisy": "noisy_plugin", "quiet": "quiet_plugin"})
    monkeypatch.setattr(loader, "_found", site.entry_points)
    monkeypatch.setenv("LOSTWORK_BLOCK_PLUGINS", " noisy , other ")
    assert plugins().failures == ()
    assert [one.plugin for one in plugins().installed if one.blocked] == ["noisy"]
    assert list(plugins().backends) == ["quiet"]


def test_a_plugin_that_asks_for_the_plugins_while_it_is_imported_fails(unread, site, monkeypatch):
    site.module("eager_plugin", "import lostwork\nlostwork.plugins()")
    site.distribution("gases", {"eager": "eager_plugin"})
    monkeypatch.setattr(loader, "_found", site.entry_points)
    (failure,) = plugins().failures
    assert "while they are being read" in str(failure.error)
    assert isinstance(failure.error.__cause__, PluginFailed)


def test_a_reading_that_is_interrupted_is_begun_again(unread, monkeypatch):
    def interrupted():
        raise KeyboardInterrupt

    monkeypatch.setattr(loader, "_found", interrupted)
    with pytest.raises(KeyboardInterrupt):
        plugins()
    monkeypatch.setattr(loader, "_found", list)
    assert plugins().installed == ()


def test_every_hook_says_when_it_is_called_and_what_it_returns():
    assert HOOKS
    for name in HOOKS:
        text = inspect.getdoc(getattr(hooks, name)) or ""
        for part in ("Arguments:", "When called:", "Returns\n-------"):
            assert part in text, f"{name} does not say {part!r}"


def test_every_hook_is_asked_and_no_other():
    registry = _reading.hook_registry()
    known = {n for n, c in vars(registry.hook).items() if isinstance(c, pluggy.HookCaller)}
    assert known == set(HOOKS) == set(_reading.OFFERED)
    assert set(HOOKS) <= set(hooks.__all__)


def test_every_public_name_exists():
    folder = importlib.import_module("lostwork.plugins")
    assert [name for name in folder.__all__ if not hasattr(folder, name)] == []


@pytest.mark.parametrize(
    "first",
    [
        "",
        "import lostwork.plugins",
        "from lostwork import hookimpl",
        "from lostwork.plugins import plugins",
        "from lostwork import plugins",
    ],
)
def test_the_plugins_can_be_called_for_whatever_was_imported_first(first):
    program = f"""
import json
{first}
import lostwork as lw
from lostwork.plugins import loader
loader._found = list
import lostwork.plugins as folder
same = lw.plugins() is folder.plugins() is folder()
print(json.dumps([same, folder.Plugins is type(lw.plugins())]))
"""
    assert in_a_new_process(program) == [True, True]


def test_the_hooks_are_imported_without_a_numerical_library_or_a_plugin():
    program = """
import json, sys
import lostwork.plugins
print(json.dumps(sorted(sys.modules)))
"""
    loaded = {str(name).partition(".")[0] for name in in_a_new_process(program)}
    assert not loaded & {"numpy", "pint", "pydantic", "chemicals", "rich", "lostwork_plugins"}
    assert "pluggy" in loaded


def test_the_entry_points_of_this_distribution_are_the_plugin_directories():
    listed = {
        entry_point.name: entry_point.value
        for entry_point in importlib.metadata.distribution("lostwork").entry_points
        if entry_point.group == hooks.GROUP
    }
    namespace = importlib.import_module("lostwork_plugins")
    folders = {
        folder.name: f"lostwork_plugins.{folder.name}"
        for place in namespace.__path__
        for folder in Path(place).iterdir()
        if folder.is_dir() and folder.name != "__pycache__"
    }
    assert listed == folders


def test_the_core_names_no_plugin():
    root = Path(lostwork.__file__).parent
    naming = [
        path.relative_to(root)
        for path in root.rglob("*.py")
        if "lostwork_plugins" in path.read_text(encoding="utf-8")
    ]
    assert naming == []
