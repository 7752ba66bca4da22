"""The hooks: what a plugin may offer.

A plugin is a module (or an object) named by an entry point of the group ``lostwork``.  It offers
things by implementing one or more of the functions below, each marked with `hookimpl`.  Names
that begin with ``lostwork_`` are kept for hooks: a function of a plugin with such a name that is
no hook is taken for a misspelling and refused.

A hook never receives arguments that it has not asked for, so later versions may add some.  A
change that would break a plugin gets a new hook name, and raises `PLUGIN_API` only if the meaning
of a descriptor changes.
"""

from __future__ import annotations

from collections.abc import Iterable
from typing import TYPE_CHECKING

import pluggy

if TYPE_CHECKING:
    from lostwork.plugins.descriptors import (
        BackendDescriptor,
        CheckDescriptor,
        ExporterDescriptor,
        ProcessDescriptor,
    )

__all__ = [
    "GROUP",
    "PLUGIN_API",
    "hookimpl",
    "lostwork_backends",
    "lostwork_checks",
    "lostwork_exporters",
    "lostwork_processes",
]

PLUGIN_API = 1
"""Version of the plugin interface.  A plugin states as a number the one it was written for."""

GROUP = "lostwork"
"""The entry-point group, and the name under which hooks are marked."""

hookimpl = pluggy.HookimplMarker(GROUP)
"""Marks a function of a plugin as the implementation of the hook of the same name."""

_hookspec = pluggy.HookspecMarker(GROUP)


@_hookspec
def lostwork_backends() -> Iterable[BackendDescriptor]:  # type: ignore[empty-body]
    """Offer property backends.

    Arguments: none.

    When called: once in a process, when the plugins are first asked for.  The answer must be quick
    and must not import a heavy library; the descriptor names the class, which is imported when a
    fluid is opened with this backend.

    Returns
    -------
    iterable of BackendDescriptor
        One for each backend.  The target is a class of backend that is called without arguments.
        Every implementation is asked; none stops the others.
    """


@_hookspec
def lostwork_processes() -> Iterable[ProcessDescriptor]:  # type: ignore[empty-body]
    """Offer process types.

    Arguments: none.

    When called: once in a process, when the plugins are first asked for.  The class that the
    descriptor names is imported when a process of this type is first made.

    Returns
    -------
    iterable of ProcessDescriptor
        One for each process type, under the trade name that a case file gives.  The target is the
        class of the process.  Every implementation is asked; none stops the others.
    """


@_hookspec
def lostwork_exporters() -> Iterable[ExporterDescriptor]:  # type: ignore[empty-body]
    """Offer ways to write out an audit.

    Arguments: none.

    When called: once in a process, when the plugins are first asked for.  The target is imported
    when a report of this form is asked for.

    Returns
    -------
    iterable of ExporterDescriptor
        One for each form, with the file suffix that selects it, if any.  Every implementation is
        asked; none stops the others.
    """


@_hookspec
def lostwork_checks() -> Iterable[CheckDescriptor]:  # type: ignore[empty-body]
    """Offer further checks of a balance.

    Arguments: none.

    When called: once in a process, when the plugins are first asked for.  The target is imported
    when balances are first checked.

    Returns
    -------
    iterable of CheckDescriptor
        One for each check.  Every implementation is asked; none stops the others.
    """
