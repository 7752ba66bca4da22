"""One object per thread: an object of CoolProp answers wrongly when two threads share it."""

from __future__ import annotations

import threading
from collections.abc import Callable
from typing import Generic, TypeVar

__all__ = ["PerThread"]

Made = TypeVar("Made")


class PerThread(Generic[Made]):
    """Calling it gives the object of the calling thread, made at the first call there."""

    __slots__ = ("_local", "_make")

    def __init__(self, make: Callable[[], Made]) -> None:
        self._make = make
        self._local = threading.local()

    def __call__(self) -> Made:
        """Give the object of this thread."""
        try:
            return self._local.made  # type: ignore[no-any-return]
        except AttributeError:
            self._local.made = self._make()
            return self._local.made  # type: ignore[no-any-return]
