"""Screen a record: the manual's tests with thresholds of the gauge's own, then what the tide itself shows.

Spikes, rates and neighbours are judged on the non-tidal residual, where a tide's own rise is no rate and its turn no
spike; ranges and flat spells on the heights.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from tidekit.astronomy.timescales import hours_from_datetime64
from tidekit.errors import AnalysisError
from tidekit.harmonic.analysis import analyse
from tidekit.harmonic.results import HarmonicFit
from tidekit.quality.level_tests import (
    Attenuation,
    attenuated_signal,
    flat_line,
    gross_range,
    rate_of_change,
    spike,
    timing_gap,
    trailing_sd,
)
from tidekit.records.record import FLAG_FAIL, FLAG_GOOD, FLAG_MISSING, FLAG_SUSPECT, GaugeRecord

Float = NDArray[np.float64]
Flags = NDArray[np.int8]

_ROUNDS = 3
"""Fits in turn, each without what the one before showed to be gross."""


@dataclass(frozen=True, kw_only=True)
class Thresholds:
    """Thresholds of one gauge; `derive_thresholds` makes them from its own tide and noise."""

    longest_gap_h: float
    """Timing or gap: longest time between values. [h]"""
    sensor_m: tuple[float, float]
    """Gross range: span beyond which a height fails. [m]"""
    user_m: tuple[float, float]
    """Gross range: span beyond which it is suspect. [m]"""
    spike_low_m: float
    """Spike: distance from the neighbours' mean that is suspect, on the residual. [m]"""
    spike_high_m: float
    """Spike: distance that fails. [m]"""
    rate_deviations: float
    """Rate of change: standard deviations a step, on the residual."""
    flat_tolerance_m: float
    """Flat line: values this close are alike. [m]"""
    flat_suspect: int
    """Flat line: values in a row that are suspect."""
    flat_fail: int
    """Flat line: values in a row that fail."""
    attenuated_warn_m: float
    """Attenuated signal: range over the span that is suspect. [m]"""
    attenuated_fail_m: float
    """Attenuated signal: range that fails. [m]"""
    attenuated_span_h: float
    """Attenuated signal: the span, a lunar day. [h]"""


@dataclass(frozen=True, eq=False, kw_only=True)
class Screening:
    """Flags of a record and what raised them."""

    record: GaugeRecord
    """The record as read."""
    flags: Flags
    """Worst flag of each sample, shape (n,)."""
    by_test: Mapping[str, Flags]
    """Flags of each test, by its name in the manual."""
    thresholds: Thresholds
    """What was asked of this gauge."""
    residual_m: Float
    """Non-tidal residual, NaN where there is no height, shape (n,). [m]"""
    reviewed: Mapping[int, str] = field(default_factory=dict)
    """Samples whose flag a reviewer set, and why."""

    def raised_by(self) -> list[str]:
        """Tests that raised each sample's flag, joined by `+`; empty for good samples."""
        names = np.full(len(self.flags), "", dtype=object)
        for test, flags in self.by_test.items():
            hit = (flags == self.flags) & np.isin(self.flags, (FLAG_SUSPECT, FLAG_FAIL))
            names[hit] = [f"{name}+{test}" if name else test for name in names[hit]]
        for sample in self.reviewed:
            names[sample] = "review"
        return [str(name) for name in names]

    def to_frame(self) -> pd.DataFrame:
        """One row a sample: time, height, flag, what raised it, residual."""
        return pd.DataFrame(
            {
                "time_utc": pd.DatetimeIndex(self.record.heights.index).strftime("%Y-%m-%dT%H:%M:%SZ"),
                "height_m": self.record.heights.to_numpy(),
                "flag": self.flags,
                "raised_by": self.raised_by(),
                "residual_m": np.round(self.residual_m, 4),
            }
        )

    def screened(self) -> GaugeRecord:
        """The record with these flags; failed samples no longer enter an analysis."""
        return replace(self.record, flags=pd.Series(self.flags, index=self.record.heights.index, name="flag"))


def screen(record: GaugeRecord, *, thresholds: Thresholds | None = None) -> Screening:
    """Screen a record.

    Parameters
    ----------
    record : GaugeRecord
        As read.
    thresholds : Thresholds, optional
        By default derived from the record's own tide and noise.

    Returns
    -------
    Screening
        A flag a sample, and which tests raised it.

    Raises
    ------
    AnalysisError
        If the record is too short for a tide.
    """
    t_h = hours_from_datetime64(pd.DatetimeIndex(record.heights.index).tz_localize(None).to_numpy())
    height_m = record.heights.to_numpy(dtype=np.float64)
    fit = robust_tide(t_h, height_m)
    residual = height_m - fit.predict(t_h)
    chosen = thresholds or derive_thresholds(t_h, height_m, residual, fit)
    by_test = _run(t_h, height_m, residual, chosen)
    flags = np.full(len(t_h), FLAG_GOOD, dtype=np.int8)
    for result in by_test.values():
        judged = np.isin(result, (FLAG_SUSPECT, FLAG_FAIL, FLAG_MISSING))
        flags[judged] = np.maximum(flags[judged], result[judged])
    return Screening(record=record, flags=flags, by_test=by_test, thresholds=chosen, residual_m=residual)


def _run(t_h: Float, height_m: Float, residual: Float, limits: Thresholds) -> dict[str, Flags]:
    """Run the tests that a single gauge's heights allow, by the manual's names."""
    # Neighbours in the array must be neighbours in time for a spike or a rate: beyond a gap they are unknown.
    apart = np.diff(t_h, prepend=t_h[0]) > limits.longest_gap_h
    gap_at = np.flatnonzero(apart)
    spaced_t = np.insert(t_h, gap_at, t_h[gap_at] - 1e-6)
    spaced = np.insert(residual, gap_at, np.nan)
    real = np.ones(len(spaced), dtype=np.bool_)
    real[gap_at + np.arange(len(gap_at))] = False
    sd = trailing_sd(spaced_t, np.diff(spaced, prepend=np.nan), span_h=25.0)
    span = Attenuation(limits.attenuated_span_h, limits.attenuated_warn_m, limits.attenuated_fail_m)
    return {
        "timing_gap": timing_gap(t_h, height_m, longest_h=limits.longest_gap_h),
        "gross_range": gross_range(height_m, sensor=limits.sensor_m, user=limits.user_m),
        "spike": spike(spaced, low_m=limits.spike_low_m, high_m=limits.spike_high_m)[real],
        "rate_of_change": rate_of_change(spaced, deviations=limits.rate_deviations, sd_m=sd)[real],
        "flat_line": flat_line(
            height_m, suspect=limits.flat_suspect, fail=limits.flat_fail, tolerance_m=limits.flat_tolerance_m
        ),
        "attenuated_signal": attenuated_signal(t_h, height_m, span),
    }


def robust_tide(t_h: Float, height_m: Float) -> HarmonicFit:
    """Fit the tide without gross errors: each round leaves out residuals beyond six robust standard deviations.

    Raises
    ------
    AnalysisError
        If the record is too short for a tide.
    """
    keep = np.isfinite(height_m)
    # The first cut needs no fit: heights far outside the bulk would bend it.
    low, high = np.percentile(height_m[keep], [0.5, 99.5]) if keep.any() else (0.0, 0.0)
    keep &= (height_m > low - (high - low)) & (height_m < high + (high - low))
    for _ in range(_ROUNDS):
        fit = analyse(t_h[keep], height_m[keep])
        residual = np.where(np.isfinite(height_m), height_m - fit.predict(t_h), np.inf)
        scale = 1.4826 * float(np.median(np.abs(residual[keep])))
        kept = np.abs(residual) < 6.0 * max(scale, 1e-4)
        if np.array_equal(kept, keep):
            break
        keep = kept
    if not keep.any():
        message = "no height of this record fits a tide; check unit and column"
        raise AnalysisError(message)
    return fit


def derive_thresholds(t_h: Float, height_m: Float, residual: Float, fit: HarmonicFit) -> Thresholds:
    """Thresholds from a gauge's own tide and noise.

    The user's span is the range of the fitted tide and six standard deviations of weather, the sensor's half as much
    again. A spike is suspect at six robust standard deviations of the residual's own second difference and fails at
    twelve, but never below the rounding or 5 and 10 cm. A flat spell counts values alike in the last digit.
    """
    finite = np.isfinite(residual)
    tide = (height_m - residual)[finite]
    weather = 1.4826 * float(np.median(np.abs(residual[finite])))
    middle, half = 0.5 * float(tide.max() + tide.min()), 0.5 * float(np.ptp(tide)) + 6.0 * weather
    step_h = float(np.median(np.diff(t_h)))
    second = np.abs(residual[1:-1] - 0.5 * (residual[:-2] + residual[2:]))
    jitter = 1.4826 * float(np.nanmedian(second))
    digits = np.unique(np.round(np.abs(np.diff(height_m[np.isfinite(height_m)])), 6))
    rounding = float(digits[digits > 1e-6].min(initial=1.0)) if len(digits) > 1 else 0.001
    in_a_row = max(int(np.ceil(1.5 / step_h)), 5) if step_h < 0.5 else 5
    lunar_day = 24.84
    ranges = _least_daily_range(fit, lunar_day)
    return Thresholds(
        longest_gap_h=1.5 * step_h,
        sensor_m=(middle - 1.5 * half, middle + 1.5 * half),
        user_m=(middle - half, middle + half),
        spike_low_m=max(6.0 * jitter, 0.05, 3.0 * rounding),
        spike_high_m=max(12.0 * jitter, 0.10, 6.0 * rounding),
        rate_deviations=6.0,
        flat_tolerance_m=0.5 * min(rounding, 0.01),
        flat_suspect=max(in_a_row - 1, 4),
        flat_fail=in_a_row,
        attenuated_warn_m=0.5 * ranges,
        attenuated_fail_m=0.15 * ranges,
        attenuated_span_h=lunar_day,
    )


def _least_daily_range(fit: HarmonicFit, span_h: float) -> float:
    """Smallest range of the fitted tide in a lunar day, the first percentile over the record. [m]"""
    t_h = np.arange(fit.t_h[0], min(fit.t_h[-1], fit.t_h[0] + 24.0 * 60), 0.5)
    height = fit.predict(t_h)
    width = int(span_h / 0.5)
    if len(height) <= width:
        return float(np.ptp(height))
    windows = np.lib.stride_tricks.sliding_window_view(height, width)
    return float(np.percentile(np.ptp(windows, axis=1), 1.0))
