"""Time zones of exports: declared, written in a header, or carried by each time; from local time to UTC."""

from __future__ import annotations

import re
from datetime import UTC, timedelta, timezone, tzinfo
from zoneinfo import ZoneInfo, ZoneInfoNotFoundError

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from tidekit.errors import RecordError

Times64 = NDArray[np.datetime64]

_FIXED_H = {
    "UTC": 0.0,
    "GMT": 0.0,
    "UT": 0.0,
    "Z": 0.0,
    "PST": -8.0,
    "MST": -7.0,
    "EST": -5.0,
    "AST": -4.0,
    "NST": -3.5,
    "AKST": -9.0,
    "HST": -10.0,
    "WET": 0.0,
    "CET": 1.0,
    "MEZ": 1.0,
    "EET": 2.0,
    "JST": 9.0,
    "AWST": 8.0,
    "ACST": 9.5,
    "AEST": 10.0,
    "NZST": 12.0,
}
"""Abbreviations of standard time that mean one offset; common practice, no source."""
_DOUBTFUL = "CST CDT EDT MDT PDT ADT IST BST SST LST LDT LT LOCAL CEST MESZ EEST AEDT NZDT"
SEVERAL = frozenset(_DOUBTFUL.split())
"""Abbreviations that mean several zones, or a clock that only part of the year shows."""
_OFFSET = re.compile(r"(?:UTC|GMT)\s*([+-])\s*(\d{1,2})(?::?(\d{2}))?(?!\d)", re.IGNORECASE)
_BARE_OFFSET = re.compile(r"^([+-])(\d{1,2})(?::?(\d{2}))?$")


def zone_named(text: str) -> tzinfo:
    """Find the zone that a declaration names.

    Parameters
    ----------
    text : str
        ``UTC``, an offset (``UTC-8``, ``+09:30``), a standard-time abbreviation, or a name of the IANA database.

    Returns
    -------
    tzinfo
        A fixed offset, or a zone with its history of daylight saving.

    Raises
    ------
    RecordError
        If no zone, or more than one, has that name.
    """
    stripped = text.strip()
    match = _OFFSET.search(stripped) or _BARE_OFFSET.match(stripped)
    if match:
        return _fixed(match)
    if stripped.upper() in _FIXED_H:
        return timezone(timedelta(hours=_FIXED_H[stripped.upper()])) if _FIXED_H[stripped.upper()] else UTC
    if stripped.upper() not in SEVERAL:
        try:
            return ZoneInfo(stripped)
        except (ZoneInfoNotFoundError, ValueError, OSError):
            pass
    message = (
        f"time zone {text!r} is not one zone; write UTC, an offset such as UTC-8 or +09:30, "
        "or a name such as Pacific/Auckland"
    )
    raise RecordError(message)


def _fixed(match: re.Match[str]) -> tzinfo:
    sign, hours, minutes = match.groups()
    offset = timedelta(hours=int(hours), minutes=int(minutes or 0))
    if offset > timedelta(hours=15):
        message = f"an offset of {hours} hours is no time zone; wanted at most 15"
        raise RecordError(message)
    return timezone(-offset if sign == "-" else offset)


def zone_in(text: str) -> str | None:
    """Find a zone written in a header line, as text for `zone_named`, or None.

    Examples
    --------
    >>> zone_in("timezone: LST (UTC-8, no daylight saving)"), zone_in("Time_Zone,PST"), zone_in("Time: PST,Water")
    ('UTC-8', 'PST', 'PST')
    """
    match = _OFFSET.search(text)
    if match:
        return match[0].replace(" ", "")
    for word in re.split(r"[^A-Za-z/_]+", text):
        if word.upper() in _FIXED_H and (len(word) > 1) and word.isupper():
            return word
        if re.fullmatch(r"[A-Z][A-Za-z]+/[A-Z][A-Za-z_]+", word):
            return word
    if re.search(r"(?:^|_)(utc|gmt)(?:$|_)", text.strip().lower()):
        return "UTC"
    return None


def to_utc(local: Times64, zone: tzinfo) -> tuple[Times64, NDArray[np.bool_]]:
    """Turn local times into UTC.

    Parameters
    ----------
    local : ndarray of datetime64[us], shape (n,), in the order of the file
        Local clock times; NaT passes through.
    zone : tzinfo
        Zone of the clock.

    Returns
    -------
    utc : ndarray of datetime64[us], shape (n,)
        UTC; NaT where the clock cannot tell.
    doubtful : ndarray of bool, shape (n,)
        Hours that the clock shows twice and the sequence of rows does not settle, or never shows.
    """
    if isinstance(zone, timezone):
        return local - np.timedelta64(zone.utcoffset(None), "us"), np.zeros(len(local), dtype=np.bool_)
    known = np.flatnonzero(~np.isnat(local))
    index = pd.DatetimeIndex(local[known])
    aware = index.tz_localize(zone, ambiguous="NaT", nonexistent="NaT")
    utc = local.copy()
    utc[known] = aware.tz_convert("UTC").tz_localize(None).to_numpy().astype("datetime64[us]")
    open_rows = np.flatnonzero(np.asarray(aware.isna()))
    for run in np.split(open_rows, np.flatnonzero(np.diff(open_rows) > 1) + 1):
        if len(run):
            utc[known[run]] = _both_passes(index[run[0] : run[-1] + 1], zone)
    doubtful = np.zeros(len(local), dtype=np.bool_)
    doubtful[known] = np.isnat(utc[known])
    return utc, doubtful


def _both_passes(run: pd.DatetimeIndex, zone: tzinfo) -> Times64:
    """Rows of a repeated hour: settled where the clock is seen to go back once; NaT elsewhere."""
    back = np.flatnonzero(np.diff(run.to_numpy()) <= np.timedelta64(0))
    first_pass = np.arange(len(run)) <= (back[0] if len(back) == 1 else -1)
    settled = run.tz_localize(zone, ambiguous=first_pass, nonexistent="NaT")
    if len(back) != 1:
        settled = run.tz_localize(zone, ambiguous="NaT", nonexistent="NaT")
    return np.asarray(settled.tz_convert("UTC").tz_localize(None).to_numpy().astype("datetime64[us]"))
