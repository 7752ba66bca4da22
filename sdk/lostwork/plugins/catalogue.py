"""A catalogue: the things of one kind that the plugins offer, found by name."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from typing import Generic, TypeVar

from lostwork.errors import PluginClash, PluginNotFound
from lostwork.plugins._install import canonical
from lostwork.plugins._reading import Failure
from lostwork.plugins.descriptors import Descriptor

__all__ = ["Catalogue"]

D = TypeVar("D", bound=Descriptor)


class Catalogue(Mapping[str, D], Generic[D]):
    """Names to descriptors, read only.

    Iterates over one name for each descriptor, the shortest that means only this one.  Found under
    any name that means one descriptor: ``"name"``, ``"distribution:name"`` and, should two plugins
    of one distribution clash, ``"distribution:plugin:name"``.
    """

    def __init__(self, kind: str, descriptors: Iterable[D] = ()) -> None:
        self._kind = kind
        self._meant: dict[str, list[D]] = {}
        listed = list(descriptors)
        for descriptor in listed:
            for form in _forms(descriptor):
                self._meant.setdefault(_key(form), []).append(descriptor)
        self._names = tuple(sorted(self._shortest(descriptor) for descriptor in listed))

    def __getitem__(self, name: str) -> D:
        meant = self._meant.get(_key(name), [])
        if len(meant) != 1:
            raise KeyError(name)
        return meant[0]

    def __iter__(self) -> Iterator[str]:
        return iter(self._names)

    def __len__(self) -> int:
        return len(self._names)

    def __repr__(self) -> str:
        return f"<{self._kind}: {', '.join(self._names) or 'none'}>"

    def find(self, name: str, failures: Iterable[Failure] = ()) -> D:
        """Return the descriptor of a name, or say why there is none.

        Raises
        ------
        PluginClash
            Several plugins offer the name.
        PluginNotFound
            None does.  Chained to the failure of the plugin that would have offered it; plugins
            that failed before they could say what they offer are named.
        """
        meant = self._meant.get(_key(name), [])
        if len(meant) > 1:
            choices = sorted(self._shortest(descriptor) for descriptor in meant)
            raise PluginClash(self._kind, name, tuple(choices))
        if not meant:
            failed = tuple(failures)
            mute = [f"{f.plugin} (failed at {f.stage})" for f in failed if not f.descriptor]
            cause = next((f.error for f in failed if _would_offer(f, name)), None)
            raise PluginNotFound(self._kind, name, self._names, tuple(mute)) from cause
        return meant[0]

    def _shortest(self, descriptor: D) -> str:
        return next(f for f in _forms(descriptor) if self._meant[_key(f)] == [descriptor])


def _forms(descriptor: Descriptor) -> tuple[str, str, str]:
    name, source = descriptor.name, descriptor.source
    return name, f"{source}:{name}", f"{source}:{descriptor.plugin}:{name}"


def _key(name: str) -> str:
    distribution, colon, rest = name.partition(":")
    return f"{canonical(distribution)}:{rest}" if colon else name


def _would_offer(failure: Failure, name: str) -> bool:
    distribution, _, bare = name.rpartition(":")
    source = failure.distribution or failure.plugin
    if distribution and canonical(distribution.partition(":")[0]) != canonical(source):
        return False
    # A plugin that failed before it was asked is known by its own name only.
    offered = failure.descriptor or failure.plugin
    return bare == offered or (not failure.descriptor and canonical(bare) == canonical(offered))
