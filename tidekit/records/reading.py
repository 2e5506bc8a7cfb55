"""Read exports into a gauge record: UTC, metres, flags, and a ledger of every row."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from pathlib import Path

import pandas as pd

from tidekit.errors import RecordError
from tidekit.files import sha256_of
from tidekit.records.decoding import Export, open_export
from tidekit.records.joining import join
from tidekit.records.layout import Layout, read_layout
from tidekit.records.ledger import RowLedger
from tidekit.records.recognition import Recognised, recognise
from tidekit.records.record import FLAG_NOT_EVALUATED, GaugeRecord, SourceFile
from tidekit.records.rows import Rows, read_rows
from tidekit.records.station import Station


@dataclass(frozen=True, eq=False, kw_only=True)
class ReadFile:
    """One file's rows."""

    rows: Rows
    """What was read."""
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
        Exports: text, plain, gzip or zip, or workbooks. Rows that several files share enter once.
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
    if not names:
        message = "no export named"
        raise RecordError(message)
    files = [read_file(name, layout=layout, column=column, time_zone=time_zone, unit=unit) for name in names]
    return record_of(files, names, station)


def record_of(files: Sequence[ReadFile], names: Sequence[str | Path], station: Station | None = None) -> GaugeRecord:
    """Put files that were read into one record; see `read_record`."""
    joined = join([file.rows for file in files])
    if not len(joined.utc):
        first = joined.rejected[0] if joined.rejected else None
        reason = f"{len(joined.rejected)} rows, the first: {first.reason}" if first else "there are none"
        message = f"no row could be read ({reason}); wanted times and heights"
        raise RecordError(message, path=names[0], line=first.line if first else None)
    index = pd.DatetimeIndex(joined.utc).tz_localize("UTC")
    heights = pd.Series(joined.height_m, index=index, name="height_m")
    flags = pd.Series(joined.flag, index=index, name="flag")
    flagged = int((joined.flag > FLAG_NOT_EVALUATED).sum())
    ledger = RowLedger(
        rows=sum(file.rows.count for file in files),
        kept=len(heights) - flagged,
        flagged=flagged,
        rejected=joined.rejected,
    )
    return GaugeRecord(
        station=_with_reference(station or Station(id=_plain_name(names[0])), files[0].layout.vertical_reference),
        heights=heights,
        flags=flags,
        ledger=ledger,
        sources=tuple(SourceFile(str(name), sha256_of(name)) for name in names),
        layout_name=files[0].layout.describe(),
    )


def _plain_name(path: str | Path) -> str:
    return Path(path).name.partition(".")[0] or Path(path).name


def _with_reference(station: Station, stated: str | None) -> Station:
    return station if station.vertical_reference or not stated else replace(station, vertical_reference=stated)


def read_file(
    path: str | Path,
    *,
    layout: Layout | str | Path | None = None,
    column: str | None = None,
    time_zone: str | None = None,
    unit: str | None = None,
    progress: Callable[[int], None] | None = None,
) -> ReadFile:
    """Read one export; see `read_record`. `progress` is told the number of bytes read, now and then."""
    export = open_export(path)
    try:
        chosen, evidence = _layout(export, layout, column, time_zone, unit)
    except RecordError as error:
        if error.path is None:
            raise RecordError(str(error), path=path) from error
        raise
    return ReadFile(rows=read_rows(export, chosen, progress=progress), layout=chosen, evidence=evidence)


def _layout(
    export: Export, layout: Layout | str | Path | None, column: str | None, time_zone: str | None, unit: str | None
) -> tuple[Layout, tuple[str, ...]]:
    """The layout of an export, and its evidence."""
    known = layout if layout is None or isinstance(layout, Layout) else read_layout(layout)
    found: Recognised | None = None
    if isinstance(known, Layout):
        chosen = known if column is None else replace(known, height_column=_number(column, export))
        evidence: tuple[str, ...] = ("layout declared",)
    else:
        found = recognise(export, column=column, declared=known)
        chosen, evidence = found.layout, found.evidence
    stated = {"time zone": chosen.time_zone, "unit": chosen.unit}
    chosen = chosen.declared(time_zone=time_zone, unit=unit)
    evidence += tuple(
        f"{what} {value} declared" + (f", in place of {stated[what]}" if stated[what] not in (None, value) else "")
        for what, value in (("time zone", time_zone), ("unit", unit))
        if value
    )
    for value, said, what in (
        (chosen.unit, found.unit if found else None, "unit of its heights"),
        (chosen.time_zone, found.zone if found else None, ""),
    ):
        if value is None and said is not None and said.fault:
            raise RecordError(said.fault, path=export.path, line=said.line)
        if value is None and what:
            message = f'nothing in this export states the {what}; declare it (unit = "m", or --unit m)'
            raise RecordError(message, path=export.path)
    return chosen, evidence


def _number(column: str, export: Export) -> int:
    if column.isdecimal() and 0 < int(column) < 10_000:
        return int(column)
    message = f"column {column!r}: beside a declared layout, a column is given by its number"
    raise RecordError(message, path=export.path)
