"""Plugins: the hooks they implement, the descriptors they return, and how they are found.

`plugins` is also the name under which ``lostwork`` offers the call that returns the plugins of
this process.  Python binds this folder to that name as soon as anything imports it, so the folder
can be called: ``lostwork.plugins()`` works whatever was imported first.
"""

from __future__ import annotations

import sys
from types import ModuleType

from lostwork.plugins._reading import Failure, Installed
from lostwork.plugins.catalogue import Catalogue
from lostwork.plugins.descriptors import (
    BackendDescriptor,
    CheckDescriptor,
    Descriptor,
    ExporterDescriptor,
    ProcessDescriptor,
)
from lostwork.plugins.hooks import PLUGIN_API, hookimpl
from lostwork.plugins.loader import Plugins, plugins

__all__ = [
    "PLUGIN_API",
    "BackendDescriptor",
    "Catalogue",
    "CheckDescriptor",
    "Descriptor",
    "ExporterDescriptor",
    "Failure",
    "Installed",
    "Plugins",
    "ProcessDescriptor",
    "hookimpl",
    "plugins",
]


class _CallableFolder(ModuleType):
    def __call__(self) -> Plugins:
        return plugins()


sys.modules[__name__].__class__ = _CallableFolder
