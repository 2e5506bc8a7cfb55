"""Text of an export: decoding, lines and cells, times and numbers."""

from __future__ import annotations

import csv
import gzip
import re
import zlib
from pathlib import Path

import pandas as pd

from tidekit.errors import RecordError
from tidekit.records.layout import BLANKS

LARGEST_BYTES = 4_000_000_000
"""An export that unpacks to more is refused: 60 years of minutes are a tenth of it."""

_DATE = r"(?P<a>\d{1,4})[-/.](?P<b>\d{1,2})[-/.](?P<c>\d{1,4})"
_CLOCK = r"(?P<hour>\d{1,2}):(?P<minute>\d{2})(?::(?P<second>\d{2}(?:[.,]\d+)?))?"
_ZONE = r"(?P<zone>Z|[+-]\d{2}:?\d{2})?"
TIME = re.compile(rf"^{_DATE}(?:[ T]+{_CLOCK}\s*{_ZONE})?$")
"""A date with an optional clock and offset; the parts a, b and c are year, month and day in some order."""


def read_lines(path: str | Path) -> list[str]:
    """Lines of a text export, plain or gzip, in UTF-8, UTF-16 with its mark, or Latin-1.

    Raises
    ------
    RecordError
        If the file is missing, empty, binary, or unpacks without end.
    """
    path = Path(path)
    try:
        data = path.read_bytes()
        if data[:2] == b"\x1f\x8b":
            with gzip.open(path) as stream:
                data = stream.read(LARGEST_BYTES + 1)
    except IsADirectoryError as error:
        message = "this is a folder; name the export in it"
        raise RecordError(message, path=path) from error
    except (OSError, EOFError, zlib.error) as error:
        message = f"cannot read this export ({getattr(error, 'strerror', None) or error}); check the path and the file"
        raise RecordError(message, path=path) from error
    if len(data) > LARGEST_BYTES:
        message = f"unpacks to more than {LARGEST_BYTES:,} bytes; split it by years"
        raise RecordError(message, path=path)
    if data[:2] in (b"\xff\xfe", b"\xfe\xff"):
        text = data.decode("utf-16", errors="replace")
    elif b"\0" in data[:4096]:
        message = "this is a binary file; wanted a text export"
        raise RecordError(message, path=path)
    else:
        try:
            text = data.decode("utf-8-sig")
        except UnicodeDecodeError:
            text = data.decode("latin-1")
    # Only the ends of lines that exports use: other controls inside a line are no new line.
    lines = text.replace("\r\n", "\n").replace("\r", "\n").split("\n")
    while lines and not lines[-1].strip():
        lines.pop()
    if not lines:
        message = "this file is empty; wanted rows of times and heights"
        raise RecordError(message, path=path)
    return lines


def split(line: str, delimiter: str) -> list[str]:
    """Cells of a line, without blanks at their ends."""
    if delimiter == BLANKS:
        return line.split()
    if '"' in line:
        try:
            return [cell.strip() for cell in next(csv.reader([line], delimiter=delimiter))]
        except (csv.Error, StopIteration):
            return [cell.strip() for cell in line.split(delimiter)]
    return [cell.strip() for cell in line.split(delimiter)]


def time_text(cells: list[str], columns: tuple[int, ...]) -> str | None:
    """Text of a row's time, date and clock joined; None where the row lacks them."""
    if len(cells) < max(columns):
        return None
    return " ".join(cells[column - 1] for column in columns)


def parse_times(texts: pd.Series, date_order: str) -> tuple[pd.Series, pd.Series]:
    """Read times.

    Parameters
    ----------
    texts : Series of str
        Date, clock and perhaps an offset.
    date_order : str
        One of `layout.DATE_ORDERS`.

    Returns
    -------
    times : Series of datetime64[us]
        As the clock shows; in UTC where the text has an offset; NaT where unreadable.
    with_offset : Series of bool
        Which carried an offset.
    """
    parts = texts.str.extract(TIME)
    names = {"year-month-day": "abc", "day-month-year": "cba", "month-day-year": "cab"}[date_order]
    numbers = parts[["a", "b", "c", "hour", "minute"]].apply(pd.to_numeric, errors="coerce")
    clock = numbers[["hour", "minute"]].fillna(0)
    second = pd.to_numeric(parts["second"].str.replace(",", "."), errors="coerce").fillna(0.0)
    frame = pd.DataFrame(dict(zip(("year", "month", "day"), (numbers[name] for name in names), strict=True)))
    day = pd.to_datetime(frame.where(frame["year"] > 99), errors="coerce")
    sound = (
        (clock["minute"] < 60)
        & (second < 60)
        & ((clock["hour"] < 24) | ((clock["hour"] == 24) & (clock["minute"] == 0)))
    )
    since = pd.to_timedelta(clock["hour"] * 3600 + clock["minute"] * 60 + second, unit="s").dt.round("us")
    times = (day + since).where(sound & (parts["hour"].notna() | ~texts.str.contains(":"))).astype("datetime64[us]")
    offset = parts["zone"].fillna("")
    digits = pd.to_numeric(offset.str.replace("[Z:+-]", "", regex=True), errors="coerce").fillna(0).astype(int)
    minutes = (digits // 100 * 60 + digits % 100) * offset.str.startswith("-").map({True: -1, False: 1})
    return (times - pd.to_timedelta(minutes, unit="min")).astype("datetime64[us]"), offset != ""


def parse_numbers(texts: pd.Series, decimal: str) -> pd.Series:
    """Read numbers; NaN where a text is none."""
    plain = texts.str.replace(",", ".") if decimal == "," else texts
    return pd.to_numeric(plain, errors="coerce").astype("float64")
