"""Times from matrices of bytes: rows of the same shape (digits alike, other characters the same) are read together."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass
from functools import cache

import numpy as np
from numpy.typing import NDArray

from tidekit.records.layout import DateOrder

Bytes = NDArray[np.uint8]
Ints = NDArray[np.int64]

_PEELED = 48
"""Shapes taken one at a time before the rest is sorted: an export has a handful."""
_MONTHS = ("JAN", "FEB", "MAR", "APR", "MAY", "JUN", "JUL", "AUG", "SEP", "OCT", "NOV", "DEC")
_NAMED = rf"(?P<name>{'|'.join(_MONTHS)})[A-Z]*\.?"
_S = r"(?P<s>[-/. ])"
_YEAR = r"(?P<year>0000|00)"
_DAY = r"(?P<day>00?)"
_MONTH = r"(?P<month>00?)"
_CLOCK = (
    r"(?P<hour>00?)[:.hH](?P<minute>00)(?:[:.](?P<second>00)(?:[.,](?P<fraction>0{1,9}))?)?"
    r"(?: ?(?P<half>[AP])\.?M\.?)?"
)
_PACKED_CLOCK = r"(?P<hour>00)(?P<minute>00)(?P<second>00)?"
_ZONE = r"(?: ?(?P<zone>Z|UTC|GMT|[+-]00(?::?00)?))?"
_DATES: dict[DateOrder, str] = {
    "year-month-day": rf"(?:{_YEAR}{_S}{_MONTH}(?P=s){_DAY}|(?P<year>0000){_S}?{_NAMED}[-/. ]?{_DAY}"
    r"|(?P<year>0000)(?P<month>00)(?P<day>00))",
    "day-month-year": rf"(?:{_DAY}{_S}{_MONTH}(?P=s){_YEAR}|{_DAY}[-/. ]?{_NAMED}[-/., ]*{_YEAR})",
    "month-day-year": rf"(?:{_MONTH}{_S}{_DAY}(?P=s){_YEAR}|{_NAMED}[-/. ]?{_DAY}(?:ST|ND|RD|TH)?[-/., ]*{_YEAR})",
    "year-day-of-year": r"(?P<year>0000)[-/. ]?(?P<day_of_year>000)",
}


@dataclass(frozen=True, eq=False)
class Fields:
    """Numbers read from texts, each shape (n,)."""

    values: dict[str, Ints]
    """By part: ``year``, ``month``, ``day``, ``day_of_year``, ``hour``, ``minute``, ``microsecond``, ``offset_min``;
    ``zoned`` is 1 where the text carries an offset."""
    sound: NDArray[np.bool_]
    """Which texts could be read."""


@cache
def _patterns(part: str, order: DateOrder) -> list[re.Pattern[str]]:
    dates = _alternatives(_DATES[order])
    if part == "clock":
        bodies = [_CLOCK + _ZONE, _PACKED_CLOCK]
    elif part == "date":
        bodies = dates
    else:
        bodies = [f"{date}(?:T| T?){clock}" for date in dates for clock in (_CLOCK + _ZONE, _PACKED_CLOCK + _ZONE)]
        bodies += [date + _PACKED_CLOCK + _ZONE for date in dates if date.startswith(r"(?P<year>0000)(")]
    return [re.compile(body) for body in bodies]


def _alternatives(body: str) -> list[str]:
    """Alternatives of a date's pattern apart, since a name may stand only once in one pattern."""
    if not body.startswith("(?:"):
        return [body]
    found, depth, start = [], 0, 3
    for place, mark in enumerate(body):
        depth += (mark == "(") - (mark == ")")
        if (mark == "|" and depth == 1) or (mark == ")" and depth == 0):
            found.append(body[start:place])
            start = place + 1
    return found


def read_part(cells: Bytes, part: str, order: DateOrder) -> Fields:
    """Read one part of a time.

    Parameters
    ----------
    cells : ndarray of uint8, shape (n, width)
        ASCII texts padded with zeros.
    part : str
        ``stamp`` (date and clock), ``date`` or ``clock``.
    order : str
        Order of the date.

    Returns
    -------
    Fields
        Numbers, and which texts could be read.
    """
    values: dict[str, Ints] = {}
    sound = np.zeros(len(cells), dtype=np.bool_)
    patterns = _patterns(part, order)
    for shape, rows in shapes_of(cells):
        match = next((found for pattern in patterns if (found := pattern.fullmatch(shape))), None)
        if match is None:
            continue
        sound[rows] = True
        for name, numbers in _numbers(match, cells if isinstance(rows, slice) else cells[rows]).items():
            if name not in values:
                values[name] = np.zeros(len(cells), dtype=np.int64)
            values[name][rows] = numbers
    return Fields(values, sound)


def shapes_of(cells: Bytes) -> Iterator[tuple[str, slice | Ints]]:
    """Group texts by shape: every digit as 0, letters in capitals, runs of blanks as they are.

    Yields
    ------
    shape : str
        The shape.
    rows : slice or ndarray
        The texts that have it.
    """
    shapes = np.where((cells >= 48) & (cells <= 57), np.uint8(48), cells)
    shapes -= np.uint8(32) * ((shapes >= 97) & (shapes <= 122))
    if len(shapes) and bool((shapes == shapes[0]).all()):
        yield _text(shapes[0]), slice(None)
        return
    left = np.arange(len(shapes))
    for _ in range(_PEELED):
        if not len(left):
            return
        first = shapes[left[0]]
        same = (shapes[left] == first).all(axis=1)
        yield _text(first), left[same]
        left = left[~same]
    if len(left):
        keys = np.ascontiguousarray(shapes[left]).view(f"S{shapes.shape[1]}").ravel()
        unique, inverse = np.unique(keys, return_inverse=True)
        order = np.argsort(inverse, kind="stable")
        bounds = np.searchsorted(inverse[order], np.arange(len(unique) + 1))
        for index, key in enumerate(unique):
            yield bytes(key).decode("latin-1"), left[order[bounds[index] : bounds[index + 1]]]


def _text(shape: Bytes) -> str:
    return bytes(shape).rstrip(b"\0").decode("latin-1")


def _numbers(match: re.Match[str], cells: Bytes) -> dict[str, Ints | int]:
    groups = match.groupdict()
    out: dict[str, Ints | int] = {}
    for name in ("year", "month", "day", "day_of_year", "hour", "minute"):
        if groups.get(name):
            out[name] = _integer(cells, *match.span(name))
    if groups.get("year") and len(groups["year"]) == 2:
        year = np.asarray(out["year"])
        out["year"] = np.where(year < 69, 2000 + year, 1900 + year)
    if groups.get("name"):
        out["month"] = _MONTHS.index(groups["name"]) + 1
    if groups.get("second"):
        out["microsecond"] = 1_000_000 * _integer(cells, *match.span("second"))
    if groups.get("fraction"):
        digits = min(len(groups["fraction"]), 6)
        start, _ = match.span("fraction")
        out["microsecond"] = out["microsecond"] + 10 ** (6 - digits) * _integer(cells, start, start + digits)
    if groups.get("half"):
        hour = np.asarray(out["hour"])
        # 0 and 13 o'clock have no half of the day: sent out of range, so that the row is rejected.
        hour = np.where((hour < 1) | (hour > 12), 99, hour % 12)
        out["hour"] = hour + (12 if groups["half"] == "P" else 0)
    if groups.get("zone"):
        out["zoned"] = 1
        if groups["zone"][0] in "+-":
            start, end = match.span("zone")
            hours, minutes = _integer(cells, start + 1, start + 3), _integer(cells, max(end - 2, start + 3), end)
            sign = -1 if groups["zone"][0] == "-" else 1
            out["offset_min"] = sign * (60 * hours + (minutes if end - start > 3 else 0))
    return out


def _integer(cells: Bytes, start: int, end: int) -> Ints:
    value = np.zeros(len(cells), dtype=np.int32)  # nine digits at most
    for place in range(start, end):
        value *= 10
        value += cells[:, place]
        value -= 48
    return value.astype(np.int64)
