"""Clock slips and drifts inside a record: the tide's timing against itself, day by day.

Where the clock is late by d the record holds the tide of d earlier, so the residual from the whole record's fit is
``-d`` times the rate of the tide. Regression of each day's residual on that rate gives the day's lateness.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from tidekit.harmonic.results import HarmonicFit
from tidekit.prediction.heights import rate_m_per_h
from tidekit.quality.steps import find_steps, red_line

Float = NDArray[np.float64]

_LEAST_SAMPLES = 12
_DRIFT_T = 6.0
"""|t| of a straight line through the days' lateness from which it is a drift."""


@dataclass(frozen=True, eq=False)
class DailyLateness:
    """How late the clock was each day, against the record's own tide."""

    days: NDArray[np.int64]
    """Days since 2000-01-01, shape (d,)."""
    late_min: Float
    """Lateness, NaN where a day has too little tide or too few samples, shape (d,). [minutes]"""


@dataclass(frozen=True)
class Slip:
    """A jump of the clock."""

    day: int
    """First day with the new clock, since 2000-01-01."""
    size_min: float
    """Lateness after less before. [minutes]"""
    sd_min: float
    """Its standard deviation. [minutes]"""


@dataclass(frozen=True)
class Drift:
    """A steady drift of the clock."""

    rate_min_per_day: float
    """Growth of the lateness. [minutes per day]"""
    sd_min_per_day: float
    """Its standard deviation. [minutes per day]"""


def daily_lateness(fit: HarmonicFit) -> DailyLateness:
    """Lateness of the clock day by day.

    Parameters
    ----------
    fit : HarmonicFit
        Analysis of the whole record.

    Returns
    -------
    DailyLateness
        Over the record's days.
    """
    rate = rate_m_per_h(fit.constants, fit.t_h)
    day = np.floor(fit.t_h / 24.0).astype(np.int64)
    first, count = int(day[0]), int(day[-1] - day[0]) + 1

    def by_day(values: Float) -> Float:
        return np.asarray(np.bincount(day - first, weights=values, minlength=count), dtype=np.float64)

    samples = by_day(np.ones_like(rate))
    with np.errstate(divide="ignore", invalid="ignore"):
        rate_mean, residual_mean = by_day(rate) / samples, by_day(fit.residual_m) / samples
        # Regression within the day: the day's own level, which is the weather's, is taken off both.
        power = by_day(rate**2) - samples * rate_mean**2
        late_h = -(by_day(rate * fit.residual_m) - samples * rate_mean * residual_mean) / power
    tide = np.sqrt(np.maximum(power, 0.0) / np.maximum(samples, 1.0))
    weak = (samples < _LEAST_SAMPLES) | (tide < 0.3 * float(np.median(tide)))
    return DailyLateness(np.arange(first, first + count), np.where(weak, np.nan, 60.0 * late_h))


def find_slips(lateness: DailyLateness) -> tuple[Slip, ...]:
    """Find jumps of the clock, in order of date."""
    return tuple(Slip(s.day, s.size_m, s.sd_m) for s in find_steps(lateness.days, lateness.late_min))


def find_drift(lateness: DailyLateness) -> Drift | None:
    """Find a steady drift of the clock; None where the days do not show one."""
    known = np.isfinite(lateness.late_min)
    if known.sum() < 60:
        return None
    rate, sd = red_line(lateness.days[known], lateness.late_min[known])
    return Drift(rate, sd) if abs(rate) > _DRIFT_T * sd else None
