"""The layout of an export: where the times and heights are and how they are written. Saved as TOML."""

from __future__ import annotations

import json
import tomllib
from dataclasses import dataclass, fields, replace
from pathlib import Path
from typing import Any

from tidekit.errors import RecordError
from tidekit.files import write_text
from tidekit.records.units import unit_named
from tidekit.records.zones import zone_named

BLANKS = "blanks"
"""Delimiter of columns parted by runs of blanks."""
MISSING_MARKS = ("", "-", "--", "NA", "NaN", "nan", "null", "-99", "-99.99", "-999", "9999", "-9999")
"""What exports write where there is no value (common practice, no source)."""
DATE_ORDERS = ("year-month-day", "day-month-year", "month-day-year")


@dataclass(frozen=True, kw_only=True)
class Layout:
    """How one export is written. Columns count from 1."""

    delimiter: str
    """One character, or ``blanks`` for runs of blanks."""
    first_row: int
    """Line of the first data row, from 1."""
    columns: int
    """Cells of a whole row; a row may lack empty cells at its end."""
    time_columns: tuple[int, ...]
    """Column of the time; two where date and clock stand apart."""
    height_column: int
    """Column of the height."""
    date_order: str
    """One of `DATE_ORDERS`."""
    unit: str | None = None
    """Unit of the heights, one of `units.METRES`."""
    time_zone: str | None = None
    """Zone of the times; None where each time carries its offset, or none is known yet."""
    decimal: str = "."
    """Decimal mark, ``.`` or ``,``."""
    missing: tuple[str, ...] = MISSING_MARKS
    """Texts that stand for no value; numbers among them match by value."""
    comment: str = "#"
    """A line that begins with it is no row."""
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
        times = " and ".join(str(column) for column in self.time_columns)
        zone = self.time_zone or "offset in each time"
        parted = {",": "commas", ";": "semicolons", "\t": "tabs", BLANKS: "blanks"}.get(self.delimiter, self.delimiter)
        return (
            f"columns parted by {parted}, rows from line {self.first_row}, time in column {times} "
            f"({self.date_order}, {zone}), height in column {self.height_column} ({self.unit}, {self.decimal!r})"
        )


def write_layout(layout: Layout, path: str | Path) -> None:
    """Save a layout as TOML.

    Raises
    ------
    InputError
        If the file cannot be written.
    """
    lines = ["# Layout of a gauge export; columns count from 1."]
    for field in fields(layout):
        value = getattr(layout, field.name)
        if value is not None:
            # JSON's strings, numbers and lists are TOML's.
            lines.append(f"{field.name} = {json.dumps(list(value) if isinstance(value, tuple) else value)}")
    write_text(path, "\n".join(lines) + "\n")


def read_layout(path: str | Path) -> Layout:
    """Read a saved layout.

    Raises
    ------
    RecordError
        If the file is missing, is not TOML, or has an unknown, missing or impossible key.
    """
    try:
        table: dict[str, Any] = tomllib.loads(Path(path).read_text(encoding="utf-8"))
    except OSError as error:
        message = f"cannot read this layout ({error.strerror}); check the path"
        raise RecordError(message, path=path) from error
    except (tomllib.TOMLDecodeError, UnicodeDecodeError) as error:
        message = f"this layout is not TOML: {error}"
        raise RecordError(message, path=path) from error
    kinds = {field.name: str(field.type) for field in fields(Layout)}
    for key, value in table.items():
        if key not in kinds:
            message = f"unknown key; wanted one of {', '.join(kinds)}"
            raise RecordError(message, path=path, key=key)
        wanted: type = tuple if kinds[key].startswith("tuple") else int if kinds[key] == "int" else str
        found = tuple(value) if isinstance(value, list) else value
        if not isinstance(found, wanted):
            message = (
                f"is {value!r}; wanted {'a list' if wanted is tuple else 'a number' if wanted is int else 'a text'}"
            )
            raise RecordError(message, path=path, key=key)
        table[key] = found
    try:
        layout = Layout(**table)
    except TypeError as error:
        message = f"this layout lacks a key: {error}"
        raise RecordError(message, path=path) from error
    if layout.date_order not in DATE_ORDERS:
        message = f"is {layout.date_order!r}; wanted one of {', '.join(DATE_ORDERS)}"
        raise RecordError(message, path=path, key="date_order")
    if min(layout.first_row, layout.height_column, *layout.time_columns) < 1 or not 1 <= len(layout.time_columns) <= 2:
        message = "lines and columns count from 1, and the time has one or two columns"
        raise RecordError(message, path=path)
    return layout.declared(time_zone=layout.time_zone, unit=layout.unit)
