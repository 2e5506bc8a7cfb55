"""See the first lines of an export as a table: its delimiter, its rows, the columns of its time."""

from __future__ import annotations

import re
from collections import Counter
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from tidekit.errors import RecordError
from tidekit.records.cutting import split
from tidekit.records.decoding import Export
from tidekit.records.height_column import is_number
from tidekit.records.layout import BLANKS, DATE_ORDERS, FIXED
from tidekit.records.time_columns import (
    TimePlace,
    candidates,
    clocks,
    columns_of,
    enough,
    holds_dates,
    steps_are_even,
    steps_are_sound,
)

LOOK = 500
"""Lines that show the layout."""
_DELIMITERS = (";", "\t", ",", "|", BLANKS)
_HEADER_LINES = 6
"""Lines above the rows among which the names of columns stand."""
_UNIT_LINE = re.compile(r"[(\[]?(m|cm|mm|ft|metres|meters|feet|utc|ts|rn|avg|smp|v|c|degc)[)\]]?", re.IGNORECASE)
"""Words of a line of units or kinds of value, such as loggers write below the names."""


@dataclass(frozen=True)
class Table:
    """A way to see the first lines as a table."""

    delimiter: str
    """As in `Layout`."""
    edges: tuple[int, ...]
    """As in `Layout`."""
    place: TimePlace
    """Where the time stands."""
    lines: tuple[int, ...]
    """Line numbers of rows, from the first that holds a time."""
    rows: list[list[str]]
    """Their cells."""
    names: list[str]
    """Names of columns, or empty."""


def find_table(export: Export, delimiter: str | None = None) -> Table:
    """Find the delimiter and time columns under which most lines are rows.

    Parameters
    ----------
    export : Export
        The opened file.
    delimiter : str, optional
        The delimiter, where it is declared.

    Returns
    -------
    Table
        The first lines as a table.

    Raises
    ------
    RecordError
        If no column holds a time beside a number.
    """
    head = list(export.head[:LOOK])
    tables = [table_by(head, mark) for mark in (_DELIMITERS if delimiter is None else (delimiter,))]
    found = [table for table in tables if table is not None]
    if found:
        best = max(found, key=lambda table: len(table.lines))  # the first of equals
        return (_by_places(export, head, best) or best) if best.delimiter == BLANKS else best
    dates = any(holds_dates([split(line, mark) for line in head]) for mark in _DELIMITERS)
    shown = "dates without a clock" if dates else "no date with a clock beside a number"
    message = (
        f"no time column: the first {len(head)} lines hold {shown}; "
        "wanted rows such as 2021-03-04 05:00,1.234, or a declared layout (--layout)"
    )
    raise RecordError(message, path=export.path, line=1)


def table_by(head: list[str], delimiter: str, edges: tuple[int, ...] = ()) -> Table | None:
    """The table that a delimiter makes, if it makes one."""
    cut_lines = [(n, split(line, delimiter, edges)) for n, line in enumerate(head, 1) if line.strip()]
    wide = [(n, cells) for n, cells in cut_lines if len(cells) > 1]
    # Only lines that hold a number beside the time can be rows.
    body = [(n, cells) for n, cells in wide if any(is_number(cell) for cell in cells)]
    if not body:
        return None
    rows = [cells for _, cells in body]
    for place in candidates(rows, _names_above(wide)):
        found = _rows_found(rows, place)
        if not enough(found) or not _plausible(rows, place, found):
            continue
        keep = np.flatnonzero(found)
        first = body[keep[0]][0]
        above = [split(line.lstrip("#%*!/ "), delimiter, edges) for line in head[: first - 1]]
        lines, kept = tuple(body[n][0] for n in keep), [rows[n] for n in keep]
        return Table(delimiter, edges, place, lines, kept, _names(above, len(kept[0])))
    return None


def _rows_found(rows: list[list[str]], place: TimePlace) -> NDArray[np.bool_]:
    """Which lines hold a time, in some order of dates, and a number beside it."""
    columns = columns_of(rows, place.columns)
    found = np.zeros(len(rows), dtype=np.bool_)
    for order in DATE_ORDERS:
        found |= ~np.isnat(clocks(columns, place, order))
    beside = [any(is_number(cell) for n, cell in enumerate(cells, 1) if n not in place.columns) for cells in rows]
    found &= np.array(beside)
    return found


def _plausible(rows: list[list[str]], place: TimePlace, found: NDArray[np.bool_]) -> bool:
    """Plain numbers are a time only where they run on as one; without names, only in even steps."""
    if place.parts[0] not in ("year", "epoch_s", "epoch_ms"):
        return True
    times = clocks(columns_of(rows, place.columns), place, "year-month-day")[found]
    return steps_are_sound(times) if place.named else steps_are_even(times)


def _names_above(wide: list[tuple[int, list[str]]]) -> list[str]:
    """Names of columns before the rows are known: above the first line that is mostly numbers."""
    rows = [cells for _, cells in wide]
    first = next((n for n, cells in enumerate(rows) if sum(map(is_number, cells)) * 2 > len(cells) - 2), 0)
    return _names(rows[:first], Counter(map(len, rows)).most_common(1)[0][0])


def _names(above: list[list[str]], width: int) -> list[str]:
    """Names of columns: the nearest line of words above the rows that is as wide, or nearly."""
    for cells in reversed(above[-_HEADER_LINES:]):
        words = [cell for cell in cells if re.search(r"[A-Za-z]", cell) and not is_number(cell)]
        if len(cells) < 2 or len(words) * 2 <= len(cells) or len(cells) < width - max(1, width // 3):
            continue
        if not all(_UNIT_LINE.fullmatch(word) for word in words):
            return cells
    return []


def _by_places(export: Export, head: list[str], table: Table) -> Table | None:
    """The same table cut at fixed places, where blank cells make the number of cells vary."""
    if len({len(cells) for cells in table.rows}) == 1 or "\t" in head[table.lines[0] - 1]:
        return None
    used = _used_places(export, head[table.lines[0] - 1])
    ends = np.flatnonzero(used[:-1] & ~used[1:]) + 1
    # The blanks before a column belong to it: a sign or a digit more grows to the left, into them.
    edges = (1, *(int(end) + 1 for end in ends if used[end:].any()))
    cut_there = table_by(head, FIXED, edges)
    return cut_there if cut_there is None else replace(cut_there, edges=edges)


def _used_places(export: Export, model: str) -> NDArray[np.bool_]:
    """Places that some row of the whole file uses: lines that begin as the model does are rows."""
    shape = re.sub(r"\d", "0", model[:10])
    used = np.zeros(len(model) + 1, dtype=np.bool_)
    for block in export.blocks():
        for raw in block.data.split(b"\n"):
            line = raw.rstrip()
            if re.sub(r"\d", "0", line[:10].decode("latin-1")) == shape:
                marks = np.frombuffer(line, dtype=np.uint8) != ord(" ")
                if len(marks) >= len(used):
                    used = np.concatenate((used, np.zeros(len(marks) + 1 - len(used), dtype=np.bool_)))
                used[: len(marks)] |= marks
    return used
