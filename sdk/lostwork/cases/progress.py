"""A line of progress on stderr, for what takes more than a second and is watched by someone."""

from __future__ import annotations

import sys
import threading
from types import TracebackType
from typing import Any

__all__ = ["Progress"]

_PATIENCE = 1.0


class Progress:
    """Called with how much is done, how much there is and what comes next; shows it after 1 s.

    Nothing is shown, and nothing is imported, where stderr is no terminal.
    """

    def __init__(self) -> None:
        self._watched = sys.stderr.isatty()
        self._changing = threading.Lock()
        self._now = (0, 1, "")
        self._bar: Any = None
        self._task: Any = None
        self._timer: threading.Timer | None = None
        self._over = False

    def __enter__(self) -> Progress:
        if self._watched:
            self._timer = threading.Timer(_PATIENCE, self._show)
            self._timer.daemon = True
            self._timer.start()
        return self

    def __call__(self, done: int, total: int, what: str) -> None:
        """Take note of where the work stands."""
        with self._changing:
            self._now = (done, total, what)
            if self._bar is not None:
                self._bar.update(self._task, completed=done, total=total, description=what)

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        if self._timer is not None:
            self._timer.cancel()
        with self._changing:
            self._over = True
            if self._bar is not None:
                self._bar.stop()

    def _show(self) -> None:
        from rich.console import Console  # noqa: PLC0415 - only where it is watched
        from rich.markup import escape  # noqa: PLC0415
        from rich.progress import BarColumn, MofNCompleteColumn, TextColumn  # noqa: PLC0415
        from rich.progress import Progress as Bar  # noqa: PLC0415

        with self._changing:
            if self._over:
                return
            done, total, what = self._now
            self._bar = Bar(
                BarColumn(bar_width=24),
                MofNCompleteColumn(),
                TextColumn("{task.description}", markup=False),
                console=Console(stderr=True),
                transient=True,
            )
            self._task = self._bar.add_task(escape(what), total=total, completed=done)
            self._bar.start()
