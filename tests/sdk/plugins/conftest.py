"""Distributions made for a test: modules and metadata in a directory on sys.path."""

from __future__ import annotations

import importlib
import sys
import textwrap
from collections.abc import Callable, Iterator
from importlib.metadata import EntryPoint, distributions
from pathlib import Path

import pytest


class Site:
    """A place where distributions are installed."""

    def __init__(self, root: Path) -> None:
        self.root = root

    def module(self, name: str, source: str) -> None:
        """Write a module."""
        self.root.joinpath(f"{name}.py").write_text(textwrap.dedent(source), encoding="utf-8")
        importlib.invalidate_caches()

    def distribution(
        self, name: str, entry_points: dict[str, str], *, requires: tuple[str, ...] = ()
    ) -> None:
        """Write the metadata of a distribution, version 1.2."""
        folder = self.root / f"{name.replace('-', '_')}-1.2.dist-info"
        folder.mkdir()
        lines = ["Metadata-Version: 2.1", f"Name: {name}", "Version: 1.2"]
        lines += [f"Requires-Dist: {requirement}" for requirement in requires]
        folder.joinpath("METADATA").write_text("\n".join(lines) + "\n", encoding="utf-8")
        listed = "\n".join(f"{plugin} = {value}" for plugin, value in entry_points.items())
        text = f"[lostwork]\n{listed}\n"
        folder.joinpath("entry_points.txt").write_text(text, encoding="utf-8")
        importlib.invalidate_caches()

    def entry_points(self) -> list[EntryPoint]:
        """Everything installed here, in no telling order."""
        found = [e for one in distributions(path=[str(self.root)]) for e in one.entry_points]
        return sorted(found, key=lambda entry_point: entry_point.name, reverse=True)


@pytest.fixture
def site(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Iterator[Site]:
    """Make an empty site, whose modules are forgotten afterwards."""
    monkeypatch.syspath_prepend(str(tmp_path))
    before = set(sys.modules)
    yield Site(tmp_path)
    for name in set(sys.modules) - before:
        if str(getattr(sys.modules[name], "__file__", "")).startswith(str(tmp_path)):
            del sys.modules[name]


@pytest.fixture
def plugin_offering() -> Callable[..., str]:
    """Write the source of a plugin that offers backends of the given names."""

    def source(*names: str, api_version: int = 1) -> str:
        described = ", ".join(
            f'BackendDescriptor("{name}", "A gas.", "gas_{name}:Gas", api_version={api_version})'
            for name in names
        )
        return f"""
            from lostwork import BackendDescriptor, hookimpl

            @hookimpl
            def lostwork_backends():
                return [{described}]
        """

    return source
