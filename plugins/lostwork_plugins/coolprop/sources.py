"""Where each equation comes from, as the fluid files of CoolProp say."""

from __future__ import annotations

import CoolProp
from CoolProp.CoolProp import (
    get_BibTeXKey,
)

__all__ = ["source_of"]


def source_of(fluids: tuple[str, ...]) -> str:
    """Name the publications of the equations of `fluids`, by author, journal and year."""
    keys = (f"{fluid}: {get_BibTeXKey(fluid, 'EOS')}" for fluid in fluids)
    return f"Helmholtz-energy equation ({'; '.join(keys)}) in CoolProp {CoolProp.__version__}"
