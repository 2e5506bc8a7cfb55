"""Recognise the layout of an undeclared export, and say by what evidence.

Where two readings are possible the recogniser asks rather than guesses: a date such as 03/04/2021 is settled only
by other rows of the same file.
"""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from tidekit.errors import RecordError
from tidekit.records.cutting import cut, split
from tidekit.records.date_order import Settled, by_validity
from tidekit.records.decoding import Export
from tidekit.records.headers import Said, reference_said, unit_said, zone_said
from tidekit.records.height_column import header_rows, height_column, is_number, labels_of
from tidekit.records.layout import BLANKS, DATE_ORDERS, FIXED, DateOrder, Layout
from tidekit.records.time_columns import TimePlace, candidates, clocks, columns_of, enough, holds_dates, steps_are_sound
from tidekit.records.times import read_times
from tidekit.records.zones import zone_in

_LOOK = 500
"""Lines that show the layout."""
_DELIMITERS = (";", "\t", ",", "|", BLANKS)
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


@dataclass(frozen=True)
class _Table:
    """A way to see the first lines as a table."""

    delimiter: str
    edges: tuple[int, ...]
    place: TimePlace
    lines: tuple[int, ...]
    """Line numbers of rows, from the first that holds a time."""
    rows: list[list[str]]
    """Their cells."""
    names: list[str]
    """Names of columns, or empty."""


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
    head = list(export.head[:_LOOK])
    table = _table(head, path)
    first = table.lines[0]
    above = head[: first - 1]
    labels = labels_of(header_rows(above, table.delimiter, table.edges), table.names)
    decimal = _decimal(table)
    found = height_column(table.rows, table.names, labels, table.place.columns, column, path)
    unit = unit_said(labels[found.column - 1] if found.column <= len(labels) else "", above)
    time_labels = [labels[n - 1] for n in table.place.columns if n <= len(labels)]
    layout = Layout(
        delimiter=table.delimiter,
        edges=table.edges,
        first_row=first,
        time_columns=table.place.columns,
        time_parts=table.place.parts,
        height_column=found.column,
        unit=unit.value,
        decimal=decimal,
        comment=next((mark for mark in _COMMENTS if any(line.lstrip().startswith(mark) for line in above)), "#"),
        vertical_reference=reference_said(above, labels[found.column - 1] if found.column <= len(labels) else ""),
    )
    declared = declared or {}
    layout = replace(layout, **declared)
    order = declared.get("date_order")
    settled = Settled((order,), "date order declared") if order else _order(export, layout, table, path)
    zone = _zone(above, time_labels, table, layout.date_order)
    layout = replace(layout, date_order=settled.orders[0], time_zone=layout.time_zone or zone.value)
    evidence = [
        f"rows from line {first}: {len(table.lines)} of the first {len(head)} lines hold a time and a number",
        _time_evidence(table),
        settled.evidence,
        found.evidence,
        f"unit {unit.value} from {unit.where}" if unit.value else unit.where,
        f"time zone {zone.value} from {zone.where}" if zone.value else zone.where,
    ]
    if export.packing != "plain" or export.encoding != "utf-8":
        evidence.insert(0, f"{export.packing} file, text in {export.encoding}")
    return Recognised(layout, tuple(filter(None, evidence)), tuple(table.names), unit, zone)


def _table(head: list[str], path: str) -> _Table:
    """The delimiter and time columns under which most lines are rows."""
    best: _Table | None = None
    dates_only = False
    for delimiter in _DELIMITERS:
        table, dates = _table_by(head, delimiter, ())
        dates_only |= dates
        if table is not None and (best is None or len(table.lines) > len(best.lines)):
            best = table
    if best is not None and best.delimiter == BLANKS:
        best = _by_places(head, best) or best
    if best is not None:
        return best
    shown = "dates without a clock" if dates_only else "no date with a clock beside a number"
    message = (
        f"no time column: the first {min(len(head), _LOOK)} lines hold {shown}; "
        "wanted rows such as 2021-03-04 05:00,1.234, or a declared layout (--layout)"
    )
    raise RecordError(message, path=path, line=1)


def _table_by(head: list[str], delimiter: str, edges: tuple[int, ...]) -> tuple[_Table | None, bool]:
    """The table that a delimiter makes, if it makes one; and whether it shows dates without a clock."""
    numbered = [(n, split(line, delimiter, edges)) for n, line in enumerate(head, 1) if line.strip()]
    wide = [(n, cells) for n, cells in numbered if len(cells) > 1]
    if not wide:
        return None, False
    rows = [cells for _, cells in wide]
    guess = next((n for n, (_, cells) in enumerate(wide) if sum(map(is_number, cells)) * 2 > len(cells) - 2), 0)
    names = _names([cells for _, cells in wide[:guess]], Counter(len(c) for c in rows).most_common(1)[0][0])
    # Only lines that hold a number beside the time can be rows.
    body = [(n, cells) for n, cells in wide if any(is_number(cell) for cell in cells)]
    texts = [cells for _, cells in body]
    for place in candidates(texts, names):
        columns = columns_of(texts, place.columns)
        found = np.any([~np.isnat(clocks(columns, place, order)) for order in DATE_ORDERS], axis=0)
        beside = np.array(
            [any(is_number(c) for n, c in enumerate(cells, 1) if n not in place.columns) for cells in texts]
        )
        found &= beside
        if not enough(found) or not _plausible(columns, place, found):
            continue
        first = int(np.argmax(found))
        lines = [n for n, _ in body]
        names = _names(
            [split(x.lstrip("#%*!/ "), delimiter, edges) for x in head[: lines[first] - 1]], len(texts[first])
        )
        keep = np.flatnonzero(found)
        return _Table(delimiter, edges, place, tuple(lines[n] for n in keep), [texts[n] for n in keep], names), False
    return None, holds_dates(texts)


def _plausible(columns: list[list[str]], place: TimePlace, found: np.ndarray) -> bool:
    """Plain numbers are a time only where they run on as one."""
    if place.parts[0] not in ("year", "epoch_s", "epoch_ms"):
        return True
    times = clocks(columns, place, "year-month-day")[found]
    return len(times) < 2 or steps_are_sound(times)


def _names(above: list[list[str]], width: int) -> list[str]:
    """Names of columns: the nearest line of words above the rows that is as wide, or nearly."""
    for cells in reversed(above[-6:]):
        words = [cell for cell in cells if re.search(r"[A-Za-z]", cell) and not is_number(cell)]
        if len(cells) > 1 and len(words) * 2 > len(cells) and len(cells) >= width - max(1, width // 3):
            if all(re.fullmatch(r"[\[(]?[A-Za-z°%/]{1,7}[\])]?", cell) and labels_unit(cell) for cell in words):
                continue  # a line of units
            return cells
    return []


def labels_unit(cell: str) -> bool:
    """Whether a cell names a unit or a kind of value rather than a column."""
    return cell.strip("[]()").lower() in {
        "m",
        "cm",
        "mm",
        "ft",
        "metres",
        "meters",
        "feet",
        "utc",
        "ts",
        "rn",
        "avg",
        "smp",
        "v",
        "c",
        "degc",
    }


def _by_places(head: list[str], table: _Table) -> _Table | None:
    """The same table cut at fixed places, where blank cells make the number of cells vary."""
    if len({len(cells) for cells in table.rows}) == 1:
        return None
    lines = [line for n, line in enumerate(head, 1) if n >= table.lines[0] and line.strip()]
    width = max(map(len, lines))
    used = np.array([[c not in " \t" for c in line.ljust(width)] for line in lines]).any(axis=0)
    starts = np.flatnonzero(np.diff(np.concatenate(([False], used)).astype(np.int8)) == 1)
    if "\t" in "".join(lines) or len(starts) < 2:
        return None
    return _table_by(head, FIXED, tuple(int(start) + 1 for start in starts))[0]


def _decimal(table: _Table) -> str:
    if table.delimiter == "," and not any("," in cell for row in table.rows for cell in row):
        return "."
    cells = [cell for row in table.rows for n, cell in enumerate(row, 1) if n not in table.place.columns]
    commas = sum(bool(re.fullmatch(r"[+-]?(\d+|\d{1,3}(\.\d{3})+),\d+", cell)) for cell in cells)
    points = sum(bool(re.fullmatch(r"[+-]?\d*\.\d+", cell)) for cell in cells)
    return "," if commas > points else "."


def _order(export: Export, layout: Layout, table: _Table, path: str) -> Settled:
    """Order of dates: by the first rows, then by all rows, then by even steps, or ask."""
    if not any(part in ("stamp", "date") for part in table.place.parts):
        return Settled(("year-month-day",), "")
    columns = columns_of(table.rows, table.place.columns)
    clock = {order: clocks(columns, table.place, order) for order in DATE_ORDERS}
    settled = by_validity(clock, np.array(table.lines), path)
    if len(settled.orders) == 1:
        return settled
    even = [order for order in settled.orders if steps_are_sound(clock[order])]
    for block in export.blocks():
        cells = cut(block, layout, layout.time_columns)
        whole = {
            order: read_times(
                [cells.columns[n][~cells.short] for n in layout.time_columns], layout.time_parts, order
            ).clock
            for order in settled.orders
        }
        later = by_validity(whole, cells.line[~cells.short], path)
        if len(later.orders) == 1:
            return later
    if len(even) == 1 and len({str(day)[:10] for day in clock[even[0]]}) > 1:
        return Settled((even[0],), f"dates read {even[0]}: only so do the rows follow one another in even steps")
    text = " ".join(cell[0] for cell in columns)
    message = (
        f"the date in {text!r} can be read {' or '.join(settled.orders)} and no row settles it; "
        f'declare it: --layout FILE with the line date_order = "{settled.orders[0]}"'
    )
    raise RecordError(message, path=path, line=table.lines[0])


def _zone(above: list[str], labels: list[str], table: _Table, order: DateOrder) -> Said:
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


def _time_evidence(table: _Table) -> str:
    named = [table.names[n - 1] if n <= len(table.names) else "" for n in table.place.columns]
    parts = [
        f"{part} in column {n}" + (f" ({name!r})" if name else "")
        for n, part, name in zip(table.place.columns, table.place.parts, named, strict=True)
    ]
    return "time: " + ", ".join(parts)
