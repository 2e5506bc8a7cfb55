"""Recognise the layout of an undeclared export, and say by what evidence.

Where two readings are possible the recogniser asks rather than guesses: a date such as 03/04/2021 is settled only
by other rows of the same file.
"""

from __future__ import annotations

import re
from collections import Counter
from dataclasses import dataclass

import numpy as np
import pandas as pd

from tidekit.errors import RecordError
from tidekit.records.cells import TIME, parse_times, split, time_text
from tidekit.records.layout import BLANKS, Layout
from tidekit.records.units import unit_in
from tidekit.records.zones import zone_in

_LOOK = 400
"""Lines that show the layout."""
_DELIMITERS = (";", "\t", ",", "|", BLANKS)
_COMMENTS = ("#", "%", "//", "*")
_NUMBER = re.compile(r"^[+-]?(\d+([.,]\d*)?|[.,]\d+)([eE][+-]?\d+)?$")
_HEIGHT_WORDS = ("height", "level", "slev", "wlev", "water", "tide", "elev", "stage", "gauge", "value", "pegel", "h")
_OTHER_WORDS = ("sigma", "temp", "press", "atms", "psal", "sal", "flag", "qual", "qc", "wind", "volt", "batt", "std")
_REFERENCE = re.compile(r"(?:datum|vertical.reference)\s*[:,=;]?\s*([A-Za-z0-9 .\-]+)", re.IGNORECASE)


@dataclass(frozen=True)
class Recognised:
    """A layout and why."""

    layout: Layout
    """What was found; unit and zone may be None, if neither file nor declaration says."""
    evidence: tuple[str, ...]
    """One sentence a choice."""
    columns: tuple[str, ...]
    """Column names, or empty."""


def recognise(lines: list[str], *, path: str, column: str | None = None) -> Recognised:
    """Find the layout of an export.

    Parameters
    ----------
    lines : list of str
        The whole file.
    path : str
        Its name, for errors.
    column : str, optional
        Name or number of the height column.

    Returns
    -------
    Recognised
        Layout and evidence.

    Raises
    ------
    RecordError
        If no column holds times or heights, or two readings are possible.
    """
    delimiter, rows, time_columns = _table(lines, path)
    first = rows[0]
    header = _header(lines, first, delimiter)
    head = lines[: first - 1]
    comment = next((mark for mark in _COMMENTS if any(line.startswith(mark) for line in lines[:_LOOK])), "#")
    cells = [split(lines[row - 1], delimiter) for row in rows]
    decimal = _decimal(cells, delimiter, time_columns)
    width = Counter(len(row) for row in cells).most_common(1)[0][0]
    height = _height_column(cells, header, time_columns, column, decimal, path)
    order, order_evidence = _date_order(lines, rows, delimiter, time_columns, path)
    name = header[height - 1] if height <= len(header) else ""
    evidence = [
        f"rows from line {first}: {len(rows)} of the first {min(len(lines), _LOOK)} lines hold a time and numbers",
        f"heights in column {height}" + (f", named {name!r}" if name else ""),
        order_evidence,
    ]
    unit, where = _unit(name, header, head)
    evidence.append(f"unit {unit} from {where}" if unit else "no unit stated")
    zone, where = _zone(head, header, time_columns, cells)
    evidence.append(f"time zone {zone or where}" + (f" from {where}" if zone else ""))
    reference = next((found[1].strip() for line in head if (found := _REFERENCE.search(line.strip("#% ")))), None)
    layout = Layout(
        delimiter=delimiter,
        first_row=first,
        columns=width,
        time_columns=time_columns,
        height_column=height,
        date_order=order,
        unit=unit,
        time_zone=zone,
        decimal=decimal,
        comment=comment,
        vertical_reference=reference,
    )
    return Recognised(layout, tuple(evidence), tuple(header))


def _table(lines: list[str], path: str) -> tuple[str, list[int], tuple[int, ...]]:
    """Delimiter, lines (from 1) of rows among the first, and columns of their time."""
    best: tuple[int, str, list[int], tuple[int, ...]] = (0, "", [], ())
    for delimiter in _DELIMITERS:
        places: dict[tuple[int, ...], list[int]] = {}
        for number, line in enumerate(lines[:_LOOK], 1):
            found = _time_place(split(line, delimiter))
            if found:
                places.setdefault(found, []).append(number)
        for columns, rows in places.items():
            if len(rows) > best[0]:
                best = (len(rows), delimiter, rows, columns)
    if not best[0]:
        message = (
            f"no time column: none of the first {min(len(lines), _LOOK)} lines holds a date with a clock and a number; "
            "wanted rows such as 2021-03-04 05:00,1.234, or declare a layout"
        )
        raise RecordError(message, path=path, line=1)
    return best[1], best[2], best[3]


def _time_place(cells: list[str]) -> tuple[int, ...] | None:
    """Columns of a row's time; None where it has none or nothing beside it."""
    for start in range(min(len(cells), 4)):
        for width in (1, 2):
            columns = tuple(range(start + 1, start + 1 + width))
            text = time_text(cells, columns)
            match = TIME.match(text) if text else None
            rest = len(cells) - start - width
            if match and match["hour"] and rest > 0:
                return columns
    return None


def _header(lines: list[str], first: int, delimiter: str) -> list[str]:
    for line in reversed(lines[max(first - 4, 0) : first - 1]):
        cells = split(line.lstrip("#%*/ "), delimiter)
        if len(cells) > 1 and not any(_NUMBER.match(cell) for cell in cells):
            return cells
    return []


def _decimal(cells: list[list[str]], delimiter: str, time_columns: tuple[int, ...]) -> str:
    if delimiter == ",":
        return "."
    rest = [cell for row in cells for cell in row[max(time_columns) :]]
    commas = sum(bool(re.fullmatch(r"[+-]?\d+,\d+", cell)) for cell in rest)
    points = sum(bool(re.fullmatch(r"[+-]?\d+\.\d+", cell)) for cell in rest)
    return "," if commas > points else "."


def _height_column(
    cells: list[list[str]],
    header: list[str],
    time_columns: tuple[int, ...],
    column: str | None,
    decimal: str,
    path: str,
) -> int:
    width = max(len(row) for row in cells)
    if column is not None:
        names = [name.lower() for name in header]
        if column.lower() in names:
            return names.index(column.lower()) + 1
        if column.isdigit() and 1 <= int(column) <= width:
            return int(column)
        message = f"no column {column!r}; there are {', '.join(header) or f'columns 1 to {width}'}"
        raise RecordError(message, path=path)
    numeric = [
        place
        for place in range(1, width + 1)
        if place not in time_columns and any(len(row) >= place and _NUMBER.match(row[place - 1]) for row in cells)
    ]
    named = {place: header[place - 1].lower() for place in numeric if place <= len(header)}
    numeric = [place for place in numeric if not any(word in named.get(place, "") for word in _OTHER_WORDS)]
    for word in _HEIGHT_WORDS:
        hits = [p for p in numeric if (word in named.get(p, "") if len(word) > 1 else named.get(p) == word)]
        if len(hits) == 1:
            return hits[0]
        if len(hits) > 1 and word in ("height", "level", "slev", "wlev"):
            several = ", ".join(header[place - 1] for place in hits)
            message = f"several columns may hold the height ({several}); declare the column"
            raise RecordError(message, path=path)
    # A column without a name, or one with any name at all if it is the only one, holds the height.
    if len(numeric) == 1 or (numeric and not named):
        if len(numeric) > 1 and not header:
            message = f"columns {', '.join(map(str, numeric))} hold numbers and none has a name; declare the column"
            raise RecordError(message, path=path)
        return numeric[0]
    message = (
        f"several columns hold numbers ({', '.join(named.values())}); declare the column"
        if numeric
        else "no column beside the time holds numbers; wanted heights"
    )
    raise RecordError(message, path=path)


def _date_order(
    lines: list[str], rows: list[int], delimiter: str, time_columns: tuple[int, ...], path: str
) -> tuple[str, str]:
    day_first = month_first = year_first = 0
    for number in range(rows[0], len(lines) + 1):
        match = TIME.match(time_text(split(lines[number - 1], delimiter), time_columns) or "")
        if match is None:
            continue
        a, b = match["a"], match["b"]
        if len(a) == 4:
            year_first = year_first or number
        elif int(a) > 12:
            day_first = day_first or number
        elif int(b) > 12:
            month_first = month_first or number
    if sum(map(bool, (day_first, month_first, year_first))) > 1:
        seen = {"year": year_first, "day": day_first, "month": month_first}
        shown = ", ".join(f"the {name} first in line {line}" for name, line in seen.items() if line)
        message = f"mixed date orders: {shown}; split the file or mend its dates"
        raise RecordError(message, path=path, line=max(day_first, month_first, year_first))
    if year_first:
        return "year-month-day", "dates begin with the year"
    if day_first:
        return "day-month-year", f"dates begin with the day, as line {day_first} shows"
    if month_first:
        return "month-day-year", f"dates begin with the month, as line {month_first} shows"
    return _order_by_steps(lines, rows, delimiter, time_columns, path)


def _order_by_steps(
    lines: list[str], rows: list[int], delimiter: str, time_columns: tuple[int, ...], path: str
) -> tuple[str, str]:
    """Settle day or month first by which makes the rows follow one another evenly."""
    texts = pd.Series([time_text(split(lines[number - 1], delimiter), time_columns) or "" for number in rows])
    even = {}
    for order in ("day-month-year", "month-day-year"):
        times, _ = parse_times(texts, order)
        steps = np.diff(times.dropna().to_numpy().astype("datetime64[s]").astype(np.int64))
        even[order] = len(steps) > 0 and bool(np.all(steps == steps[0])) and steps[0] > 0
    crossed = len({text[:10] for text in texts}) > 1
    if crossed and sum(even.values()) == 1:
        order = next(name for name, is_even in even.items() if is_even)
        return order, f"dates read {order}: only so do the rows follow in even steps"
    message = (
        f"the date {texts.iloc[0][:10]!r} can be day or month first and no row settles it; "
        "declare date_order in a layout"
    )
    raise RecordError(message, path=path, line=rows[0])


def _unit(name: str, header: list[str], head: list[str]) -> tuple[str | None, str]:
    found = unit_in(name)
    if found:
        return found, f"the column's name {name!r}"
    for number, line in enumerate(head, 1):
        text = line.strip("#% ")
        if re.search(r"unit", text, re.IGNORECASE) or re.search(r"level|height", text, re.IGNORECASE):
            found = unit_in(text)
            if found:
                return found, f"line {number}"
    return None, ""


def _zone(
    head: list[str], header: list[str], time_columns: tuple[int, ...], cells: list[list[str]]
) -> tuple[str | None, str]:
    match = TIME.match(time_text(cells[0], time_columns) or "")
    if match and match["zone"]:
        return None, "offset in each time"
    for column in time_columns:
        if column <= len(header):
            found = zone_in(header[column - 1])
            if found:
                return found, f"the column's name {header[column - 1]!r}"
    for number, line in enumerate(head, 1):
        if re.search(r"time|zone|clock|utc|gmt", line, re.IGNORECASE):
            found = zone_in(line)
            if found:
                return found, f"line {number}"
    return None, "not stated"
