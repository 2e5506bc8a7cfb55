"""Rows of one export by its layout: UTC, metres, flags, and why a row was rejected."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from tidekit.errors import RecordError
from tidekit.records.cutting import Bytes, Cells, cut
from tidekit.records.date_order import refuse_mixed
from tidekit.records.decoding import Export
from tidekit.records.layout import DATE_ORDERS, Layout
from tidekit.records.ledger import RejectedRow
from tidekit.records.missing_values import declared_missing, drop_isolated_marks, usual_numbers_m
from tidekit.records.numerals import read_numbers
from tidekit.records.record import FLAG_FAIL, FLAG_GOOD, FLAG_MISSING, FLAG_NOT_EVALUATED, FLAG_SUSPECT
from tidekit.records.times import Times, read_times
from tidekit.records.units import METRES
from tidekit.records.zones import to_utc, zone_named

_FLAGS = (FLAG_GOOD, FLAG_NOT_EVALUATED, FLAG_SUSPECT, FLAG_FAIL)
_FARTHEST_M = 12_000.0
"""A height beyond the deepest water is a fault of the file."""


@dataclass(frozen=True, eq=False, kw_only=True)
class Rows:
    """Accepted rows in the order of the file, each shape (n,), and those rejected."""

    path: str
    """The file."""
    utc: NDArray[np.datetime64]
    """Times. [UTC, microseconds]"""
    height_m: NDArray[np.float64]
    """Heights; NaN where missing. [m]"""
    flag: NDArray[np.int8]
    """Quality flags."""
    line: NDArray[np.int32]
    """Line numbers."""
    rejected: tuple[RejectedRow, ...]
    """Rows that could not be read."""

    @property
    def count(self) -> int:
        """Data rows in the file."""
        return len(self.utc) + len(self.rejected)


_Part = tuple[NDArray[Any], ...]
"""Clock times, whether they carry an offset, heights, flags and line numbers of a block's good rows."""


def read_rows(export: Export, layout: Layout, *, progress: Callable[[int], None] | None = None) -> Rows:
    """Read all rows of an export.

    Parameters
    ----------
    export : Export
        The opened file.
    layout : Layout
        How it is written; its unit is known.
    progress : callable, optional
        Told the number of unpacked bytes behind each block.

    Returns
    -------
    Rows
        Accepted and rejected rows.

    Raises
    ------
    RecordError
        If there are no rows, the time zone is not known, date orders are mixed, or a local hour is ambiguous.
    """
    path = str(export.path)
    header = _header(export, layout)
    rejected: list[RejectedRow] = []
    columns: list[list[NDArray[Any]]] = [[], [], [], [], []]
    done = 0
    for block in export.blocks():
        part, refused = _read_block(cut(block, layout, _columns(layout)), layout, path, header)
        rejected += refused
        done += len(block.data)
        if progress is not None:
            progress(done)
        for column, values in zip(columns, part, strict=True):
            column.append(values)
    if not any(map(len, columns[0])) and not rejected:
        message = f"no rows from line {layout.first_row} on, where the layout says they begin"
        raise RecordError(message, path=path, line=layout.first_row)
    # One column at a time, each letting go of its blocks: a long record never stands in memory twice.
    clock, zoned, height_m, flag, line = (_concatenated(column) for column in columns)
    drop_isolated_marks(height_m, flag, layout)
    return Rows(
        path=path,
        utc=_utc(Times(clock, zoned), line, layout, path),
        height_m=height_m,
        flag=flag,
        line=line,
        rejected=tuple(rejected),
    )


def _concatenated(blocks: list[NDArray[Any]]) -> NDArray[Any]:
    whole = np.concatenate(blocks)
    blocks.clear()
    return whole


def _columns(layout: Layout) -> tuple[int, ...]:
    more = [n for n in (layout.quality_column, layout.flag_column) if n is not None]
    return (*layout.time_columns, layout.height_column, *more)


def _header(export: Export, layout: Layout) -> set[bytes]:
    """First cells of lines above the rows: a line that begins so again is a repeated header."""
    return {
        line.strip().encode("latin-1", "replace")
        for line in export.head[: layout.first_row - 1]
        if any(mark.isalpha() for mark in line)
    }


def _read_block(cells: Cells, layout: Layout, path: str, header: set[bytes]) -> tuple[_Part, list[RejectedRow]]:
    stamps = [cells.columns[n] for n in layout.time_columns]
    times = read_times(stamps, layout.time_parts, layout.date_order, layout.decimal)
    no_time = np.isnat(times.clock)
    if no_time.any():
        _refuse_mixed(stamps, times, ~cells.short, cells.line, layout, path)
    texts = cells.columns[layout.height_column]
    value = read_numbers(texts, layout.decimal)
    missing = declared_missing(texts, value, layout)
    height_m = np.where(missing, np.nan, value * METRES[str(layout.unit)])
    no_height = ~missing & ~np.isfinite(height_m)
    absurd = np.abs(height_m) > _FARTHEST_M
    absurd[absurd] = ~np.isin(height_m[absurd], usual_numbers_m(layout))
    flag = np.where(missing, FLAG_MISSING, FLAG_NOT_EVALUATED).astype(np.int8)
    _flag_quality(flag, cells, layout)
    bad = no_time | no_height | absurd | cells.short
    rejected = [
        RejectedRow(path, int(cells.line[row]), _reason(int(row), cells, layout, header, no_time, no_height))
        for row in np.flatnonzero(bad)
    ]
    good = ~bad
    line = cells.line[good].astype(np.int32)  # an export has fewer lines than bytes
    return (times.clock[good], times.zoned[good], height_m[good], flag[good], line), rejected


def _reason(
    row: int,
    cells: Cells,
    layout: Layout,
    header: set[bytes],
    no_time: NDArray[np.bool_],
    no_height: NDArray[np.bool_],
) -> str:
    if no_time[row] and any(
        line.startswith(cells.text(row, layout.time_columns[:1]).encode("latin-1")) for line in header
    ):
        return "header again" if cells.text(row, layout.time_columns[:1]) else "no time"
    if cells.short[row]:
        return "row is cut short"
    if no_time[row]:
        return "time cannot be read"
    return "height is not a number" if no_height[row] else f"height is beyond {_FARTHEST_M:.0f} m"


def _refuse_mixed(
    stamps: list[Bytes], times: Times, whole: NDArray[np.bool_], line: NDArray[np.int64], layout: Layout, path: str
) -> None:
    """Raise if a row without a time has one in another order of dates."""
    odd = np.flatnonzero(np.isnat(times.clock) & whole)
    others = {
        order: ~np.isnat(read_times([cells[odd] for cells in stamps], layout.time_parts, order, layout.decimal).clock)
        for order in DATE_ORDERS
        if order != layout.date_order
    }
    refuse_mixed(layout.date_order, {layout.date_order: np.zeros(len(odd), dtype=np.bool_), **others}, line[odd], path)


def _flag_quality(flag: NDArray[np.int8], cells: Cells, layout: Layout) -> None:
    """Take over flags of the open standard, or turn the exporter's own marks into flags."""
    if layout.flag_column is not None:
        given = read_numbers(cells.columns[layout.flag_column])
        known = np.isin(given, _FLAGS) & (flag != FLAG_MISSING)
        flag[known] = given[known].astype(np.int8)
    if layout.quality_column is None:
        return
    texts = [bytes(row).rstrip(b"\0").decode("latin-1") for row in cells.columns[layout.quality_column]]
    known = flag != FLAG_MISSING
    flag[np.isin(texts, layout.quality_suspect) & known] = FLAG_SUSPECT
    flag[np.isin(texts, layout.quality_bad) & known] = FLAG_FAIL


def _utc(times: Times, line: NDArray[np.int32], layout: Layout, path: str) -> NDArray[np.datetime64]:
    """Local times to UTC by the layout's zone, or as each time says."""
    if times.zoned.all():
        return times.clock
    if times.zoned.any():
        message = "this time carries no offset from UTC and others do; mend the file or split it"
        raise RecordError(message, path=path, line=int(line[np.argmin(times.zoned)]))
    if layout.time_zone is None:
        message = (
            "nothing in this export states its time zone; declare it "
            '(time_zone = "UTC-8" or "Pacific/Auckland", or --time-zone)'
        )
        raise RecordError(message, path=path)
    try:
        zone = zone_named(layout.time_zone)
    except RecordError as error:
        raise RecordError(str(error), path=path) from error
    utc, doubtful = to_utc(times.clock, zone)
    if doubtful.any():
        row = int(np.argmax(doubtful))
        shown = str(times.clock[row].astype("datetime64[m]")).replace("T", " ")
        message = (
            f"the local time {shown} occurs twice or never in {layout.time_zone}, where clocks change, and the rows "
            f"around it do not settle it ({int(doubtful.sum())} such rows); declare a fixed offset, or mend these rows"
        )
        raise RecordError(message, path=path, line=int(line[row]))
    return utc
