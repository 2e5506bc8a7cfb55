"""Units of height: to metres, and as people write them."""

from __future__ import annotations

import re

from tidekit.errors import RecordError

METRES = {
    "m": 1.0,
    "dm": 0.1,
    "cm": 0.01,
    "mm": 0.001,
    "ft": 0.3048,
    "us_ft": 1200.0 / 3937.0,
    "in": 0.0254,
}
"""Metres in each unit: International System; international yard and pound agreement (1959); US survey foot."""

_SPELLINGS = {
    "m": "m meter meters metre metres mtr",
    "dm": "dm decimeter decimeters decimetre decimetres",
    "cm": "cm centimeter centimeters centimetre centimetres",
    "mm": "mm millimeter millimeters millimetre millimetres",
    "ft": "ft foot feet",
    "us_ft": "us_ft us-ft usft us_survey_foot us_survey_feet",
    "in": "in inch inches",
}
UNIT_OF = {word: unit for unit, words in _SPELLINGS.items() for word in words.split()}


def unit_named(text: str) -> str:
    """Find the unit that a declaration names.

    Raises
    ------
    RecordError
        If it names none.

    Examples
    --------
    >>> unit_named("Metres")
    'm'
    """
    unit = UNIT_OF.get(text.strip().lower())
    if unit is None:
        message = f"unknown unit {text!r}; wanted one of {', '.join(METRES)}"
        raise RecordError(message)
    return unit


def unit_in(text: str) -> str | None:
    """Find a unit written as a word of its own in a header, or None.

    Examples
    --------
    >>> unit_in("SLEV(metres)"), unit_in("height_ft_mllw"), unit_in("Sigma")
    ('m', 'ft', None)
    """
    words = [word for word in re.split(r"[^A-Za-z]+", text) if word]
    # A capital M is a unit only where all is written in capitals: it also names sensors and places.
    shouted = text == text.upper()
    found = {UNIT_OF[w.lower()] for w in words if w.lower() in UNIT_OF and w.lower() != "in" and (w != "M" or shouted)}
    return found.pop() if len(found) == 1 else None
