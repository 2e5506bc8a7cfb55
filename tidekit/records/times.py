"""Times of an export's rows, from the cells that hold them, as the export's clock shows them."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from tidekit.records.clock_texts import Bytes, Ints, read_part
from tidekit.records.layout import DateOrder
from tidekit.records.numerals import read_numbers

Numbers = NDArray[np.float64] | Ints

_TEXT_PARTS = ("stamp", "date", "clock")
_EPOCH_SECONDS = {"epoch_s": 1.0, "epoch_ms": 1e-3}
_EPOCH_LIMIT_US = 7.2e15
"""Microseconds to the year 2198."""
_LARGEST = 1e14
"""No number of a time is larger: milliseconds since 1970 reach 1e13."""
_DAY_US, _MOST_OFFSET_MIN = 86_400_000_000, 15 * 60
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
    values: dict[str, Numbers] = {}
    sound = np.ones(n, dtype=np.bool_)
    for part, texts in zip(parts, cells, strict=True):
        if part in _TEXT_PARTS:
            fields = read_part(texts, part, order)
            sound &= fields.sound
            values |= fields.values
        else:
            numbers = read_numbers(texts, decimal)
            sound &= np.isfinite(numbers) & (np.abs(numbers) < _LARGEST)
            values[part] = np.where(sound, numbers, 0.0)
    if not sound.any():
        return Times(np.full(n, np.datetime64("NaT", "us")), np.zeros(n, dtype=np.bool_))
    if parts[0] in _EPOCH_SECONDS:
        far = 2 * _EPOCH_LIMIT_US
        microseconds = np.clip(np.round(values[parts[0]] * (1e6 * _EPOCH_SECONDS[parts[0]])), -far, far)
        clock, in_range = microseconds.astype(np.int64).view("datetime64[us]"), np.abs(microseconds) < _EPOCH_LIMIT_US
        zoned = np.ones(n, dtype=np.bool_)
    else:
        clock, in_range = _assembled(values, n)
        zoned = np.broadcast_to(np.asarray(values.get("zoned", False)), n) > 0
    sound &= in_range
    clock[~sound] = np.datetime64("NaT", "us")
    return Times(clock, zoned & sound)


def _assembled(values: dict[str, Numbers], n: int) -> tuple[NDArray[np.datetime64], NDArray[np.bool_]]:
    """Put calendar and clock together."""
    zero = np.zeros(1, dtype=np.int64)
    days, sound = _days(values, n)
    hour, minute = values.get("hour", zero), values.get("minute", zero)
    if "hhmm" in values:
        hour, minute = values["hhmm"] // 100, values["hhmm"] % 100
    second, micro = values.get("second", zero), values.get("microsecond", zero)
    offset = values.get("offset_min", zero)
    sound &= (hour >= 0) & (minute >= 0) & (minute < 60) & (second >= 0) & (second < 60) & (micro < 60_000_000)
    sound &= (offset >= -_MOST_OFFSET_MIN) & (offset <= _MOST_OFFSET_MIN)
    since = (hour * 3600 + minute * 60 + second) * 1_000_000 + micro
    if "day_of_year" in values:
        since = since + values["day_of_year"] % 1 * _DAY_US
    sound &= since <= _DAY_US  # 24:00 is the end of the day
    since = np.where(sound, since - offset * 60_000_000, 0)
    if since.dtype != np.int64:
        since = np.round(since).astype(np.int64)
    return days.astype("datetime64[us]") + since.view("timedelta64[us]"), sound


def _days(values: dict[str, Numbers], n: int) -> tuple[NDArray[np.datetime64], NDArray[np.bool_]]:
    """Dates, found once for each run of rows that share one, and whether the calendar has them."""
    parts = [values.get(name, np.zeros(1)) for name in ("year", "month", "day", "day_of_year")]
    year, month, day, of_year = (
        np.broadcast_to(np.floor(np.clip(part, 0, 9999)).astype(np.int64), n) for part in parts
    )
    key = ((year * 10_000 + month) * 10_000 + day) * 10_000 + of_year
    first = np.flatnonzero(np.concatenate(([True], key[1:] != key[:-1])))
    year, month, day, of_year = year[first], month[first], day[first], of_year[first]
    by_year = of_year > 0
    month, day = np.where(by_year, 1, month), np.where(by_year, of_year, day)
    end = _first_of(year + (by_year | (month >= 12)), np.where(by_year, 1, month % 12 + 1))
    sound = (year >= _EARLIEST_YEAR) & (year <= _LATEST_YEAR) & (month >= 1) & (month <= 12) & (day >= 1)
    dates = _first_of(year, month) + (day - 1).view("timedelta64[D]")
    sound &= dates < end
    runs = np.diff(np.concatenate((first, [n])))
    whole = np.repeat(sound, runs)
    for part in parts[:3]:
        if part.dtype != np.int64:
            whole &= part % 1 == 0
    return np.repeat(dates, runs), whole


def _first_of(year: Ints, month: Ints) -> NDArray[np.datetime64]:
    year, month = np.clip(year, _EARLIEST_YEAR - 1, _LATEST_YEAR + 1), np.clip(month, 1, 12)
    return ((year - 1970) * 12 + month - 1).view("datetime64[M]").astype("datetime64[D]")
