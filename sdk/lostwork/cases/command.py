"""The command ``lostwork``: its grammar, and how it ends.

Only the grammar is imported here; what a command needs is imported when it runs, so that
``lostwork --help`` answers at once.
"""

from __future__ import annotations

import argparse
import os
import sys
import traceback
from collections.abc import Sequence
from typing import TextIO

from lostwork import __version__
from lostwork.cases.exit_codes import DEFECT, INTERRUPTED, WRONG
from lostwork.errors import InternalDisagreement, LostworkError

__all__ = ["main"]

_EXIT_CODES = (
    "exit codes: 0 done, 1 a step is impossible or unbalanced, 2 the case or the call is wrong, "
    "3 a defect of lostwork or of a plugin, 130 interrupted"
)
_LONGEST_LINE = 600


def main(argv: Sequence[str] | None = None) -> int:
    """Run the command and give its exit code.

    Parameters
    ----------
    argv
        Arguments; those of the process when left out.

    Returns
    -------
    int
        See `lostwork.cases.exit_codes`.
    """
    try:
        arguments = _grammar().parse_args(argv)
    except SystemExit as leaving:  # the parser has said what is wrong, or printed the help
        return leaving.code if isinstance(leaving.code, int) else WRONG
    try:
        return _run(arguments)
    except KeyboardInterrupt:
        print("\ninterrupted", file=sys.stderr)
        return INTERRUPTED
    except InternalDisagreement as error:
        _say(f"defect: {error}")
        return DEFECT
    except LostworkError as error:
        _say(str(error))
        return WRONG
    except Exception:  # a bug must neither look like a mistake of the user's nor like a verdict
        traceback.print_exc()
        _say("defect: this is a bug of lostwork or of a plugin; please report it with the case")
        return DEFECT


def _run(arguments: argparse.Namespace) -> int:
    from lostwork.cases import running  # noqa: PLC0415 - heavy; not needed for the help

    code, text = running.RUN[arguments.command](arguments)
    output = getattr(arguments, "output", None)
    if output is not None:
        running.write(text, output)
    else:
        _print(text)
    return code


def _grammar() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(
        prog="lostwork",
        description="Second-law audit of process equipment: is each step possible, how much work "
        "is lost, where, and by which mechanism.",
        epilog=_EXIT_CODES,
        allow_abbrev=False,
    )
    parser.add_argument("--version", action="version", version=f"lostwork {__version__}")
    commands = parser.add_subparsers(dest="command", required=True, metavar="COMMAND")

    audit = commands.add_parser(
        "audit",
        help="rank the losses of a case and judge every step",
        epilog=_EXIT_CODES,
        allow_abbrev=False,
    )
    audit.add_argument("case", metavar="CASE", help="a TOML case file")
    audit.add_argument("--backend", metavar="NAME", help="property backend for every fluid")
    _report_options(audit)

    compare = commands.add_parser(
        "compare",
        help="audit a case under several property backends",
        epilog=_EXIT_CODES,
        allow_abbrev=False,
    )
    compare.add_argument("case", metavar="CASE", help="a TOML case file")
    compare.add_argument("backends", metavar="BACKEND", nargs="+", help="two or more backends")
    _report_options(compare)

    commands.add_parser("plugins", help="list what is installed, and what failed to load")

    fields = commands.add_parser("fields", help="list the fields of a process type")
    fields.add_argument(
        "process", metavar="TYPE", nargs="?", help="a process type; all are listed without it"
    )
    return parser


def _report_options(parser: argparse.ArgumentParser) -> None:
    parser.add_argument(
        "--as",
        dest="form",
        metavar="EXPORTER",
        help="form of the report (default: by the suffix of --output, else table)",
    )
    parser.add_argument("--output", metavar="FILE", help="write the report to a file")


def _say(text: str) -> None:
    """Print a message on stderr; a quoted value must neither steer the terminal nor flood it."""
    for line in text.split("\n"):
        shown = "".join(c if c.isprintable() else c.encode("unicode_escape").decode() for c in line)
        if len(shown) > _LONGEST_LINE:
            shown = f"{shown[:_LONGEST_LINE]} ..."
        _write(f"lostwork: {shown}\n", sys.stderr)


def _print(text: str) -> None:
    _write(text if text.endswith("\n") else f"{text}\n", sys.stdout)


def _write(text: str, stream: TextIO) -> None:
    encoding = stream.encoding or "utf-8"
    try:
        stream.write(text.encode(encoding, errors="replace").decode(encoding))
        stream.flush()
    except BrokenPipeError:
        # The reader has seen enough; what the audit found still decides the exit code.  Python
        # flushes once more when it leaves, which must go nowhere.
        nowhere = os.open(os.devnull, os.O_WRONLY)
        os.dup2(nowhere, stream.fileno())
