"""Descriptors: what a plugin says of a thing it offers, before that thing is imported."""

from __future__ import annotations

import importlib
import re
import sys
from collections.abc import Iterable
from dataclasses import dataclass, field, fields
from functools import cached_property
from importlib.util import find_spec
from typing import Any, ClassVar

from lostwork.errors import DescriptorError, MissingExtra, PluginError, PluginFailed
from lostwork.plugins._install import extra_that_installs, install_line

__all__ = [
    "BackendDescriptor",
    "CheckDescriptor",
    "Descriptor",
    "ExporterDescriptor",
    "ProcessDescriptor",
]

_TARGET = re.compile(r"[^\W\d]\w*(\.[^\W\d]\w*)*:[^\W\d]\w*(\.[^\W\d]\w*)*")
_EXTRA = re.compile(r"[A-Za-z0-9]([A-Za-z0-9._-]*[A-Za-z0-9])?")


@dataclass(frozen=True)
class Descriptor:
    """What every descriptor says.

    Parameters
    ----------
    name : str
        The name users give.  Printable, without ":" (which divides a distribution from a name).
    summary : str
        One line.
    target : str
        Where the thing is: ``"package.module:Class"``.  Imported at first use only.
    api_version : int
        The `PLUGIN_API` the plugin was written for, as a number.
    extra : str, optional
        The extra of the plugin's distribution that installs `requires`.
    requires : tuple of str
        Top-level import names of the libraries that the target needs and that may be absent.
    distribution, plugin : str
        Where the descriptor comes from; filled in when it is read.

    Raises
    ------
    DescriptorError
        A field is malformed.
    """

    name: str
    summary: str
    target: str
    api_version: int = field(kw_only=True)
    extra: str | None = field(default=None, kw_only=True)
    requires: tuple[str, ...] = field(default=(), kw_only=True)
    distribution: str = field(default="", kw_only=True)
    plugin: str = field(default="", kw_only=True)

    kind: ClassVar[str] = "plugin"

    def __post_init__(self) -> None:
        self._need("name", _is_name(self.name), 'a printable name without ":"')
        self._need("summary", _is_line(self.summary), "one line of text")
        self._need("target", _matches(_TARGET, self.target), '"package.module:Class"')
        self._need("api_version", _is_version(self.api_version), "a whole number from 1")
        self._need("extra", self.extra is None or _matches(_EXTRA, self.extra), "an extra's name")
        self._freeze("requires", tuple)
        self._need("requires", all(map(_is_identifier, self.requires)), "top-level import names")

    def _need(self, name: str, holds: bool, expected: str) -> None:
        if not holds:
            raise DescriptorError(str(self.name), name, repr(getattr(self, name)), expected)

    def _freeze(self, name: str, collection: type[tuple[str, ...]] | type[frozenset[str]]) -> None:
        value = getattr(self, name)
        # A lone string is iterable too, and would silently become its letters.
        holds = isinstance(value, Iterable) and not isinstance(value, str)
        self._need(name, holds, f"a {collection.__name__} of names")
        object.__setattr__(self, name, collection(value))

    def __getstate__(self) -> dict[str, Any]:
        """Leave the loaded object behind: it is found again by its target."""
        return {f.name: getattr(self, f.name) for f in fields(self)}

    @property
    def source(self) -> str:
        """The distribution, or the plugin where it came without one."""
        return self.distribution or self.plugin

    @property
    def missing(self) -> tuple[str, ...]:
        """The libraries in `requires` that are not installed; nothing is imported to tell."""
        return tuple(library for library in self.requires if not _is_installed(library))

    @property
    def available(self) -> bool:
        """Whether every library in `requires` is installed."""
        return not self.missing

    def load(self) -> Any:
        """Return the object that `target` names, imported at the first call and then kept.

        Raises
        ------
        MissingExtra
            A library in `requires` is not installed; the message has the line that installs it.
        PluginFailed
            The import fails for another reason, which is chained.
        """
        return self._object

    @cached_property
    def _object(self) -> Any:
        for library in self.missing:
            raise self._missing_extra(library)
        module, _, path = self.target.partition(":")
        try:
            found: Any = importlib.import_module(module)
            for part in path.split("."):
                found = getattr(found, part)
        except PluginError:
            raise
        # A plugin may raise anything while it is imported, and may even try to leave the process;
        # the caller gets one kind of error with the cause chained.
        except (Exception, SystemExit) as error:
            absent = absent_library(error)
            if absent in self.requires:
                raise self._missing_extra(absent) from error
            reason = f"{self.target} cannot be imported: {in_words(error)}"
            fix = advice(error, self.distribution, module)
            raise PluginFailed(self.plugin or self.name, "load", reason, fix) from error
        return found

    def _missing_extra(self, library: str) -> MissingExtra:
        line = install_line(library, self.distribution, self.extra)
        return MissingExtra(self.name, library, line)


@dataclass(frozen=True)
class BackendDescriptor(Descriptor):
    """A property backend; `capabilities` says in words what it can do."""

    capabilities: frozenset[str] = field(default=frozenset(), kw_only=True)

    kind: ClassVar[str] = "backend"

    def __post_init__(self) -> None:
        super().__post_init__()
        self._freeze("capabilities", frozenset)
        self._need("capabilities", all(map(_is_line, self.capabilities)), "a set of words")


@dataclass(frozen=True)
class ProcessDescriptor(Descriptor):
    """A process type, under its trade name."""

    kind: ClassVar[str] = "process"


@dataclass(frozen=True)
class ExporterDescriptor(Descriptor):
    """A form of report; `file_suffix` (with its dot) is the one it is written under."""

    file_suffix: str = field(default="", kw_only=True)

    kind: ClassVar[str] = "exporter"

    def __post_init__(self) -> None:
        super().__post_init__()
        suffix = self.file_suffix
        legal = isinstance(suffix, str) and (not suffix or re.fullmatch(r"(\.\w+)+", suffix))
        self._need("file_suffix", bool(legal), 'a suffix with its dot, such as ".json"')


@dataclass(frozen=True)
class CheckDescriptor(Descriptor):
    """A further check of a balance."""

    kind: ClassVar[str] = "check"


def absent_library(error: BaseException) -> str:
    """Return the top-level name of the library whose absence an error reports, or ""."""
    name = error.name if isinstance(error, ModuleNotFoundError) else None
    return (name or "").partition(".")[0]


def in_words(error: BaseException) -> str:
    """Return the kind and the text of an error."""
    return f"{type(error).__name__}: {error}" if str(error) else type(error).__name__


def advice(error: BaseException, distribution: str, module: str) -> str:
    """Return what to do about an import that failed."""
    absent = absent_library(error)
    if absent and absent != module.partition(".")[0]:
        extra = extra_that_installs(absent, distribution)
        return f"Install it with: {install_line(absent, distribution, extra)}"
    if not distribution:
        return "Correct the plugin, or leave it out"
    return f"Install a release that works, or leave it out: pip install --upgrade {distribution}"


def _is_installed(library: str) -> bool:
    # find_spec raises for a module that is loaded and carries no spec.
    if library in sys.modules:
        return sys.modules[library] is not None
    return find_spec(library) is not None


def _is_line(text: object) -> bool:
    return isinstance(text, str) and bool(text) and text.isprintable() and text == text.strip()


def _is_name(text: object) -> bool:
    return _is_line(text) and ":" not in str(text)


def _is_version(number: object) -> bool:
    return isinstance(number, int) and not isinstance(number, bool) and number >= 1


def _is_identifier(text: object) -> bool:
    return isinstance(text, str) and text.isidentifier()


def _matches(pattern: re.Pattern[str], text: object) -> bool:
    return isinstance(text, str) and pattern.fullmatch(text) is not None
