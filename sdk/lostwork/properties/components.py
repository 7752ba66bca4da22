"""Chemical components by name, CAS number, formula or refrigerant number.

Identities come from the `chemicals` library, which is loaded at the first look-up.  A formula that
several well-known compounds share is refused rather than guessed, and so is the symbol of an
element that comes as a molecule (N for N2).  The library lists whatever anyone ever called a
compound ("in" for talc, "flue gas" for carbon monoxide), so of its synonyms abbreviations and
words for mixtures are not taken.
"""

from __future__ import annotations

import difflib
import re
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

from lostwork.errors import AmbiguousComponent, UnknownComponent
from lostwork.properties.refrigerants import CAS_OF_REFRIGERANT, REFRIGERANT_OF_CAS

__all__ = ["Component", "component"]

_LONGEST = 200
_CAS = re.compile(r"\d{2,7}-\d{2}-\d")
_FORMULA = re.compile(r"(?:[A-Z][a-z]?\d*)+")
_REFRIGERANT = re.compile(r"r-?(\d{1,4}[a-z]{0,2}(?:\([ez]\))?)", re.IGNORECASE)
_ABBREVIATION = re.compile(r".{1,3}|[a-z]{1,3}-?\d+")
_MIXTURE = re.compile(r".*(gas|gases|air|oil|brine|fuel|naphtha|gasoline|kerosene|lpg|lng|ngl)")
_GIVE_COMPOSITION = "It is no single compound; give a composition, by names and fractions"
_MOLECULES = {
    "H": ("hydrogen",),
    "N": ("nitrogen",),
    "O": ("oxygen", "ozone"),
    "F": ("fluorine",),
    "Cl": ("chlorine",),
    "Br": ("bromine",),
    "I": ("iodine",),
}


@dataclass(frozen=True)
class Component:
    """A chemical species.

    `molar_mass` is in kg/mol; `elements` are atoms per molecule, by symbol.
    """

    cas: str
    name: str
    formula: str
    molar_mass: float
    elements: tuple[tuple[str, float], ...]


def component(text: str | Component) -> Component:
    """Find a component.

    Parameters
    ----------
    text
        A name ("propane", in any case), a CAS number, a formula ("CO2"; case matters, Co is
        cobalt), or a refrigerant number by ASHRAE 34 ("R134a", "R-717").

    Raises
    ------
    UnknownComponent
        Nothing is known by this text; the nearest names are listed.
    AmbiguousComponent
        The text is a formula of several compounds, or the symbol of an element that comes as a
        molecule.
    """
    if isinstance(text, Component):
        return text
    if not isinstance(text, str) or not text.strip() or len(text) > _LONGEST:
        raise UnknownComponent(name=f"{text!r:.60}")
    return _found(text.strip())


@lru_cache(maxsize=4096)
def _found(text: str) -> Component:
    refrigerant = _REFRIGERANT.fullmatch(text)
    if refrigerant is not None:
        cas = CAS_OF_REFRIGERANT.get(refrigerant.group(1).lower())
        if cas is not None:
            return _of_entry(_by_cas(text, cas))
    if _CAS.fullmatch(text):
        return _of_entry(_by_cas(text, text))
    if text in _MOLECULES:
        raise AmbiguousComponent(name=text, candidates=_MOLECULES[text])
    if _FORMULA.fullmatch(text):
        isomers = _of_formula(text)
        if len(isomers) > 1:
            names = tuple(sorted(_named(entry) for entry in isomers))
            raise AmbiguousComponent(name=text, candidates=names)
        if isomers:
            return _of_entry(isomers[0])
    return _of_entry(_by_name(text))


def _by_cas(text: str, cas: str) -> Any:
    from chemicals.identifiers import search_chemical  # noqa: PLC0415

    entry = _well_known().search_CAS(int(cas.replace("-", "")))
    if entry:
        return entry
    try:
        return search_chemical(cas)
    except ValueError as error:
        raise UnknownComponent(name=text) from error


def _by_name(text: str) -> Any:
    """Look among the compounds of commerce; one that nobody meets is given by its CAS number."""
    plain = " ".join(text.lower().split())
    entry = _well_known().search_name(plain)
    if entry and plain in (str(entry.common_name).lower(), str(entry.iupac_name).lower()):
        return entry
    if _MIXTURE.fullmatch(plain):
        raise UnknownComponent(name=text, instead=_GIVE_COMPOSITION)
    if not entry or _ABBREVIATION.fullmatch(plain):
        raise UnknownComponent(name=text, nearest=_nearest(plain))
    return entry


def _of_formula(text: str) -> list[Any]:
    """Well-known compounds of a formula; spin isomers and ions left out."""
    from chemicals.elements import (  # noqa: PLC0415
        atoms_to_Hill,
        nested_formula_parser,
        periodic_table,
    )

    known = {element.symbol for element in periodic_table}
    if not known.issuperset(re.findall(r"[A-Z][a-z]?", text)):
        return []
    wanted = atoms_to_Hill(nested_formula_parser(text))
    return [
        entry
        for entry in _well_known().CAS_index.values()
        if entry.formula == wanted and _CAS.fullmatch(entry.CASs) and not entry.charge
    ]


@lru_cache(maxsize=1)
def _well_known() -> Any:
    """Give the small data bases of `chemicals`, of the compounds of commerce.

    The large one takes seconds to read, and its isomers that nobody meets would make every formula
    ambiguous.
    """
    from pathlib import Path  # noqa: PLC0415

    from chemicals import identifiers  # noqa: PLC0415

    folder = Path(identifiers.__file__).parent / "Identifiers"
    files = (
        identifiers.PUBCHEM_SMALL_DB_NAME,
        identifiers.PUBCHEM_EXAMPLE_DB_NAME,
        identifiers.PUBCHEM_IONORGANIC_DB_NAME,
    )
    # The library carries no types.
    read: Any = identifiers.ChemicalMetadataDB
    return read(main_db="", user_dbs=[str(folder / file) for file in files])


def _of_entry(entry: Any) -> Component:
    from chemicals.elements import nested_formula_parser  # noqa: PLC0415

    return Component(
        cas=entry.CASs,
        name=_named(entry),
        formula=entry.formula,
        molar_mass=entry.MW / 1000.0,
        elements=tuple(sorted(nested_formula_parser(entry.formula).items())),
    )


def _named(entry: Any) -> str:
    return REFRIGERANT_OF_CAS.get(entry.CASs) or str(entry.common_name)


def _nearest(plain: str) -> tuple[str, ...]:
    names = {str(entry.common_name).lower() for entry in _well_known().CAS_index.values()}
    return tuple(difflib.get_close_matches(plain, sorted(names), n=4, cutoff=0.6))
