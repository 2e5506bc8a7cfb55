"""Periods, time zones and steps on the command line, and the constants that a prediction is made from."""

from __future__ import annotations

import argparse
import re
from datetime import UTC, datetime, tzinfo
from pathlib import Path

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from tidekit.astronomy.timescales import datetime64_from_hours
from tidekit.cli.main import CAUTION
from tidekit.constituents.constants import HarmonicConstants
from tidekit.constituents.constants_table import read_constants
from tidekit.errors import InputError, RecordError
from tidekit.records.zones import zone_named

_TIME = re.compile(r"\d{4}-\d{2}-\d{2}(?:[T ]\d{2}:\d{2}(?::\d{2})?(?:Z|[+-]\d{2}:\d{2})?)?")
_STEP = re.compile(r"(\d+(?:\.\d+)?) ?(s|min|h)")
_STEP_UNITS_H = {"s": 1 / 3600, "min": 1 / 60, "h": 1.0}
_EPOCH = datetime(2000, 1, 1, tzinfo=UTC)


def add_prediction_options(parser: argparse.ArgumentParser) -> None:
    """Add what every prediction over a period asks for."""
    parser.add_argument("constants", metavar="CONSTANTS", type=Path, help="table of harmonic constants (CSV)")
    parser.add_argument("--gauge", metavar="ID", help="whose rows, where the table has several gauges")
    parser.add_argument("--start", metavar="TIME", required=True, help="2031-04-05 or 2031-04-05T13:20, included")
    parser.add_argument("--end", metavar="TIME", required=True, help="likewise, not included")
    parser.add_argument(
        "--time-zone",
        metavar="ZONE",
        default="UTC",
        help="of the times given and printed: UTC, UTC-8, Pacific/Auckland ... (default: %(default)s)",
    )
    parser.add_argument(
        "--nodal",
        choices=("exact", "mid_year"),
        help="convention the constants were made with (default: as the table says, else mid_year)",
    )


def constants_of(options: argparse.Namespace) -> HarmonicConstants:
    """Read the constants that the options name.

    Raises
    ------
    InputError
        If the table cannot be read.
    """
    return read_constants(options.constants, gauge=options.gauge, nodal=options.nodal)


def zone_of(name: str) -> tzinfo:
    """Find a time zone by the names that exports may declare.

    Raises
    ------
    InputError
        If no zone, or more than one, has that name.
    """
    try:
        return zone_named(name)
    except RecordError as error:
        raise InputError(str(error), key="--time-zone") from error


def period_of(options: argparse.Namespace) -> tuple[float, float]:
    """Start and end of the period that the options name. [UTC hours since 2000-01-01 00:00]

    Raises
    ------
    InputError
        If a time is not understood, happens twice or never, or the end is not after the start.
    """
    zone = zone_of(options.time_zone)
    start = parse_time_h(options.start, zone, key="--start")
    end = parse_time_h(options.end, zone, key="--end")
    if end <= start:
        message = f"{options.end} is not after --start {options.start}; the end is not included"
        raise InputError(message, key="--end")
    return start, end


def parse_time_h(text: str, zone: tzinfo, *, key: str) -> float:
    """Read a time; a date alone is the start of that day.

    Parameters
    ----------
    text : str
        ``2031-04-05``, ``2031-04-05T13:20``, with seconds or with an offset (``Z``, ``+12:00``) if need be.
    zone : tzinfo
        Zone of a time without an offset.
    key : str
        The option, for messages.

    Returns
    -------
    float
        [UTC hours since 2000-01-01 00:00]

    Raises
    ------
    InputError
        If it is not such a time, or happens twice or never in the zone.
    """
    when = _datetime_of(text, key)
    if when.tzinfo is None:
        earlier, later = (when.replace(tzinfo=zone, fold=fold) for fold in (0, 1))
        if earlier.utcoffset() != later.utcoffset():
            exists = earlier.astimezone(UTC).astimezone(zone).replace(tzinfo=None) == when
            what = "happens twice" if exists else "does not exist"
            choices = " or ".join(time.isoformat(timespec="minutes") for time in (earlier, later))
            message = f"{text} {what} in {zone}, where clocks change then; write {choices}"
            raise InputError(message, key=key)
        when = earlier
    return (when - _EPOCH).total_seconds() / 3600.0


def _datetime_of(text: str, key: str) -> datetime:
    try:
        if _TIME.fullmatch(text):
            return datetime.fromisoformat(text)
    except ValueError:
        pass  # right in form, yet no date of the calendar: the same message serves
    message = f"{text!r} is no time; write 2031-04-05 or 2031-04-05T13:20"
    raise InputError(message, key=key)


def parse_step_h(text: str) -> float:
    """Read a sampling step such as ``6min``.

    Returns
    -------
    float
        [h]

    Raises
    ------
    InputError
        If it is no positive number of s, min or h.
    """
    found = _STEP.fullmatch(text)
    step = float(found[1]) * _STEP_UNITS_H[found[2]] if found else 0.0
    if step <= 0.0:
        message = f"{text!r} is no step; write a number and s, min or h, such as 6min"
        raise InputError(message, key="--step")
    return step


def local_times(t_h: NDArray[np.float64], zone: tzinfo) -> pd.DatetimeIndex:
    """Times in a zone, to the millisecond."""
    utc = pd.DatetimeIndex(datetime64_from_hours(t_h)).round("ms").tz_localize("UTC")
    return utc.tz_convert(zone)


def iso_times(times: pd.DatetimeIndex) -> list[str]:
    """Write times as ISO 8601 with their offsets from UTC, to the second, or finer where one needs it."""
    wall = times.tz_localize(None).to_numpy().astype("datetime64[ms]")
    offset_min = (wall - times.tz_convert("UTC").tz_localize(None).to_numpy()) // np.timedelta64(1, "m")
    whole = np.all(wall == wall.astype("datetime64[s]"))
    text = np.datetime_as_string(wall, unit="s" if whole else "ms")
    kinds, kind = np.unique(offset_min.astype(np.int64), return_inverse=True)
    suffix = [f"{'-' if m < 0 else '+'}{abs(m) // 60:02d}:{abs(m) % 60:02d}" for m in kinds.tolist()]
    return [stamp + suffix[index] for stamp, index in zip(text.tolist(), kind.tolist(), strict=True)]


def heading(what: str, constants: HarmonicConstants, zone_name: str) -> str:
    """One line on what a printed prediction shows."""
    above = constants.vertical_reference or "the table's zero"
    return f"{what}, metres above {above}, times in {zone_name}, nodal convention {constants.nodal}"


def prediction_document(constants: HarmonicConstants, options: argparse.Namespace) -> dict[str, object]:
    """What the JSON of every prediction says of its constants."""
    return {
        "constants": options.constants,
        "gauge": options.gauge,
        "vertical_reference": constants.vertical_reference,
        "time_zone": options.time_zone,
        "nodal": constants.nodal,
        "caution": CAUTION,
    }
