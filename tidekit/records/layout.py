"""The layout of an export: where the times and heights are and how they are written. Saved as TOML."""

from __future__ import annotations

import json
import tomllib
from dataclasses import dataclass, fields, replace
from pathlib import Path
from typing import Any, Literal, get_args

from tidekit.errors import RecordError
from tidekit.files import write_text
from tidekit.records.units import unit_named
from tidekit.records.zones import zone_named

BLANKS, FIXED = "blanks", "fixed"
"""Delimiters that are no character: runs of blanks, and columns that begin at fixed places."""
MISSING_MARKS = ("", "-", "--", "---", "*", "NA", "N/A", "NaN", "nan", "null", "NULL", "None", "none", "missing", "M")
"""Texts that exports write where there is no value (common practice, no source)."""
DateOrder = Literal["year-month-day", "day-month-year", "month-day-year", "year-day-of-year"]
DATE_ORDERS: tuple[DateOrder, ...] = get_args(DateOrder)
TIME_PARTS = {
    "stamp": "date and clock together",
    "date": "date",
    "clock": "hours and minutes, as 5:30, 05:30:00, 0530 or 5:30 PM",
    "year": "year",
    "month": "month, 1 to 12",
    "day": "day of the month",
    "day_of_year": "day of the year from 1, with a fraction or without",
    "hour": "hour, with a fraction or without",
    "minute": "minute",
    "second": "second",
    "hhmm": "hours and minutes as one number, such as 530 for half past five",
    "epoch_s": "seconds since 1970-01-01 UTC",
    "epoch_ms": "milliseconds since 1970-01-01 UTC",
}
"""What a column of the time may hold."""


@dataclass(frozen=True, kw_only=True)
class Layout:
    """How one export is written. Lines and columns count from 1."""

    delimiter: str
    """One character, ``blanks`` for runs of blanks, or ``fixed`` for columns that begin at `edges`."""
    first_row: int
    """Line of the first data row."""
    time_columns: tuple[int, ...]
    """Columns that make up the time."""
    height_column: int
    """Column of the height."""
    time_parts: tuple[str, ...] = ("stamp",)
    """What each of `time_columns` holds, of `TIME_PARTS`."""
    date_order: DateOrder = "year-month-day"
    """Order of year, month and day in dates."""
    unit: str | None = None
    """Unit of the heights, one of `units.METRES`."""
    time_zone: str | None = None
    """Zone of the times; None where each time carries its offset, or none is known yet."""
    decimal: str = "."
    """Decimal mark, ``.`` or ``,``."""
    missing: tuple[str, ...] = MISSING_MARKS
    """Texts that stand for no value; numbers among them match by value. Usual numbers such as -99 count without being
    named where they lie far from all other heights."""
    comment: str = "#"
    """A line that begins with it is no row; empty for none."""
    edges: tuple[int, ...] = ()
    """First character of each column, where the delimiter is ``fixed``."""
    flag_column: int | None = None
    """Column of quality flags by the open standard (1 2 3 4 9)."""
    quality_column: int | None = None
    """Column of the exporter's own mark of quality, if it shall count."""
    quality_suspect: tuple[str, ...] = ()
    """Its marks for heights in doubt: flag 3."""
    quality_bad: tuple[str, ...] = ()
    """Its marks for heights not to be used: flag 4."""
    vertical_reference: str | None = None
    """What the heights are above, in the export's words."""

    def declared(self, *, time_zone: str | None, unit: str | None) -> Layout:
        """The same with a declared zone or unit in place of the recognised one."""
        layout = self
        if time_zone is not None:
            zone_named(time_zone)
            layout = replace(layout, time_zone=time_zone)
        return layout if unit is None else replace(layout, unit=unit_named(unit))

    def describe(self) -> str:
        """One line for people."""
        zone = self.time_zone or "offset in each time"
        where = ", ".join(f"{part} in column {n}" for n, part in zip(self.time_columns, self.time_parts, strict=True))
        parted = {",": "commas", ";": "semicolons", "\t": "tabs", BLANKS: "runs of blanks", FIXED: "fixed places"}
        return (
            f"columns parted by {parted.get(self.delimiter, self.delimiter)}, rows from line {self.first_row}, "
            f"time ({where}; {self.date_order}; {zone}), height in column {self.height_column} "
            f"({self.unit or 'no unit'}, decimal mark {self.decimal})"
        )


def write_layout(layout: Layout, path: str | Path) -> None:
    """Save a layout as TOML.

    Raises
    ------
    InputError
        If the file cannot be written.
    """
    lines = ["# Layout of a gauge export; lines and columns count from 1."]
    for field in fields(layout):
        value = getattr(layout, field.name)
        if value not in (None, ()):
            # JSON's strings, numbers and lists are TOML's.
            lines.append(f"{field.name} = {json.dumps(list(value) if isinstance(value, tuple) else value)}")
    write_text(path, "\n".join(lines) + "\n")


def read_layout(path: str | Path) -> Layout | dict[str, Any]:
    """Read a saved layout.

    Parameters
    ----------
    path : path-like
        TOML with keys of `Layout`.

    Returns
    -------
    Layout or dict
        The layout; where the file leaves out where things stand (`PLACES`), what it declares, by key: the rest is to
        be recognised.

    Raises
    ------
    RecordError
        If the file is missing, is not TOML, or has an unknown or impossible key.
    """
    try:
        table: dict[str, Any] = tomllib.loads(Path(path).read_text(encoding="utf-8"))
    except (OSError, UnicodeDecodeError) as error:
        message = f"cannot read this layout ({getattr(error, 'strerror', None) or 'not UTF-8'}); check the path"
        raise RecordError(message, path=path) from error
    except tomllib.TOMLDecodeError as error:
        message = f"this layout is not TOML: {error}"
        raise RecordError(message, path=path) from error
    values: dict[str, Any] = {key: _checked(key, value, path) for key, value in table.items()}
    whole = all(key in values for key in PLACES)
    if not whole and (given := [key for key in (*PLACES, "time_parts", "edges") if key in values]):
        message = f"where columns stand is declared whole or not at all: wanted {', '.join(PLACES)}"
        raise RecordError(message, path=path, key=given[0])
    layout = Layout(**values) if whole else Layout(**_NOWHERE, **values)
    for key, message in _faults(layout):
        raise RecordError(message, path=path, key=key)
    try:
        layout = layout.declared(time_zone=layout.time_zone, unit=layout.unit)
    except RecordError as error:
        raise RecordError(str(error), path=path) from error
    return layout if whole else {key: getattr(layout, key) for key in values}


PLACES = ("delimiter", "first_row", "time_columns", "height_column")
"""Keys that say where things stand."""
_NOWHERE: dict[str, Any] = {"delimiter": "|", "first_row": 1, "time_columns": (1,), "height_column": 2}
_NUMBERS = ("first_row", "height_column", "quality_column", "flag_column")
_LISTS = {"time_columns": int, "edges": int, "time_parts": str, "missing": str}
_LISTS |= {"quality_suspect": str, "quality_bad": str}


def _checked(key: str, value: object, path: str | Path) -> object:
    """A value of the kind that its key wants."""
    known = [field.name for field in fields(Layout)]
    if key not in known:
        message = f"unknown key; wanted one of {', '.join(known)}"
        raise RecordError(message, path=path, key=key)
    if key in _LISTS:
        kind = _LISTS[key]
        if isinstance(value, list) and all(type(entry) is kind for entry in value):
            return tuple(value)
        wanted = f"a list of {'numbers' if kind is int else 'texts'}"
    elif key in _NUMBERS:
        if type(value) is int:
            return value
        wanted = "a whole number"
    elif isinstance(value, str):
        return value
    else:
        wanted = "a text"
    message = f"is {value!r}; wanted {wanted}"
    raise RecordError(message, path=path, key=key)


def _faults(layout: Layout) -> list[tuple[str, str]]:
    """Keys whose values are impossible, and why."""
    whole = len(layout.time_columns) == len(layout.time_parts) > 0
    named = all(part in TIME_PARTS for part in layout.time_parts)
    delimiter = len(layout.delimiter) == 1 and layout.delimiter.isascii() and layout.delimiter not in '\r\n"'
    others = [layout.height_column, *(n for n in (layout.quality_column, layout.flag_column) if n is not None)]
    columns, last = (min(*others, *layout.time_columns), max(*others, *layout.time_columns)) if whole else (0, 0)
    checks = (
        ("date_order", layout.date_order in DATE_ORDERS, f"is no date order; wanted one of {', '.join(DATE_ORDERS)}"),
        ("decimal", layout.decimal in (".", ","), 'is no decimal mark; wanted "." or ","'),
        ("time_parts", whole and named, f"wanted one of {', '.join(TIME_PARTS)} for each of time_columns"),
        ("delimiter", delimiter or layout.delimiter in (BLANKS, FIXED), 'wanted one character, "blanks" or "fixed"'),
        ("decimal", layout.decimal != layout.delimiter, "the decimal mark cannot part columns too; give another"),
        ("first_row", layout.first_row >= 1, "lines count from 1"),
        ("time_columns", columns >= 1 and last < 10_000, "columns count from 1 and are fewer than 10000"),
        (
            "edges",
            layout.delimiter != FIXED or (len(layout.edges) >= last and sorted(set(layout.edges)) == [*layout.edges]),
            'the delimiter "fixed" wants the first character of each column, in order',
        ),
        ("edges", min(layout.edges, default=1) >= 1, "characters count from 1"),
    )
    return [(key, message) for key, sound, message in checks if not sound]
