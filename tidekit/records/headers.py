"""What the words of an export say: names of columns, unit, time zone, vertical reference."""

from __future__ import annotations

import re
from dataclasses import dataclass

from tidekit.errors import RecordError
from tidekit.records.units import UNIT_OF, unit_in
from tidekit.records.zones import SEVERAL, zone_in, zone_named

_REFERENCE = re.compile(
    r"(?:datum|vertical.?reference|reference.?level)\s*[\"']?\s*[:,=;\t ]\s*[\"']?([A-Za-z0-9][A-Za-z0-9 .\-]*)",
    re.IGNORECASE,
)
_DATUMS = ("MSL", "MLLW", "MLW", "MHW", "MHHW", "LAT", "HAT", "NAVD88", "AHD", "CD", "NAP", "TGZ", "ISLW")
_BRACKETS = re.compile(r"[(\[{]\s*([^)\]}]*?)\s*[)\]}]")
_UNIT_LINE = re.compile(r"\bunits?\b[^:=,;\t]*[:=,;\t]\s*[\"']?([^\s,;\"']+)", re.IGNORECASE)


@dataclass(frozen=True)
class Said:
    """A fact that an export states, or fails to."""

    value: str | None
    """What it says; None if it does not."""
    where: str
    """Where it says so, for evidence; or what it lacks."""
    fault: str = ""
    """Why what it says cannot be used, if so."""
    line: int | None = None
    """The line of the fault."""


def unit_said(label: str, head: list[str]) -> Said:
    """Unit of the heights, from the column's name or the lines above the table.

    Parameters
    ----------
    label : str
        Everything that stands above the height column.
    head : list of str
        Lines above the first row.

    Returns
    -------
    Said
        The unit, and where it stands.
    """
    found = unit_in(label)
    if found:
        return Said(found, f"the column's name {label!r}")
    for number, line in enumerate(head, 1):
        match = _UNIT_LINE.search(line)
        if match:
            found = unit_in(match[1]) or unit_in(line)
            if found:
                return Said(found, f"line {number}")
            return Said(None, "", f"unknown unit {match[1]!r}; declare the unit of the heights (--unit)", number)
        if re.search(r"level|height|elevation|slev", line, re.IGNORECASE) and "," not in unit_context(line):
            found = unit_in(unit_context(line))
            if found:
                return Said(found, f"line {number}")
    for inside in _BRACKETS.findall(label):
        if re.fullmatch(r"[A-Za-z]+", inside) and inside.upper() not in _DATUMS:
            return Said(
                None, "", f"unknown unit {inside!r}; declare the unit of the heights (--unit)", len(head) or None
            )
    return Said(None, "no unit stated")


def unit_context(line: str) -> str:
    """The piece of a header line that speaks of the level.

    Examples
    --------
    >>> unit_context("Time: PST,Water Level: m (MSL),,,")
    'Water Level: m (MSL)'
    """
    pieces = re.split(r"[,;\t]", line)
    return next((piece for piece in pieces if re.search(r"level|height|elevation|slev", piece, re.IGNORECASE)), "")


def zone_said(head: list[str], labels: list[str]) -> Said:
    """Time zone, from the names of the time's columns or the lines above the table.

    Parameters
    ----------
    head : list of str
        Lines above the first row.
    labels : list of str
        What stands above the columns of the time.

    Returns
    -------
    Said
        The zone as text for `zones.zone_named`, and where it stands.
    """
    for label in labels:
        found = zone_in(label)
        if found:
            return Said(found, f"the column's name {label!r}")
    doubt: Said | None = None
    for number, line in [*enumerate(head, 1)] + [(len(head), label) for label in labels]:
        if not re.search(r"time|zone|clock|utc|gmt|(?:^|\W)tz(?:$|\W)", line, re.IGNORECASE):
            continue
        found = zone_in(line)
        if found and not _zone_fault(found):
            return Said(found, f"line {number}")
        if found:
            return Said(None, "", _zone_fault(found), number)
        several = next((word for word in re.split(r"[^A-Za-z]+", line) if word.upper() in SEVERAL), None)
        if several and doubt is None:
            message = f"{several!r} is not one time zone; declare it (--time-zone UTC-5, or America/Chicago)"
            doubt = Said(None, "", message, number)
    return doubt or Said(None, "no time zone stated")


def _zone_fault(text: str) -> str:
    """Why a text is no zone; empty if it is one."""
    try:
        zone_named(text)
    except RecordError as error:
        return str(error)
    return ""


def reference_said(head: list[str], label: str) -> str | None:
    """What the heights are above, if the export says."""
    for line in head:
        match = _REFERENCE.search(line.strip("#%* \"'"))
        if match:
            return match[1].strip()
    for text in (label, *map(unit_context, head)):
        for word in re.split(r"[^A-Za-z0-9]+", text):
            if word.upper() in _DATUMS and word.lower() not in UNIT_OF:
                return word.upper()
    return None
