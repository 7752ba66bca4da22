"""Reading one plugin: import it, register it, ask each of its hooks, judge each descriptor.

The four stages, and how much is lost when one fails:

- ``import``: the module cannot be imported.  The whole plugin is lost.
- ``register``: no hook, a misspelt hook, an illegal signature.  The whole plugin is taken out.
- ``describe``: a hook raises or returns something else than descriptors.  That hook, or that
  item, is lost; the other hooks of the plugin are still asked.
- ``api``: a descriptor was written for another `PLUGIN_API`.  That descriptor is lost; the others
  stand, since each says for itself what it was written for.
"""

from __future__ import annotations

import difflib
import inspect
from collections import Counter
from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass, replace
from typing import Any

import pluggy

from lostwork.errors import ApiVersionMismatch, PluginError, PluginFailed
from lostwork.plugins import hooks
from lostwork.plugins.descriptors import (
    BackendDescriptor,
    CheckDescriptor,
    Descriptor,
    ExporterDescriptor,
    ProcessDescriptor,
    advice,
    in_words,
)

__all__ = ["Failure", "Installed", "Reading", "hook_registry"]

OFFERED: dict[str, type[Descriptor]] = {
    "lostwork_backends": BackendDescriptor,
    "lostwork_checks": CheckDescriptor,
    "lostwork_exporters": ExporterDescriptor,
    "lostwork_processes": ProcessDescriptor,
}
_PREFIX = "lostwork_"


@dataclass(frozen=True)
class Failure:
    """A plugin, or a part of it, that cannot be used.

    `error` is an error of ours with the cause chained; `descriptor` is the name of the descriptor
    at fault, where the fault is in one.
    """

    plugin: str
    distribution: str
    version: str
    stage: str
    error: Exception
    fix: str
    descriptor: str = ""


@dataclass(frozen=True)
class Installed:
    """A plugin that is installed, and what it offers.

    `failed` says in words what cannot be used; a plugin may fail in part and still offer
    `descriptors`.  A blocked plugin was not imported.
    """

    plugin: str
    distribution: str
    version: str
    descriptors: tuple[Descriptor, ...] = ()
    failed: str | None = None
    blocked: bool = False


def hook_registry() -> pluggy.PluginManager:
    """Return a place to register plugins in, which knows our hooks."""
    registry = pluggy.PluginManager(hooks.GROUP)
    registry.add_hookspecs(hooks)
    return registry


class Reading:
    """One plugin as it is read; afterwards `installed` and `failures` hold the outcome."""

    def __init__(
        self,
        registry: pluggy.PluginManager,
        plugin: str,
        distribution: str = "",
        version: str = "",
        *,
        strict: bool = False,
    ) -> None:
        self._hooks = registry
        self._strict = strict
        self.plugin, self.distribution, self.version = plugin, distribution, version
        self.descriptors: tuple[Descriptor, ...] = ()
        self.failures: list[Failure] = []

    @property
    def installed(self) -> Installed:
        """What stands of the plugin."""
        failed = " ".join(str(failure.error) for failure in self.failures) or None
        return Installed(self.plugin, self.distribution, self.version, self.descriptors, failed)

    def run(self, load: Callable[[], Any], module: str) -> None:
        """Take a plugin through the four stages.

        Parameters
        ----------
        load : callable
            Imports and returns the plugin.
        module : str
            The name of its module, for advice.

        Raises
        ------
        PluginError
            At the first failure, if strict; nothing of the plugin is left registered.
        """
        plugin = self._import(load, module)
        if self.failures:
            return
        try:
            if self._register(plugin):
                self._describe(plugin)
        except BaseException:
            self._withdraw(plugin)
            raise

    def _import(self, load: Callable[[], Any], module: str) -> Any:
        try:
            return load()
        # A plugin may raise anything while it is imported, and may even try to leave the process;
        # the other plugins must work all the same.  The cause is kept.
        except (Exception, SystemExit) as error:
            self._fail("import", in_words(error), advice(error, self.distribution, module), error)
        return None

    # --- register ---

    def _register(self, plugin: Any) -> bool:
        try:
            self._refuse_faulty_hooks(plugin)
            self._hooks.register(plugin, name=self._registered_name)
            self._refuse_unknown_hooks(plugin)
        # Registration looks at every attribute of the plugin, any of which may raise; the other
        # plugins must work all the same.  The cause is kept.
        except (Exception, SystemExit) as error:
            self._withdraw(plugin)
            if isinstance(error, PluginFailed):
                self._keep("register", error, error.fix)
            else:
                self._fail("register", in_words(error), "Correct the plugin", error)
            return False
        return True

    def _refuse_faulty_hooks(self, plugin: Any) -> None:
        for fault, fix in _faults(plugin):
            raise PluginFailed(self.plugin, "register", fault, fix)

    def _refuse_unknown_hooks(self, plugin: Any) -> None:
        try:
            self._hooks.check_pending()
        except pluggy.PluginValidationError as error:
            unknown = sorted(
                name
                for name, caller in vars(self._hooks.hook).items()
                if isinstance(caller, pluggy.HookCaller) and not caller.has_spec()
                if any(not implementation.optionalhook for implementation in caller.get_hookimpls())
            )
            fault, fix = _unknown_hook(unknown[0])
            raise PluginFailed(self.plugin, "register", fault, fix) from error
        if not self._hooks.get_hookcallers(plugin):
            raise PluginFailed(
                self.plugin,
                "register",
                "it implements no hook",
                f"Implement one of {', '.join(OFFERED)}, marked with hookimpl",
            )

    @property
    def _registered_name(self) -> str:
        return f"{self.distribution}:{self.plugin}"

    def _withdraw(self, plugin: Any) -> None:
        # The name may belong to an earlier plugin, which stays.
        if plugin is not None and self._hooks.get_plugin(self._registered_name) is plugin:
            self._hooks.unregister(plugin)

    # --- describe and judge ---

    def _describe(self, plugin: Any) -> None:
        read: list[Descriptor] = []
        for hook, kind in OFFERED.items():
            for implementation in getattr(self._hooks.hook, hook).get_hookimpls():
                if implementation.plugin is plugin:
                    offered = self._ask(hook, implementation.function)
                    read += self._distinct(self._judged(hook, kind, offered))
        self.descriptors = tuple(read)

    def _ask(self, hook: str, function: Callable[[], Iterable[object]]) -> list[object]:
        try:
            return list(function())
        # A hook may raise anything; the other hooks are still asked.  The cause is kept.
        except (Exception, SystemExit) as error:
            self._fail("describe", f"{hook}: {in_words(error)}", "Correct the plugin", error)
        return []

    def _judged(
        self, hook: str, kind: type[Descriptor], offered: Iterable[object]
    ) -> Iterator[Descriptor]:
        for item in offered:
            if not isinstance(item, kind):
                reason = f"{hook} offers a {type(item).__name__}, which is no {kind.__name__}"
                self._fail("describe", reason, f"Return a list of {kind.__name__}")
            elif item.api_version != hooks.PLUGIN_API:
                mismatch = ApiVersionMismatch(self.plugin, item.api_version, hooks.PLUGIN_API)
                behind = self.distribution if item.api_version < hooks.PLUGIN_API else "lostwork"
                fix = f"pip install --upgrade {behind}" if behind else "Bring the plugin up to date"
                self._keep("api", mismatch, fix, item.name)
            else:
                yield replace(item, distribution=self.distribution, plugin=self.plugin)

    def _distinct(self, descriptors: Iterable[Descriptor]) -> list[Descriptor]:
        listed = list(descriptors)
        times = Counter(descriptor.name for descriptor in listed)
        for name, count in times.items():
            if count > 1:
                reason = f"{name!r} is offered {count} times, so none of them can be meant"
                self._fail("describe", reason, "Give each a name of its own", descriptor=name)
        return [descriptor for descriptor in listed if times[descriptor.name] == 1]

    def _fail(
        self,
        stage: str,
        reason: str,
        fix: str,
        cause: BaseException | None = None,
        descriptor: str = "",
    ) -> None:
        error = PluginFailed(self.plugin, stage, reason, fix)
        error.__cause__ = cause
        self._keep(stage, error, fix, descriptor)

    def _keep(self, stage: str, error: PluginError, fix: str, descriptor: str = "") -> None:
        if self._strict:
            raise error
        self.failures.append(
            Failure(self.plugin, self.distribution, self.version, stage, error, fix, descriptor)
        )


def _faults(plugin: Any) -> Iterator[tuple[str, str]]:
    """Yield what is wrong with the hooks of a plugin, and what to do."""
    if plugin is None:
        yield "its entry point leads to None", "Let it lead to the module with the hooks"
    for name in dir(plugin):
        function = getattr(plugin, name, None)
        if not inspect.isroutine(function):
            continue
        marked = getattr(function, f"{hooks.GROUP}_impl", None)
        if marked is None:
            if name in OFFERED:
                yield f"{name} is not marked as a hook", "Put @hookimpl above it"
            elif name.startswith(_PREFIX):
                yield _unknown_hook(name)
            continue
        if marked.get("wrapper") or marked.get("hookwrapper"):
            fix = "Return descriptors of your own"
            yield f"{name} wraps a hook, but each is asked by itself", fix
        for parameter in inspect.signature(function).parameters.values():
            if parameter.default is not parameter.empty:
                fix = "Remove the default: such an argument would never be passed"
                yield f"{name} gives its argument {parameter.name} a default", fix


def _unknown_hook(name: str) -> tuple[str, str]:
    # All names share the prefix, which would make any two of them look alike.
    hooks_by_end = {hook.removeprefix(_PREFIX): hook for hook in OFFERED}
    nearest = difflib.get_close_matches(name.removeprefix(_PREFIX), hooks_by_end, n=1, cutoff=0.6)
    if nearest:
        return f"there is no hook {name}", f"Perhaps {hooks_by_end[nearest[0]]} is meant"
    return f"there is no hook {name}", f"The hooks are {', '.join(OFFERED)}"
