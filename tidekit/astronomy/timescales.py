"""Time scales: UTC hours since 2000, and from UTC to Terrestrial Time.

Inside tidekit a time is a number of UTC hours since 2000-01-01 00:00 in which every day has 24 hours, as in
numpy's datetime64.
"""

from __future__ import annotations

import csv
from functools import cache
from importlib.resources import files

import numpy as np
from numpy.typing import ArrayLike, NDArray

_EPOCH = np.datetime64("2000-01-01T00:00:00", "us")
_MICROSECONDS_PER_HOUR = 3_600_000_000
_TT_MINUS_TAI_S = 32.184
"""IAU 1991 resolution A4, recommendation IV."""

# Espenak and Meeus (2006): years from, origin of t in years, coefficients of TT - UT in seconds.
_DELTA_T = (
    (1600.0, 1820.0, (-20.0, 0.0, 32.0e-4)),
    (1700.0, 1700.0, (8.83, 0.1603, -0.0059285, 0.00013336, -1 / 1174000)),
    (
        1800.0,
        1800.0,
        (13.72, -0.332447, 0.0068612, 0.0041116, -0.00037436, 1.21272e-5, -1.699e-7, 8.75e-10),
    ),
    (1860.0, 1860.0, (7.62, 0.5737, -0.251754, 0.01680668, -0.0004473624, 1 / 233174)),
    (1900.0, 1900.0, (-2.79, 1.494119, -0.0598939, 0.0061966, -0.000197)),
    (1920.0, 1920.0, (21.20, 0.84493, -0.076100, 0.0020936)),
    (1941.0, 1950.0, (29.07, 0.407, -1 / 233, 1 / 2547)),
    (1961.0, 1975.0, (45.45, 1.067, -1 / 260, -1 / 718)),
)


def hours_from_datetime64(times: ArrayLike) -> NDArray[np.float64]:
    """Hours since 2000-01-01 00:00 of datetime64 times taken as UTC.

    Parameters
    ----------
    times : array-like of datetime64, any shape
        Times. [UTC]

    Returns
    -------
    ndarray, the same shape
        Hours, exact to a nanosecond within a century of 2000. [hours]

    Examples
    --------
    >>> hours_from_datetime64(np.array(["2000-01-02T06:00"], dtype="datetime64[m]")).tolist()
    [30.0]
    """
    since = np.asarray(times).astype("datetime64[us]") - _EPOCH
    return np.asarray(since.astype(np.int64) / _MICROSECONDS_PER_HOUR)


def datetime64_from_hours(t_h: ArrayLike) -> NDArray[np.datetime64]:
    """Times of hours since 2000-01-01 00:00, the reverse of `hours_from_datetime64`.

    Parameters
    ----------
    t_h : array-like, any shape
        Hours. [UTC hours since 2000-01-01 00:00]

    Returns
    -------
    ndarray of datetime64[us], the same shape
        Times, to the nearest microsecond. [UTC]
    """
    microseconds = np.rint(np.asarray(t_h, dtype=np.float64) * _MICROSECONDS_PER_HOUR).astype(np.int64)
    return np.asarray(_EPOCH + microseconds.astype("timedelta64[us]"))


@cache
def _leap_seconds() -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Start of each step and TAI - UTC from then on, in hours since 2000 and seconds."""
    text = files("tidekit.astronomy").joinpath("tables/leap_seconds.csv").read_text(encoding="utf-8")
    rows = list(csv.DictReader(text.splitlines()))
    start = np.array([row["from_utc"] for row in rows], dtype="datetime64[us]")
    return hours_from_datetime64(start), np.array([float(row["tai_minus_utc_s"]) for row in rows])


def _delta_t_s(t_h: NDArray[np.float64]) -> NDArray[np.float64]:
    year = 2000.0 + t_h / 8765.82
    result = np.empty_like(year)
    for begin, origin, coefficients in _DELTA_T:
        inside = year >= begin if begin > 1600.0 else np.ones(year.shape, dtype=bool)
        result[inside] = np.polynomial.polynomial.polyval(year[inside] - origin, coefficients)
    return result


def tt_minus_utc_s(t_h: ArrayLike) -> NDArray[np.float64]:
    """Terrestrial Time less UTC.

    Before 1972, when UTC had no leap seconds, UTC is taken as Universal Time and the difference follows
    published polynomials. After the last leap second known it stays as it is until a new one is announced:
    an error of one second there moves the Moon by 0.00015 degrees.

    Parameters
    ----------
    t_h : array-like, any shape
        Times. [UTC hours since 2000-01-01 00:00]

    Returns
    -------
    ndarray, the same shape
        Difference. [seconds]

    References
    ----------
    .. [1] International Earth Rotation Service, Bulletin C: leap seconds 1972 to 2017.
    .. [2] Espenak, F. and Meeus, J., "Five Millennium Canon of Solar Eclipses", NASA/TP-2006-214141 (2006),
       polynomial expressions for Delta T.
    """
    times = np.asarray(t_h, dtype=np.float64)
    start, tai_minus_utc = _leap_seconds()
    step = np.searchsorted(start, times, side="right") - 1
    return np.where(step < 0, _delta_t_s(times), tai_minus_utc[np.maximum(step, 0)] + _TT_MINUS_TAI_S)


def julian_centuries_tt(t_h: ArrayLike) -> NDArray[np.float64]:
    """Julian centuries of Terrestrial Time since J2000.0 (2000-01-01 12:00 TT).

    Parameters
    ----------
    t_h : array-like, any shape
        Times. [UTC hours since 2000-01-01 00:00]

    Returns
    -------
    ndarray, the same shape
        Centuries of 36525 days.
    """
    times = np.asarray(t_h, dtype=np.float64)
    return np.asarray((times - 12.0 + tt_minus_utc_s(times) / 3600.0) / (36525.0 * 24.0))
