"""Which fluid of CoolProp is meant: by CAS number, with care for spin isomers and blends.

CoolProp numbers the spin isomers of hydrogen and deuterium with a letter behind the CAS number of
the normal fluid ("1333-74-0p"), and gives pseudo-pure blends a file name in place of a number
("R410A.PPF").  Neither is what a component of that CAS number means, unless asked for by name.
"""

from __future__ import annotations

import difflib
import re
from collections.abc import Mapping
from functools import cache

from CoolProp.CoolProp import (
    AbstractState,
    get_fluid_param_string,
    get_global_param_string,
)

from lostwork import Component, UnknownComponent

__all__ = ["cas_number", "fluid_name", "predefined_composition", "pseudo_pure_name"]

_CAS = re.compile(r"(\d+-\d\d-\d)([a-z]?)")
_COMMON_BLENDS = {"dryair": "Air"}


def fluid_name(component: Component, asked: str | None = None) -> str:
    """CoolProp's name of a component.

    Parameters
    ----------
    component
        Told by its CAS number.
    asked
        The caller's word; where it names a spin isomer of the component, that isomer is meant.

    Raises
    ------
    UnknownComponent
        CoolProp has no equation for it; carries the nearest names it has.
    """
    isomer = _by_alias().get(_plain(asked)) if asked else None
    if isomer is not None:
        number = _CAS.fullmatch(cas_number(isomer))
        if number and number[1] == component.cas:
            return isomer
    try:
        return _by_cas()[component.cas]
    except KeyError:
        raise UnknownComponent(
            name=f"{component.name} (CAS {component.cas}) among the fluids of coolprop",
            nearest=_nearest(component.name),
        ) from None


def pseudo_pure_name(asked: str | None) -> str | None:
    """Name of the pseudo-pure fluid that CoolProp has under this word, or ``None``."""
    if not asked:
        return None
    plain = _plain(asked)
    name = _COMMON_BLENDS.get(plain) or _by_alias().get(plain)
    return name if name and not _CAS.fullmatch(cas_number(name)) else None


def predefined_composition(asked: str) -> dict[str, float] | None:
    """Mole fractions by CAS number of a mixture that CoolProp predefines, or ``None``.

    "Amarillo", "typical natural gas", "R407C" and "R407C.mix" all count as names.
    """
    name = _predefined().get(_plain(asked.removesuffix(".mix").removesuffix(".MIX")))
    if name is None:
        return None
    mixture = AbstractState("HEOS", name)
    fractions = mixture.get_mole_fractions()
    return {
        cas_number(fluid): float(x)
        for fluid, x in zip(mixture.fluid_names(), fractions, strict=True)
    }


@cache
def cas_number(fluid: str) -> str:
    """CAS number of a fluid of CoolProp, or what stands in its place."""
    return str(get_fluid_param_string(fluid, "CAS"))


@cache
def _by_cas() -> Mapping[str, str]:
    found: dict[str, str] = {}
    for fluid in _fluids():
        number = _CAS.fullmatch(cas_number(fluid))
        if number and not number[2]:
            found.setdefault(number[1], fluid)
    return found


@cache
def _by_alias() -> Mapping[str, str]:
    found = {_plain(fluid): fluid for fluid in _fluids()}
    for fluid in _fluids():
        for alias in get_fluid_param_string(fluid, "aliases").split(","):
            if alias:
                found.setdefault(_plain(alias), fluid)
    return found


@cache
def _predefined() -> Mapping[str, str]:
    names = get_global_param_string("predefined_mixtures").split(",")
    return {_plain(name[:-4]): name for name in names if name.endswith(".mix")}


@cache
def _fluids() -> tuple[str, ...]:
    return tuple(sorted(get_global_param_string("FluidsList").split(",")))


def _nearest(name: str) -> tuple[str, ...]:
    plain = _by_alias()
    close = difflib.get_close_matches(_plain(name), plain, n=5, cutoff=0.6)
    return tuple(dict.fromkeys(plain[match] for match in close))


def _plain(name: str) -> str:
    return "".join(letter for letter in name.lower() if letter.isalnum())
