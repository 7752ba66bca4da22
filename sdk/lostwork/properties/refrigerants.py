"""Refrigerant numbers of pure fluids (ANSI/ASHRAE Standard 34), by CAS number.

From memory; the formula behind each CAS number is checked against its number in the tests.
"""

from __future__ import annotations

__all__ = ["CAS_OF_REFRIGERANT", "REFRIGERANT_OF_CAS"]

_HALOGENATED = {
    "11": "75-69-4",
    "12": "75-71-8",
    "13": "75-72-9",
    "14": "75-73-0",
    "22": "75-45-6",
    "23": "75-46-7",
    "32": "75-10-5",
    "41": "593-53-3",
    "113": "76-13-1",
    "114": "76-14-2",
    "115": "76-15-3",
    "116": "76-16-4",
    "123": "306-83-2",
    "124": "2837-89-0",
    "125": "354-33-6",
    "134a": "811-97-2",
    "141b": "1717-00-6",
    "142b": "75-68-3",
    "143a": "420-46-2",
    "152a": "75-37-6",
    "161": "353-36-6",
    "218": "76-19-7",
    "227ea": "431-89-0",
    "236fa": "690-39-1",
    "245fa": "460-73-1",
    "1234yf": "754-12-1",
    "1234ze(e)": "29118-24-9",
    "1233zd(e)": "102687-65-0",
}
_BY_NAME = {
    "50": "74-82-8",
    "170": "74-84-0",
    "290": "74-98-6",
    "600": "106-97-8",
    "600a": "75-28-5",
    "601": "109-66-0",
    "601a": "78-78-4",
    "702": "1333-74-0",
    "704": "7440-59-7",
    "717": "7664-41-7",
    "718": "7732-18-5",
    "720": "7440-01-9",
    "728": "7727-37-9",
    "732": "7782-44-7",
    "740": "7440-37-1",
    "744": "124-38-9",
    "764": "7446-09-5",
    "1150": "74-85-1",
    "1270": "115-07-1",
}

CAS_OF_REFRIGERANT = {**_HALOGENATED, **_BY_NAME}
"""CAS number by refrigerant number, without the R and in lower case."""

REFRIGERANT_OF_CAS = {
    cas: "R" + number.replace("(e)", "(E)") for number, cas in _HALOGENATED.items()
}
"""Name of a halogenated compound in the trade."""
