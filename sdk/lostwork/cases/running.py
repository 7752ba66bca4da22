"""What each command does: a text to be printed, and an exit code."""

from __future__ import annotations

import argparse
import os
import shutil
import sys
import tempfile
from collections.abc import Callable, Mapping
from pathlib import Path
from types import MappingProxyType

from lostwork.accounting.comparison import compare
from lostwork.accounting.export import Exporter, Presentation
from lostwork.cases.case import Case
from lostwork.cases.exit_codes import DONE, NOT_ACCEPTABLE
from lostwork.cases.listing import list_fields, list_plugins, list_processes
from lostwork.cases.progress import Progress
from lostwork.errors import CaseError, LostworkError
from lostwork.plugins import plugins

__all__ = ["RUN", "write"]

_DEFAULT_FORM = "table"


def audit(arguments: argparse.Namespace) -> tuple[int, str]:
    """Audit a case, under another backend where one is named."""
    exporter = _exporter(arguments)
    case = Case.read(arguments.case)
    if arguments.backend is not None:
        case = case.with_backend(arguments.backend)
    with Progress() as progress:
        audited = case.audit(progress)
        acceptable = audited.acceptable
        text = exporter(audited, _presentation(case, arguments))
    return (DONE if acceptable else NOT_ACCEPTABLE), text


def compare_backends(arguments: argparse.Namespace) -> tuple[int, str]:
    """Audit a case under several backends."""
    exporter = _exporter(arguments)
    case = Case.read(arguments.case)
    with Progress() as progress:
        comparison = compare(case, arguments.backends, progress=progress)
        text = exporter(comparison, _presentation(case, arguments))
    return (DONE if comparison.acceptable else NOT_ACCEPTABLE), text


def show_plugins(arguments: argparse.Namespace) -> tuple[int, str]:
    """List what is installed."""
    return DONE, list_plugins(plugins())


def show_fields(arguments: argparse.Namespace) -> tuple[int, str]:
    """List the fields of a process type, or all types."""
    if arguments.process is None:
        return DONE, list_processes(plugins())
    return DONE, list_fields(arguments.process)


RUN: Mapping[str, Callable[[argparse.Namespace], tuple[int, str]]] = MappingProxyType(
    {
        "audit": audit,
        "compare": compare_backends,
        "plugins": show_plugins,
        "fields": show_fields,
    }
)


def write(text: str, output: str) -> None:
    """Write a report to a file, whole or not at all.

    Raises
    ------
    CaseError
        It cannot be written there.
    """
    target = Path(output)
    try:
        if target.exists() and not target.is_file():
            # A device or a pipe is written to, not replaced.
            target.write_text(text, encoding="utf-8")
            return
        handle, part = tempfile.mkstemp(dir=target.parent, prefix=f".{target.name[:40]}.")
        try:
            with os.fdopen(handle, "w", encoding="utf-8", newline="") as file:
                file.write(text)
            _as_a_new_file(part)
            Path(part).replace(target)
        except BaseException:
            Path(part).unlink(missing_ok=True)
            raise
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        text = (
            f"cannot be written ({reason}); expected a file in a directory that can be written to"
        )
        raise CaseError(file=f"--output {output}", problems=(("", "", text),)) from error


def _as_a_new_file(path: str) -> None:
    """Give a temporary file, made for its owner alone, the rights of any other new file."""
    mask = os.umask(0)
    os.umask(mask)
    Path(path).chmod(0o666 & ~mask)


def _exporter(arguments: argparse.Namespace) -> Exporter:
    """Find the exporter before anything is computed."""
    form = arguments.form or _by_suffix(arguments.output) or _DEFAULT_FORM
    try:
        exporter: Exporter = plugins().exporter(form).load()
    except LostworkError as error:
        raise CaseError(file=f"--as {form}", problems=(("", "", str(error)),)) from error
    return exporter


def _by_suffix(output: str | None) -> str | None:
    if output is None:
        return None
    fitting = [
        name
        for name, descriptor in plugins().exporters.items()
        if descriptor.file_suffix and output.endswith(descriptor.file_suffix)
    ]
    return fitting[0] if len(fitting) == 1 else None


def _presentation(case: Case, arguments: argparse.Namespace) -> Presentation:
    to_terminal = arguments.output is None and sys.stdout.isatty()
    return Presentation(
        title=case.title,
        note=case.note,
        width=shutil.get_terminal_size().columns if to_terminal else None,
        colour=to_terminal and not os.environ.get("NO_COLOR") and os.environ.get("TERM") != "dumb",
    )
