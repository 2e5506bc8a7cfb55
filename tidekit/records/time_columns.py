"""Find the columns of an export's time, and the order of its dates."""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from tidekit.records.cutting import as_matrix
from tidekit.records.layout import DATE_ORDERS, DateOrder
from tidekit.records.numerals import read_numbers
from tidekit.records.times import read_times

_FIRST_COLUMNS = 14
"""The time stands among these."""
_MOST = 0.5
"""Share of the lines from the first row on that must hold a time: the rest may be junk."""
_NAMES = {
    "year": "year yr yyyy",
    "month": "month mon mo mm",
    "day": "day dy dd",
    "day_of_year": "doy jday julian yearday yday dayofyear julianday",
    "hour": "hour hr hh hours",
    "minute": "minute min mi minutes",
    "second": "second sec ss seconds",
    "hhmm": "hhmm time hrmn",
    "epoch_s": "epoch unix unixtime epochs posix timestamp unixtimestamp epochseconds time",
}
_PART_OF = {word: part for part, words in reversed(_NAMES.items()) for word in words.split()}
_EVEN = 0.9
"""Share of steps that are the commonest: what is left are gaps."""
_DAY_US = 86_400_000_000
_EPOCH_RANGE_S = (1e8, 4.2e9)
"""The years 1973 to 2103."""


@dataclass(frozen=True)
class TimePlace:
    """Where a table's time stands."""

    columns: tuple[int, ...]
    """Columns, from 1."""
    parts: tuple[str, ...]
    """What they hold, see `layout.TIME_PARTS`."""
    named: bool = False
    """Whether the columns' names say so."""


def candidates(rows: list[list[str]], names: list[str]) -> Iterator[TimePlace]:
    """Places where the time may stand, the likeliest first.

    Parameters
    ----------
    rows : list of lists of str
        Cells of the first lines.
    names : list of str
        Names of columns, or empty.

    Yields
    ------
    TimePlace
        A place to try.
    """
    width = min(max((len(row) for row in rows), default=0), _FIRST_COLUMNS)
    dates = [n for n in range(1, width + 1) if _holds(rows, TimePlace((n,), ("date",)))]
    clocks = [n for n in range(1, width + 1) if n not in dates and _holds_clock(rows, n)]
    words = [re.sub(r"[^a-z]", "", re.sub(r"[(\[].*", "", name.lower())) for name in names]
    named = {_PART_OF[word]: place for place, word in reversed([*enumerate(words, 1)]) if word in _PART_OF}
    for n in range(1, width + 1):
        if n not in dates and _holds(rows, TimePlace((n,), ("stamp",))):
            yield TimePlace((n,), ("stamp",))
    for date in dates:
        near = sorted(clocks, key=lambda clock: (clock < date, abs(clock - date)))
        yield from (TimePlace((date, clock), ("date", "clock")) for clock in near)
        for part in ("hour", "hhmm"):
            if part in named and named[part] not in clocks:
                more = ("minute",) if part == "hour" and "minute" in named else ()
                yield TimePlace((date, named[part], *(named[p] for p in more)), ("date", part, *more))
    yield from _named_numbers(named)
    yield from _plain_numbers(rows, width)


def holds_dates(rows: list[list[str]]) -> bool:
    """Whether a column holds dates, with a clock beside them or without."""
    width = min(max((len(row) for row in rows), default=0), _FIRST_COLUMNS)
    return any(_holds(rows, TimePlace((n,), ("date",))) for n in range(1, width + 1))


def _named_numbers(named: dict[str, int]) -> Iterator[TimePlace]:
    day = [part for part in ("month", "day") if part in named]
    days = ("month", "day") if len(day) == 2 else ("day_of_year",) if "day_of_year" in named else ()
    if "year" in named and days:
        clock: list[str] = [part for part in ("hour", "minute", "second") if part in named]
        if "hour" not in named:
            clock = ["hhmm"] if "hhmm" in named else []
        parts = ("year", *days, *clock)
        yield TimePlace(tuple(named[part] for part in parts), parts, named=True)
    if "epoch_s" in named:
        yield TimePlace((named["epoch_s"],), ("epoch_s",), named=True)
        yield TimePlace((named["epoch_s"],), ("epoch_ms",), named=True)


def _plain_numbers(rows: list[list[str]], width: int) -> Iterator[TimePlace]:
    """Columns without names: year, month, day, hour ... or year, day of year, hour ..., or seconds since 1970."""
    for parts in (
        ("year", "month", "day", "hour", "minute", "second"),
        ("year", "month", "day", "hour", "minute"),
        ("year", "month", "day", "hour"),
        ("year", "day_of_year", "hour", "minute"),
        ("year", "day_of_year", "hour"),
        ("epoch_s",),
        ("epoch_ms",),
    ):
        if width > len(parts):
            yield TimePlace(tuple(range(1, len(parts) + 1)), parts)


def _holds_clock(rows: list[list[str]], column: int) -> bool:
    cells = [row[column - 1] for row in rows if len(row) >= column]
    # A packed clock such as 0530 looks like a number: only where every cell is a clock, and not always the same.
    marked = sum(":" in cell or bool(re.fullmatch(r"\d{1,2}[hH.]\d\d", cell)) for cell in cells)
    packed = [cell for cell in cells if re.fullmatch(r"\d{4}|\d{6}", cell)]
    if marked * 2 < len(cells) and len(set(packed)) < max(2, len(cells) / 4):
        return False
    return _holds(rows, TimePlace((column,), ("clock",)))


def _holds(rows: list[list[str]], place: TimePlace) -> bool:
    """Whether most lines from the first that does hold that part of a time, in some order of dates."""
    if place.parts == ("clock",):
        texts = [["2001-01-01 " + cell for cell in column] for column in columns_of(rows, place.columns)]
        place = TimePlace(place.columns, ("stamp",))
    else:
        texts = columns_of(rows, place.columns)
    found = np.zeros(len(rows), dtype=np.bool_)
    for order in DATE_ORDERS:
        found |= ~np.isnat(clocks(texts, place, order))
        if enough(found):
            return True
    return False


def enough(found: NDArray[np.bool_]) -> bool:
    """Whether most lines are found, counted from the first found."""
    return bool(found.any()) and float(found[int(np.argmax(found)) :].mean()) >= _MOST


def columns_of(rows: list[list[str]], columns: Iterable[int]) -> list[list[str]]:
    """Texts of some columns; empty where a row is short."""
    return [[row[n - 1] if len(row) >= n else "" for row in rows] for n in columns]


def clocks(texts: list[list[str]], place: TimePlace, order: DateOrder) -> NDArray[np.datetime64]:
    """Times of rows in an order of dates."""
    cells = [as_matrix([text.encode("latin-1", "replace") for text in column]) for column in texts]
    times = read_times(cells, place.parts, order).clock
    if place.parts[0] in ("epoch_s", "epoch_ms"):
        numbers = read_numbers(cells[0]) * (1.0 if place.parts[0] == "epoch_s" else 1e-3)
        sound = (numbers > _EPOCH_RANGE_S[0]) & (numbers < _EPOCH_RANGE_S[1])
        times = np.where(sound, times, np.datetime64("NaT", "us"))
    return times


def steps_are_sound(times: NDArray[np.datetime64]) -> bool:
    """Whether rows follow one another in time, in steps that stay near the commonest."""
    steps = np.diff(times[~np.isnat(times)]).astype(np.int64)
    if not len(steps):
        return False
    values, counts = np.unique(steps, return_counts=True)
    common = int(values[np.argmax(counts)])
    return common > 0 and bool(np.all((steps > 0) & (steps <= 100 * common)))


def steps_are_even(times: NDArray[np.datetime64]) -> bool:
    """Whether nearly all rows follow one another in one step, which a day holds a whole number of times."""
    steps = np.diff(times[~np.isnat(times)]).astype(np.int64)
    if not len(steps):
        return False
    values, counts = np.unique(steps, return_counts=True)
    common = int(values[np.argmax(counts)])
    return common > 0 and _DAY_US % common == 0 and int(counts.max()) >= _EVEN * len(steps)
