"""The tests of the water-level manual that look at one gauge's heights.

Each takes arrays in time order and gives a flag a sample: 1 pass, 2 not evaluated, 3 suspect, 4 fail, 9 missing.

References
----------
.. [1] US Integrated Ocean Observing System, "Manual for Real-Time Quality Control of Water Level Data", version 2.1
   (2021): the tests, their names and examples; flags of Table 3-1 after UNESCO (2013), IOC Manuals and Guides 54,
   volume 3.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from tidekit.records.record import (
    FLAG_FAIL,
    FLAG_GOOD,
    FLAG_MISSING,
    FLAG_NOT_EVALUATED,
    FLAG_SUSPECT,
)

Float = NDArray[np.float64]
Flags = NDArray[np.int8]


def _flags(values: Float, start: int = FLAG_GOOD) -> Flags:
    """A flag a sample: missing where there is no value."""
    return np.where(np.isfinite(values), start, FLAG_MISSING).astype(np.int8)


def _worse(flags: Flags, where: NDArray[np.bool_], flag: int) -> None:
    """Set a flag where it is worse than what stands; missing stays missing."""
    flags[where & (flags != FLAG_MISSING) & (flags < flag)] = flag


def timing_gap(t_h: Float, height_m: Float, *, longest_h: float) -> Flags:
    """Test 1, timing or gap: data that did not come in time are missing.

    Parameters
    ----------
    t_h, height_m : ndarray, shape (n,)
        Times [UTC hours since 2000-01-01 00:00] and heights, NaN where a value is missing [m].
    longest_h : float
        Longest time from one value to the next. [h]

    Returns
    -------
    ndarray of int8, shape (n,)
        9 where the value is missing, or comes after too long a silence and so cannot be judged by what stands before;
        the value itself is there, so in a record such a sample is flagged 2.
    """
    flags = _flags(height_m)
    known = np.flatnonzero(flags == FLAG_GOOD)
    silent = np.diff(t_h[known], prepend=t_h[known[0]] if len(known) else 0.0) > longest_h
    flags[known[silent]] = FLAG_NOT_EVALUATED
    return flags


def syntax(length: NDArray[np.int64], *, expected: int) -> Flags:
    """Test 2, syntax: a message of another length than expected fails; shape (n,)."""
    return np.where(length == expected, FLAG_GOOD, FLAG_FAIL).astype(np.int8)


def location(latitude_deg: Float, longitude_deg: Float, *, displaced_m: Float, most_m: float) -> Flags:
    """Test 3, location: impossible coordinates fail; a gauge displaced by more than `most_m` is suspect; shape (n,)."""
    flags = np.where(displaced_m > most_m, FLAG_SUSPECT, FLAG_GOOD).astype(np.int8)
    impossible = (np.abs(latitude_deg) > 90.0) | (np.abs(longitude_deg) > 180.0)
    flags[impossible | ~np.isfinite(latitude_deg + longitude_deg)] = FLAG_FAIL
    return flags


def gross_range(height_m: Float, *, sensor: tuple[float, float], user: tuple[float, float]) -> Flags:
    """Test 4, gross range: beyond the sensor's span fails, beyond the user's is suspect. Spans are (low, high). [m]"""
    flags = _flags(height_m)
    _worse(flags, (height_m < user[0]) | (height_m > user[1]), FLAG_SUSPECT)
    _worse(flags, (height_m < sensor[0]) | (height_m > sensor[1]), FLAG_FAIL)
    return flags


def climatology(height_m: Float, *, low_m: Float, high_m: Float) -> Flags:
    """Test 5, climatology: outside the season's window is suspect, never fails. Windows of shape (n,) or (). [m]"""
    flags = _flags(height_m)
    _worse(flags, (height_m < low_m) | (height_m > high_m), FLAG_SUSPECT)
    return flags


def spike(height_m: Float, *, low_m: float, high_m: float) -> Flags:
    """Test 6, spike: the distance of a value from the mean of its neighbours, above `low_m` suspect, `high_m` fail.

    The first and the last value, and those beside a missing one, are not evaluated.
    """
    flags = _flags(height_m, FLAG_NOT_EVALUATED)
    distance = np.full(len(height_m), np.nan)
    distance[1:-1] = np.abs(height_m[1:-1] - 0.5 * (height_m[:-2] + height_m[2:]))
    judged = np.isfinite(distance)
    flags[judged] = FLAG_GOOD
    _worse(flags, judged & (distance > low_m), FLAG_SUSPECT)
    _worse(flags, judged & (distance > high_m), FLAG_FAIL)
    return flags


def spike_by_third_difference(height_m: Float, *, low_m: float, high_m: float) -> Flags:
    """Test 6 in its other form, at the newest value: ``|w[n-3] - 3 w[n-2] + 3 w[n-1] - w[n]|``."""
    flags = _flags(height_m, FLAG_NOT_EVALUATED)
    third = np.full(len(height_m), np.nan)
    third[3:] = np.abs(height_m[:-3] - 3 * height_m[1:-2] + 3 * height_m[2:-1] - height_m[3:])
    judged = np.isfinite(third)
    flags[judged] = FLAG_GOOD
    _worse(flags, judged & (third > low_m), FLAG_SUSPECT)
    _worse(flags, judged & (third > high_m), FLAG_FAIL)
    return flags


def rate_of_change(height_m: Float, *, deviations: float, sd_m: Float) -> Flags:
    """Test 7, rate of change: more than so many standard deviations from one value to the next is suspect.

    `sd_m` is the standard deviation over the span before, shape (n,) or () [m]; see `trailing_sd`.
    """
    flags = _flags(height_m, FLAG_NOT_EVALUATED)
    change = np.abs(np.diff(height_m, prepend=np.nan))
    judged = np.isfinite(change) & np.isfinite(sd_m)
    flags[judged] = FLAG_GOOD
    _worse(flags, judged & (change > deviations * sd_m), FLAG_SUSPECT)
    return flags


def trailing_sd(t_h: Float, height_m: Float, *, span_h: float) -> Float:
    """Standard deviation of the values in the span before each sample, itself not counted; shape (n,). [m]"""
    finite = np.isfinite(height_m)
    centred = np.where(finite, height_m - np.nanmean(height_m) if finite.any() else 0.0, 0.0)
    sums = [np.concatenate([[0.0], np.cumsum(series)]) for series in (finite.astype(float), centred, centred**2)]
    start = np.searchsorted(t_h, t_h - span_h, side="left")
    end = np.arange(len(t_h))
    count, total, square = (series[end] - series[start] for series in sums)
    with np.errstate(divide="ignore", invalid="ignore"):
        variance = (square - total**2 / count) / (count - 1)
    return np.where(count > 2, np.sqrt(np.maximum(variance, 0.0)), np.nan)


def flat_line(height_m: Float, *, suspect: int = 3, fail: int = 5, tolerance_m: float = 0.001) -> Flags:
    """Test 8, flat line: so many values in a row within a tolerance of the newest are suspect, or fail.

    The manual's prose counts the values alike, the newest among them; so does this. Its code compares a signed
    difference, which would pass any falling level: the difference here is absolute.
    """
    flags = _flags(height_m)
    alike = np.ones(len(height_m), dtype=np.bool_)
    for back in range(1, fail):
        near = np.zeros(len(height_m), dtype=np.bool_)
        near[back:] = np.abs(height_m[back:] - height_m[:-back]) < tolerance_m
        alike &= near
        if back == suspect - 1:
            _worse(flags, alike, FLAG_SUSPECT)
    _worse(flags, alike, FLAG_FAIL)
    return flags


def multi_variate(
    height_m: Float, other: Float, *, height_sd_m: Float, other_sd: Float, deviations: tuple[float, float] = (2.0, 2.0)
) -> Flags:
    """Test 9, multi-variate: a fast change of level without one of the other variable (wind) is suspect."""
    flags = _flags(height_m, FLAG_NOT_EVALUATED)
    change, other_change = np.abs(np.diff(height_m, prepend=np.nan)), np.abs(np.diff(other, prepend=np.nan))
    judged = np.isfinite(change + other_change + height_sd_m + other_sd)
    flags[judged] = FLAG_GOOD
    alone = (change > deviations[0] * height_sd_m) & (other_change < deviations[1] * other_sd)
    _worse(flags, judged & alone, FLAG_SUSPECT)
    return flags


@dataclass(frozen=True)
class Attenuation:
    """Thresholds of the attenuated-signal test."""

    span_h: float = 12.0
    """Span over which the range is taken. [h]"""
    warn_m: float = 0.5
    """Range below which it is suspect. [m]"""
    fail_m: float = 0.1
    """Range below which it fails. [m]"""


def attenuated_signal(t_h: Float, height_m: Float, limits: Attenuation) -> Flags:
    """Test 10, attenuated signal: too small a range over the span before.

    The first samples, which have no whole span before them, are not evaluated.
    """
    flags = _flags(height_m, FLAG_NOT_EVALUATED)
    series = pd.Series(height_m, index=pd.to_timedelta(np.round(t_h - t_h[0], 9), unit="h"))
    window = series.rolling(pd.Timedelta(hours=limits.span_h), closed="both", min_periods=2)
    ranges = (window.max() - window.min()).to_numpy(dtype=np.float64)
    judged = np.isfinite(ranges) & (t_h - t_h[0] >= limits.span_h) & (flags != FLAG_MISSING)
    flags[judged] = FLAG_GOOD
    _worse(flags, judged & (ranges < limits.warn_m), FLAG_SUSPECT)
    _worse(flags, judged & (ranges < limits.fail_m), FLAG_FAIL)
    return flags


def neighbor(height_m: Float, other_m: Float, *, suspect_m: float = 0.03, fail_m: float = 0.05) -> Flags:
    """Test 11, neighbor or forecast: a difference from a neighbour's or a predicted level above the thresholds."""
    flags = _flags(height_m, FLAG_NOT_EVALUATED)
    apart = np.abs(height_m - other_m)
    judged = np.isfinite(apart)
    flags[judged] = FLAG_GOOD
    _worse(flags, judged & (apart > suspect_m), FLAG_SUSPECT)
    _worse(flags, judged & (apart > fail_m), FLAG_FAIL)
    return flags
