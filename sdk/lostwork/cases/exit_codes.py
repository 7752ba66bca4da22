"""Exit codes of the command."""

from typing import Final

__all__ = ["DEFECT", "DONE", "INTERRUPTED", "NOT_ACCEPTABLE", "WRONG"]

DONE: Final = 0
"""Done; for an audit, every step is possible and balanced."""
NOT_ACCEPTABLE: Final = 1
"""A step is impossible or unbalanced, or a shared stream differs at its two ends."""
WRONG: Final = 2
"""The case or the call is wrong; a message on stderr says where and what was expected."""
DEFECT: Final = 3
"""A defect of lostwork or of a plugin: two routes disagree, or an error that is none of ours."""
INTERRUPTED: Final = 130
"""Interrupted from the keyboard, as a shell counts it."""
