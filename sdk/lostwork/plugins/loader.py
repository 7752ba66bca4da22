"""Finding the plugins that are installed, and reading them one at a time.

A plugin that fails never takes the others with it: its failure is kept, with the reason and what
to do about it.  What is offered under one name by two plugins is refused until the caller chooses.
"""

from __future__ import annotations

import os
import threading
from collections.abc import Iterable
from typing import TYPE_CHECKING, Any, TypeVar

from lostwork.errors import PluginFailed
from lostwork.plugins._install import canonical
from lostwork.plugins._reading import Failure, Installed, Reading, hook_registry
from lostwork.plugins.catalogue import Catalogue
from lostwork.plugins.descriptors import (
    BackendDescriptor,
    CheckDescriptor,
    Descriptor,
    ExporterDescriptor,
    ProcessDescriptor,
)
from lostwork.plugins.hooks import GROUP

if TYPE_CHECKING:
    from importlib.metadata import EntryPoint

__all__ = ["BLOCKED_VARIABLE", "Plugins", "plugins"]

BLOCKED_VARIABLE = "LOSTWORK_BLOCK_PLUGINS"
"""Environment variable: plugins that `plugins` leaves out, divided by commas."""

D = TypeVar("D", bound=Descriptor)


class Plugins:
    """The plugins, and what they offer.

    Parameters
    ----------
    entry_points : iterable of EntryPoint, optional
        The plugins to read; all that are installed in the group ``lostwork`` when left out.  Read
        in order of distribution and name.  The same one listed twice is read once.
    blocked : iterable of str
        Plugins that are not even imported: ``"plugin"`` or ``"distribution:plugin"``.
    strict : bool
        Raise the first failure instead of keeping it.

    Raises
    ------
    PluginError
        A plugin fails, and `strict` is set.
    """

    def __init__(
        self,
        entry_points: Iterable[EntryPoint] | None = None,
        *,
        blocked: Iterable[str] = (),
        strict: bool = False,
    ) -> None:
        self._hooks = hook_registry()
        self._changing = threading.RLock()
        self._installed: tuple[Installed, ...] = ()
        self._failures: tuple[Failure, ...] = ()
        self._arrange()
        left_out = frozenset(blocked)
        for entry_point in _in_order(_found() if entry_points is None else entry_points):
            self._read(entry_point, left_out, strict)
        self._arrange()

    @property
    def backends(self) -> Catalogue[BackendDescriptor]:
        """The property backends by name, read only."""
        return self._backends

    @property
    def processes(self) -> Catalogue[ProcessDescriptor]:
        """The process types by name, read only."""
        return self._processes

    @property
    def exporters(self) -> Catalogue[ExporterDescriptor]:
        """The exporters by name, read only."""
        return self._exporters

    @property
    def checks(self) -> Catalogue[CheckDescriptor]:
        """The further checks by name, read only."""
        return self._checks

    @property
    def failures(self) -> tuple[Failure, ...]:
        """What cannot be used, and why."""
        return self._failures

    @property
    def installed(self) -> tuple[Installed, ...]:
        """Every plugin found, with what it offers, in the order in which they were read."""
        return self._installed

    def backend(self, name: str) -> BackendDescriptor:
        """Return the backend of a name.

        Parameters
        ----------
        name : str
            ``"name"``, or ``"distribution:name"`` where two plugins offer the same.

        Raises
        ------
        PluginClash
            More than one plugin offers the name.
        PluginNotFound
            None does; says what is installed, and chains the failure of the plugin that would.
        """
        return self._backends.find(name, self._failures)

    def process(self, name: str) -> ProcessDescriptor:
        """Return the process type of a name; as `backend`."""
        return self._processes.find(name, self._failures)

    def exporter(self, name: str) -> ExporterDescriptor:
        """Return the exporter of a name; as `backend`."""
        return self._exporters.find(name, self._failures)

    def check(self, name: str) -> CheckDescriptor:
        """Return the further check of a name; as `backend`."""
        return self._checks.find(name, self._failures)

    def register(self, module_or_object: Any, name: str) -> None:
        """Add a plugin at run time, without an entry point.

        What it offers is found as ``"name of the plugin:name"`` too.

        Parameters
        ----------
        module_or_object : module or object
            Its hooks are asked at once.
        name : str
            A name that no plugin and no distribution of a plugin has.

        Raises
        ------
        PluginError
            Any part of the plugin fails; nothing of it is kept.
        """
        with self._changing:
            taken = {canonical(text) for one in self._installed for text in _sources(one)}
            if not name or ":" in name or canonical(name) in taken:
                reason = "a plugin added at run time needs a name of its own, without ':'"
                raise PluginFailed(name, "register", reason, "Give another name")
            reading = Reading(self._hooks, name, strict=True)
            reading.run(lambda: module_or_object, name)
            self._installed += (reading.installed,)
            self._arrange()

    def _read(self, entry_point: EntryPoint, blocked: frozenset[str], strict: bool) -> None:
        plugin, (distribution, version) = entry_point.name, _origin(entry_point)
        if {plugin, f"{distribution}:{plugin}"} & blocked:
            self._installed += (Installed(plugin, distribution, version, blocked=True),)
            return
        reading = Reading(self._hooks, plugin, distribution, version, strict=strict)
        reading.run(entry_point.load, entry_point.value.partition(":")[0])
        self._installed += (reading.installed,)
        self._failures += tuple(reading.failures)

    def _arrange(self) -> None:
        every = [d for one in self._installed for d in one.descriptors]
        self._backends = _catalogue(BackendDescriptor, every)
        self._processes = _catalogue(ProcessDescriptor, every)
        self._exporters = _catalogue(ExporterDescriptor, every)
        self._checks = _catalogue(CheckDescriptor, every)


def _catalogue(kind: type[D], every: Iterable[Descriptor]) -> Catalogue[D]:
    return Catalogue(kind.kind, [d for d in every if isinstance(d, kind)])


def _sources(installed: Installed) -> tuple[str, str]:
    return installed.distribution, installed.plugin


def _found() -> Iterable[EntryPoint]:
    import importlib.metadata  # noqa: PLC0415 - slow to import, and needed only here

    return importlib.metadata.entry_points(group=GROUP)


def _origin(entry_point: EntryPoint) -> tuple[str, str]:
    distribution = entry_point.dist
    return (distribution.name, distribution.version) if distribution else ("", "")


def _in_order(entry_points: Iterable[EntryPoint]) -> list[EntryPoint]:
    # One distribution can be found twice on sys.path; what it lists is then one plugin.
    distinct: dict[tuple[str, str, str], EntryPoint] = {}
    for entry_point in entry_points:
        source = canonical(_origin(entry_point)[0])
        distinct.setdefault((source, entry_point.name, entry_point.value), entry_point)
    return [entry_point for _, entry_point in sorted(distinct.items(), key=lambda item: item[0])]


_process_wide: Plugins | None = None
_loading = threading.RLock()
_loading_here = threading.local()


def plugins() -> Plugins:
    """Return the plugins of this process, read at the first call.

    Those named in the environment variable ``LOSTWORK_BLOCK_PLUGINS`` are left out.  Safe to call
    from several threads: all get the same.

    Raises
    ------
    PluginFailed
        A plugin asks for the plugins while it is being imported.
    """
    global _process_wide  # noqa: PLW0603 - one reading for a process is the purpose
    if _process_wide is not None:
        return _process_wide
    with _loading:
        if getattr(_loading_here, "now", False):
            reason = "the plugins were asked for while they are being read"
            raise PluginFailed(GROUP, "import", reason, "Ask for them when the plugin is used")
        if _process_wide is None:
            _loading_here.now = True
            try:
                named = os.environ.get(BLOCKED_VARIABLE, "").split(",")
                _process_wide = Plugins(blocked=[name.strip() for name in named if name.strip()])
            finally:
                _loading_here.now = False
        return _process_wide
