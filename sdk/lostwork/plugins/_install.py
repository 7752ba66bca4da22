"""What to type so that a missing library is there."""

from __future__ import annotations

import re

__all__ = ["canonical", "extra_that_installs", "install_line"]

_PROJECT = re.compile(r"\s*([A-Za-z0-9][A-Za-z0-9._-]*)")
_EXTRA = re.compile(r"""extra\s*==\s*["']([^"']+)["']""")


def canonical(project: str) -> str:
    """Return the name of a project in the one spelling that package indexes compare by."""
    return re.sub(r"[-_.]+", "-", project).lower()


def install_line(library: str, distribution: str = "", extra: str | None = None) -> str:
    """Return the shell line that installs a library.

    Parameters
    ----------
    library : str
        Import name of the library.
    distribution, extra : str
        The distribution that needs it and the extra that lists it; where either is missing the
        line installs the library by itself.
    """
    if distribution and extra:
        return f'pip install "{distribution}[{extra}]"'
    return f"pip install {library}"


def extra_that_installs(library: str, distribution: str) -> str | None:
    """Return the extra of an installed distribution that asks for a library, if one does.

    Where several do, the one that brings the fewest other libraries along is named.
    """
    import importlib.metadata  # noqa: PLC0415 - slow to import, and needed only after a failure

    try:
        declared = importlib.metadata.requires(distribution) if distribution else None
    except importlib.metadata.PackageNotFoundError:
        return None
    extras: dict[str, set[str]] = {}
    for requirement in declared or ():
        project, extra = _PROJECT.match(requirement), _EXTRA.search(requirement)
        if project and extra:
            extras.setdefault(extra[1], set()).add(canonical(project[1]))
    offering = [extra for extra, projects in extras.items() if canonical(library) in projects]
    return min(offering, key=lambda extra: (len(extras[extra]), extra), default=None)
