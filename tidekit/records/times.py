"""Times of an export's rows, from the cells that hold them, as the export's clock shows them."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from tidekit.records.clock_texts import Bytes, Ints, read_part
from tidekit.records.layout import DateOrder
from tidekit.records.numerals import read_numbers

_TEXT_PARTS = ("stamp", "date", "clock")
_EPOCH_SECONDS = {"epoch_s": 1.0, "epoch_ms": 1e-3}
_EARLIEST_YEAR, _LATEST_YEAR = 1700, 2200
"""The oldest gauge records begin in 1700 (Amsterdam); a year outside is a fault of the file."""


@dataclass(frozen=True, eq=False)
class Times:
    """Times of rows, each shape (n,)."""

    clock: NDArray[np.datetime64]
    """As the clock shows, microseconds; in UTC where `zoned`; NaT where unreadable."""
    zoned: NDArray[np.bool_]
    """Which carry their own offset from UTC."""


def read_times(cells: list[Bytes], parts: tuple[str, ...], order: DateOrder, decimal: str = ".") -> Times:
    """Read times.

    Parameters
    ----------
    cells : list of ndarray of uint8, shape (n, width) each
        Cells of the time's columns.
    parts : tuple of str
        What each column holds, of `layout.TIME_PARTS`.
    order : str
        Order of dates.
    decimal : str
        Decimal mark of hours and seconds.

    Returns
    -------
    Times
        Clock times.
    """
    n = len(cells[0])
    values: dict[str, NDArray[np.float64] | Ints] = {}
    sound = np.ones(n, dtype=np.bool_)
    zoned = np.zeros(n, dtype=np.bool_)
    for part, texts in zip(parts, cells, strict=True):
        if part in _TEXT_PARTS:
            fields = read_part(texts, part, order)
            sound &= fields.sound
            # A part adds only what it holds: the clock's zero year must not overwrite the date's.
            values |= {name: v for name, v in fields.values.items() if name not in values or v.any()}
        else:
            numbers = read_numbers(texts, decimal)
            sound &= np.isfinite(numbers)
            values[part] = np.where(np.isfinite(numbers), numbers, 0.0)
    if not sound.any():
        return Times(np.full(n, np.datetime64("NaT", "us")), zoned)
    if parts[0] in _EPOCH_SECONDS:
        microseconds = np.round(np.where(sound, values[parts[0]], 0.0) * _EPOCH_SECONDS[parts[0]] * 1e6)
        sound &= np.abs(microseconds) < 7.3e15  # the years 1739 to 2201
        clock = np.where(sound, microseconds, 0).astype(np.int64).view("datetime64[us]")
        zoned = sound.copy()
    else:
        clock, in_range = _assembled(values, n)
        sound &= in_range
        zoned = np.asarray(values.get("zoned", zoned), dtype=np.bool_)
    return Times(np.where(sound, clock, np.datetime64("NaT", "us")), zoned & sound)


def _assembled(
    values: dict[str, NDArray[np.float64] | Ints], n: int
) -> tuple[NDArray[np.datetime64], NDArray[np.bool_]]:
    """Put calendar and clock together."""

    def whole(name: str) -> Ints:
        return np.asarray(np.clip(np.floor(values.get(name, np.zeros(n))), -1e6, 1e6), dtype=np.int64)

    year, month, day, of_year = whole("year"), whole("month"), whole("day"), whole("day_of_year")
    if "day_of_year" in values and np.asarray(values["day_of_year"]).any():
        month, day = np.ones_like(month), of_year
        year_end = _first_of(year + 1, month)
    else:
        year_end = _first_of(year + (month >= 12), month % 12 + 1)
    sound = (year >= _EARLIEST_YEAR) & (year <= _LATEST_YEAR) & (month >= 1) & (month <= 12) & (day >= 1)
    days = _first_of(year, month) + (day - 1).astype("timedelta64[D]")
    sound &= days < year_end
    for name in ("year", "month", "day"):
        sound &= np.asarray(values.get(name, np.zeros(n))) % 1 == 0
    hour = np.asarray(values.get("hour", np.zeros(n)), dtype=np.float64)
    if "hhmm" in values:
        packed = np.asarray(values["hhmm"], dtype=np.float64)
        hour = packed // 100
        values["minute"] = packed % 100
    minute = np.asarray(values.get("minute", np.zeros(n)), dtype=np.float64)
    second = np.asarray(values.get("second", np.zeros(n)), dtype=np.float64)
    micro = np.asarray(values.get("microsecond", np.zeros(n)), dtype=np.float64)
    sound &= (minute >= 0) & (minute < 60) & (second >= 0) & (second < 60) & (micro < 60e6) & (hour >= 0)
    offset = np.asarray(values.get("offset_min", np.zeros(n)), dtype=np.float64)
    sound &= np.abs(offset) <= 15 * 60
    fraction = np.asarray(values.get("day_of_year", np.zeros(n)), dtype=np.float64) % 1
    since = np.round((hour * 3600 + minute * 60 + second) * 1e6 + micro + fraction * 86400e6)
    sound &= since <= 86400e6  # 24:00 is the end of the day
    since = np.where(sound, since - offset * 60e6, 0.0).astype(np.int64)
    return days.astype("datetime64[us]") + since.view("timedelta64[us]"), sound


def _first_of(year: Ints, month: Ints) -> NDArray[np.datetime64]:
    year, month = np.clip(year, _EARLIEST_YEAR - 1, _LATEST_YEAR + 1), np.clip(month, 1, 12)
    return ((year - 1970) * 12 + month - 1).view("datetime64[M]").astype("datetime64[D]")
