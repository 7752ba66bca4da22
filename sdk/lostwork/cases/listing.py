"""Lists for people who write cases: what is installed, and what a process type takes."""

from __future__ import annotations

import inspect
import re
import textwrap
from collections.abc import Iterable
from typing import Any

import pint

from lostwork.accounting.flows import Content
from lostwork.cases.slots import Slot, process_class, slots
from lostwork.cases.wiring import taken_by
from lostwork.plugins import Descriptor, Installed, Plugins, plugins
from lostwork.plugins.hooks import PLUGIN_API
from lostwork.processes.contract import Process

__all__ = ["list_fields", "list_plugins", "list_processes"]

_INDENT = "    "
_SECTION = re.compile(r"^[A-Z][a-z]+\n-{3,}$", re.MULTILINE)


def list_plugins(installed: Plugins) -> str:
    """Say of every plugin where it comes from, what it offers, and what failed."""
    lines = [f"plugin interface {PLUGIN_API}, {len(installed.installed)} plugins", ""]
    for plugin in installed.installed:
        lines += [_heading(plugin), *_offered(plugin), ""]
    if installed.failures:
        lines.append("failed to load")
        for failure in installed.failures:
            lines += [
                f"  {failure.plugin} ({failure.distribution or 'run time'}), at {failure.stage}",
                f"{_INDENT}reason: {failure.error}",
                f"{_INDENT}fix:    {failure.fix or 'none known'}",
            ]
    else:
        lines.append("nothing failed to load")
    return "\n".join(lines)


def list_processes(installed: Plugins) -> str:
    """Name every process type with its summary."""
    rows = [(name, descriptor.summary) for name, descriptor in installed.processes.items()]
    lines = [f"{len(rows)} process types; 'lostwork fields TYPE' lists what one takes", ""]
    return "\n".join([*lines, *_columns(rows)])


def list_fields(trade_name: str) -> str:
    """Say of every field of a process type what it takes, with an example to start from.

    Raises
    ------
    PluginError
        There is no such process type, or it cannot be loaded.
    """
    process = process_class(trade_name)
    summary = plugins().process(trade_name).summary
    known = slots(process)
    rows = [(name, f"{_needed(slot)}{taken_by(slot)}") for name, slot in known.items()]
    lines = [f"{trade_name}: {summary}", "", *_said_of(process), ""]
    for (name, text), slot in zip(rows, known.values(), strict=True):
        lines.append(f"  {name}")
        lines += textwrap.wrap(text, 92, initial_indent=_INDENT, subsequent_indent=_INDENT)
        if slot.summary:
            said = textwrap.wrap(
                slot.summary, 92, initial_indent=_INDENT, subsequent_indent=_INDENT
            )
            lines += said
    example = ["", "[steps.NAME]", f'type = "{trade_name}"']
    example += [f"{name} = {_example(slot)}" for name, slot in known.items() if slot.needed]
    return "\n".join([*lines, *example])


def _said_of(process: type[Process]) -> list[str]:
    """Give what the class says of itself, up to the sections for programmers."""
    said = inspect.getdoc(process) or ""
    prose, *_ = _SECTION.split(said, maxsplit=1)
    return prose.rstrip().split("\n")


def _heading(plugin: Installed) -> str:
    origin = f"{plugin.distribution} {plugin.version}".strip() or "added at run time"
    blocked = ", blocked, not imported" if plugin.blocked else ""
    failed = ", failed in part" if plugin.failed and plugin.descriptors else ""
    failed = ", failed" if plugin.failed and not plugin.descriptors else failed
    return f"{plugin.plugin} ({origin}{blocked}{failed})"


def _offered(plugin: Installed) -> list[str]:
    rows = [(f"{d.kind} {d.name}", _state(d)) for d in plugin.descriptors]
    return _columns(rows)


def _state(descriptor: Descriptor) -> str:
    if descriptor.available:
        return descriptor.summary
    missing = ", ".join(descriptor.missing)
    line = (
        f'pip install "{descriptor.distribution}[{descriptor.extra}]"'
        if descriptor.extra and descriptor.distribution
        else f"pip install {missing}"
    )
    return f"{descriptor.summary}\nNOT AVAILABLE, {missing} is missing: {line}"


def _columns(rows: Iterable[tuple[str, str]]) -> list[str]:
    rows = list(rows)
    width = max((len(name) for name, _ in rows), default=0)
    lines = []
    for name, text in rows:
        first, *rest = text.split("\n")
        lines.append(f"  {name.ljust(width)}  {first}")
        lines += [f"  {' ' * width}  {line}" for line in rest]
    return lines


def _needed(slot: Slot) -> str:
    if slot.needed:
        return "needed; "
    default = slot.default
    if default is None or default in ((), {}):
        return "optional; "
    return f"optional, {_shown(default)} if left out; "


def _shown(default: Any) -> str:
    if isinstance(default, pint.Quantity):
        return f"{default.magnitude:g} {default.units:~}".strip()
    return f"{default}"


def _example(slot: Slot) -> str:
    if slot.is_reference:
        one = '"a charge or a step"' if slot.flows == {Content} else '"a stream or a step"'
    elif slot.takes_heat:
        one = '{amount = "-30 kW", at = "80 degC"}'
    elif slot.takes_work:
        one = '"150 kW"'
    elif slot.choices:
        one = f'"{slot.choices[0]}"'
    elif slot.dimensions:
        one = slot.dimensions[0].example
    else:
        one = "..."
    if slot.by_name:
        return f"{{outlet = {one}}}"
    return f"[{one}]" if slot.several else one
