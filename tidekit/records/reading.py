"""Read exports into a gauge record: UTC, metres, flags, and a ledger of every row."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np
import pandas as pd

from tidekit.errors import RecordError
from tidekit.files import sha256_of
from tidekit.records.cells import parse_numbers, parse_times, read_lines, split
from tidekit.records.layout import Layout, read_layout
from tidekit.records.ledger import RejectedRow, RowLedger
from tidekit.records.recognition import recognise
from tidekit.records.record import FLAG_MISSING, FLAG_NOT_EVALUATED, GaugeRecord, SourceFile
from tidekit.records.station import Station
from tidekit.records.units import METRES
from tidekit.records.zones import to_utc, zone_named


@dataclass(frozen=True, eq=False, kw_only=True)
class ReadFile:
    """One file's rows."""

    rows: pd.DataFrame
    """Accepted rows: `utc`, `height_m` (NaN where missing), `line`, `path`."""
    count: int
    """Data rows in the file."""
    rejected: tuple[RejectedRow, ...]
    """Rows that could not be read."""
    layout: Layout
    """The layout it was read with."""
    evidence: tuple[str, ...]
    """How the layout was found."""


def read_record(
    paths: str | Path | Sequence[str | Path],
    *,
    station: Station | None = None,
    layout: Layout | str | Path | None = None,
    column: str | None = None,
    time_zone: str | None = None,
    unit: str | None = None,
) -> GaugeRecord:
    """Read one gauge's exports.

    Parameters
    ----------
    paths : path-like or sequence of path-like
        Text exports, plain or gzip. Overlapping rows of several files must agree.
    station : Station, optional
        Where the gauge stands; by default only an id, the first file's name.
    layout : Layout or path-like, optional
        Declared layout; recognised by default.
    column, time_zone, unit : str, optional
        Declared height column, time zone and unit; they overrule what the file says.

    Returns
    -------
    GaugeRecord
        Sorted by time.

    Raises
    ------
    RecordError
        If a file cannot be read; names file and line and what to declare.
    """
    names = [paths] if isinstance(paths, (str, Path)) else list(paths)
    files = [read_file(name, layout=layout, column=column, time_zone=time_zone, unit=unit) for name in names]
    rows = pd.concat([file.rows for file in files], ignore_index=True)
    rejected = [row for file in files for row in file.rejected]
    rows, repeated = _one_height_a_time(rows)
    rejected += repeated
    if rows.empty:
        reason = f"{rejected[0].reason} (line {rejected[0].line})" if rejected else "there are none"
        message = f"no row could be read: {reason}"
        raise RecordError(message, path=names[0])
    heights = pd.Series(
        rows["height_m"].to_numpy(dtype=np.float64),
        index=pd.DatetimeIndex(rows["utc"]).tz_localize("UTC"),
        name="height_m",
    )
    flags = pd.Series(
        np.where(heights.isna(), FLAG_MISSING, FLAG_NOT_EVALUATED).astype(np.int8), index=heights.index, name="flag"
    )
    missing = int(heights.isna().sum())
    ledger = RowLedger(
        rows=sum(file.count for file in files),
        kept=len(rows) - missing,
        flagged=missing,
        rejected=tuple(sorted(rejected, key=lambda row: (row.path, row.line))),
    )
    return GaugeRecord(
        station=_with_reference(station or Station(id=Path(names[0]).stem), files[0].layout.vertical_reference),
        heights=heights,
        flags=flags,
        ledger=ledger,
        sources=tuple(SourceFile(str(name), sha256_of(name)) for name in names),
        layout_name=files[0].layout.describe(),
    )


def _with_reference(station: Station, stated: str | None) -> Station:
    return station if station.vertical_reference or not stated else replace(station, vertical_reference=stated)


def read_file(
    path: str | Path,
    *,
    layout: Layout | str | Path | None = None,
    column: str | None = None,
    time_zone: str | None = None,
    unit: str | None = None,
) -> ReadFile:
    """Read one export; see `read_record`."""
    lines = read_lines(path)
    evidence: tuple[str, ...] = ("layout declared",)
    try:
        if layout is None:
            found = recognise(lines, path=str(path), column=column)
            chosen, evidence = found.layout, found.evidence
        else:
            chosen = layout if isinstance(layout, Layout) else read_layout(layout)
        chosen = chosen.declared(time_zone=time_zone, unit=unit)
    except RecordError as error:
        if error.path is None:
            raise RecordError(str(error), path=path) from error
        raise
    if chosen.unit is None:
        message = 'nothing in this export states the unit of its heights; declare it (unit = "m", or --unit m)'
        raise RecordError(message, path=path)
    return _read_rows(lines, str(path), chosen, evidence)


def _read_rows(lines: list[str], path: str, layout: Layout, evidence: tuple[str, ...]) -> ReadFile:
    start = layout.first_row
    numbered = [
        (number, line)
        for number, line in enumerate(lines[start - 1 :], start)
        if line.strip() and not line.startswith(layout.comment)
    ]
    if not numbered:
        message = f"no rows from line {start} on; the layout says they begin there"
        raise RecordError(message, path=path, line=start)
    cells = [split(line, layout.delimiter) for _, line in numbered]
    need = max(*layout.time_columns, layout.height_column)
    first, *rest = (column - 1 for column in layout.time_columns)
    times = [
        row[first] if not rest else " ".join((row[first], row[rest[0]])) if len(row) > rest[0] else "" for row in cells
    ]
    heights = [row[layout.height_column - 1] if len(row) >= need else None for row in cells]
    frame = pd.DataFrame(
        {
            "line": [number for number, _ in numbered],
            "time": pd.Series(times, dtype=str),
            "text": pd.Series(heights, dtype=object),
        }
    )
    frame["path"] = path
    frame["reason"] = ""
    clock, with_offset = parse_times(frame["time"], layout.date_order)
    frame["utc"] = _utc(clock, with_offset, frame, layout, path)
    frame.loc[clock.isna(), "reason"] = "unreadable time"
    _heights(frame, layout)
    bad = frame["reason"] != ""
    rejected = tuple(
        RejectedRow(path, int(line), str(reason))
        for line, reason in zip(frame.loc[bad, "line"], frame.loc[bad, "reason"], strict=True)
    )
    return ReadFile(
        rows=frame.loc[~bad, ["utc", "height_m", "line", "path"]],
        count=len(frame),
        rejected=rejected,
        layout=layout,
        evidence=evidence,
    )


def _utc(clock: pd.Series, with_offset: pd.Series, frame: pd.DataFrame, layout: Layout, path: str) -> pd.Series:
    readable = clock.notna()
    if readable.any() and with_offset[readable].all():
        return clock
    if with_offset[readable].any():
        line = int(frame.loc[readable & ~with_offset, "line"].iloc[0])
        message = "some times carry an offset from UTC and this one does not; mend the file"
        raise RecordError(message, path=path, line=line)
    if layout.time_zone is None:
        message = 'nothing in this export states its time zone; declare it (time_zone = "UTC-8", or --time-zone UTC-8)'
        raise RecordError(message, path=path)
    utc, doubtful = to_utc(clock, zone_named(layout.time_zone))
    if doubtful.any():
        row = frame.loc[doubtful].iloc[0]
        message = (
            f"the local hour {row['time']!r} occurs twice or never in {layout.time_zone} (clocks change) and the rows "
            f"around it do not settle which ({int(doubtful.sum())} such rows); declare a fixed offset or mend them"
        )
        raise RecordError(message, path=path, line=int(row["line"]))
    return utc


def _heights(frame: pd.DataFrame, layout: Layout) -> None:
    """Add `height_m`, and a reason to rows whose height is no number and no mark of a missing value."""
    texts = frame["text"]
    cut = texts.isna()
    texts = texts.fillna("").astype(str)
    values = parse_numbers(texts, layout.decimal)
    marks = set(layout.missing)
    mark_values = parse_numbers(pd.Series(sorted(marks), dtype=str), ".").dropna()
    missing = texts.isin(marks) | values.isin(mark_values)
    frame.loc[(frame["reason"] == "") & cut, "reason"] = "row is cut short"
    not_number = ~missing & ~np.isfinite(values) & (frame["reason"] == "")
    frame.loc[not_number, "reason"] = "height is not a number"
    frame["height_m"] = values.where(~missing) * METRES[str(layout.unit)]


def _one_height_a_time(rows: pd.DataFrame) -> tuple[pd.DataFrame, list[RejectedRow]]:
    """Sort by time and keep the first height of each time, a real one before a missing one."""
    ordered = rows.assign(lacks=rows["height_m"].isna()).sort_values(["utc", "lacks"], kind="stable")
    again = ordered["utc"].duplicated()
    kept = ordered[~again]
    if not again.any():
        return kept, []
    first = kept.set_index("utc")["height_m"].reindex(ordered.loc[again, "utc"]).to_numpy()
    heights = ordered.loc[again, "height_m"].to_numpy()
    same = (first == heights) | np.isnan(heights)
    rejected = [
        RejectedRow(str(path), int(line), "same time again" if alike else "same time again with another height")
        for path, line, alike in zip(ordered.loc[again, "path"], ordered.loc[again, "line"], same, strict=True)
    ]
    return kept, rejected
