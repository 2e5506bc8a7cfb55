"""Recognise the layout of an undeclared export, and say by what evidence.

Where two readings are possible the recogniser asks rather than guesses: a date such as 03/04/2021 is settled only
by other rows of the same file.
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any

from tidekit.records.as_text import IOC_FLAGS
from tidekit.records.date_order import Settled, settle
from tidekit.records.decoding import Export
from tidekit.records.headers import Said, reference_said, unit_said, zone_said
from tidekit.records.height_column import header_rows, height_column, labels_of
from tidekit.records.layout import Layout
from tidekit.records.table_finding import LOOK, Table, find_table
from tidekit.records.time_columns import columns_of
from tidekit.records.zones import zone_in

_COMMENTS = ("#", "%", "//", "*", "!")


@dataclass(frozen=True)
class Recognised:
    """A layout and why."""

    layout: Layout
    """What was found; unit and zone are None where the export does not say."""
    evidence: tuple[str, ...]
    """One sentence a choice."""
    columns: tuple[str, ...]
    """Names of columns, or empty."""
    unit: Said
    """What the export says of its unit."""
    zone: Said
    """What the export says of its time zone."""


def recognise(export: Export, *, column: str | None = None, declared: Mapping[str, Any] | None = None) -> Recognised:
    """Find the layout of an export.

    Parameters
    ----------
    export : Export
        The opened file.
    column : str, optional
        Name or number of the height column.
    declared : mapping, optional
        Values of the layout that are known, by key.

    Returns
    -------
    Recognised
        Layout and evidence.

    Raises
    ------
    RecordError
        If no column holds times or heights, or two readings are possible.
    """
    path = str(export.path)
    declared = declared or {}
    head = list(export.head[:LOOK])
    table = find_table(export, declared.get("delimiter"))
    first = table.lines[0]
    above = head[: first - 1]
    labels = labels_of(header_rows(above, table.delimiter, table.edges), table.names)
    # The line of names speaks of columns, not of the export: Datum may be a date there.
    said = ["" if table.names and all(name in line for name in table.names) else line for line in above]
    decimal = _decimal(table)
    found = height_column(table.rows, table.names, labels, table.place.columns, column, path)
    unit = unit_said(labels[found.column - 1] if found.column <= len(labels) else "", said)
    time_labels = [labels[n - 1] for n in table.place.columns if n <= len(labels)]
    layout = Layout(
        delimiter=table.delimiter,
        edges=table.edges,
        first_row=first,
        time_columns=table.place.columns,
        time_parts=table.place.parts,
        height_column=found.column,
        unit=unit.value,
        flag_column=table.names.index(IOC_FLAGS) + 1 if IOC_FLAGS in table.names else None,
        decimal=decimal,
        comment=next((mark for mark in _COMMENTS if any(line.lstrip().startswith(mark) for line in above)), "#"),
        vertical_reference=reference_said(said, labels[found.column - 1] if found.column <= len(labels) else ""),
    )
    layout = replace(layout, **declared)
    order = declared.get("date_order")
    settled = Settled((order,), "date order declared") if order else settle(export, layout, table)
    zone = _zone(above, time_labels, table)
    layout = replace(layout, date_order=settled.orders[0], time_zone=layout.time_zone or zone.value)
    evidence = [
        f"rows from line {first}: {len(table.lines)} of the first {len(head)} lines hold a time and a number",
        _time_evidence(table),
        settled.evidence,
        found.evidence,
        f"unit {unit.value} from {unit.where}" if unit.value else unit.where,
        f"time zone {zone.value} from {zone.where}" if zone.value else zone.where,
    ]
    if layout.flag_column is not None:
        evidence.append(f"quality flags in column {layout.flag_column}, named {IOC_FLAGS!r}")
    if export.packing != "plain" or export.encoding != "utf-8":
        evidence.insert(0, f"{export.packing} file, text in {export.encoding}")
    return Recognised(layout, tuple(filter(None, evidence)), tuple(table.names), unit, zone)


def _decimal(table: Table) -> str:
    if table.delimiter == "," and not any("," in cell for row in table.rows for cell in row):
        return "."
    cells = [cell for row in table.rows for n, cell in enumerate(row, 1) if n not in table.place.columns]
    commas = sum(bool(re.fullmatch(r"[+-]?(\d+|\d{1,3}(\.\d{3})+),\d+", cell)) for cell in cells)
    points = sum(bool(re.fullmatch(r"[+-]?\d*\.\d+", cell)) for cell in cells)
    return "," if commas > points else "."


def _zone(above: list[str], labels: list[str], table: Table) -> Said:
    if table.place.parts[0] in ("epoch_s", "epoch_ms"):
        return Said(None, "times are seconds since 1970 UTC")
    columns = columns_of(table.rows[:1], table.place.columns)
    cells = [split_cell.encode("latin-1", "replace") for column in columns for split_cell in column]
    if re.search(rb"(?<=\d)\s?(?:Z|UTC|GMT|[+-]\d\d(?::?\d\d)?)$", cells[-1]) and b":" in cells[-1]:
        return Said(None, "each time carries its offset")
    said = zone_said(above, labels)
    if said.value:
        return said
    for n in range(1, len(table.rows[0]) + 1):
        words = {row[n - 1] for row in table.rows if len(row) >= n}
        if n not in table.place.columns and len(words) == 1 and (zone := zone_in(words.pop())):
            return Said(zone, f"column {n}")
    return said


def _time_evidence(table: Table) -> str:
    named = [table.names[n - 1] if n <= len(table.names) else "" for n in table.place.columns]
    parts = [
        f"{part} in column {n}" + (f" ({name!r})" if name else "")
        for n, part, name in zip(table.place.columns, table.place.parts, named, strict=True)
    ]
    return "time: " + ", ".join(parts)
