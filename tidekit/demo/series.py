"""A year at each gauge: tide, weather, instrument noise, gaps and the fault."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import scipy.signal
from numpy.typing import NDArray

from tidekit.astronomy.timescales import hours_from_datetime64
from tidekit.demo.coast import GAUGES, DemoGauge, true_constants
from tidekit.prediction.heights import predict_heights

Float = NDArray[np.float64]

START, END = np.datetime64("2021-01-01T00", "h"), np.datetime64("2022-01-01T00", "h")
WEATHER_SPEED_M_PER_S = 9.0
"""The weather's level travels along the coast as a slow shelf wave. [m/s]"""
STEP_AT = np.datetime64("2021-07-19T08", "h")


@dataclass(frozen=True, eq=False)
class DemoSeries:
    """What a gauge's logger wrote: clock times and heights, NaN where it wrote a missing mark."""

    clock: NDArray[np.datetime64]
    height_m: Float


def make_series(seed: int) -> dict[str, DemoSeries]:
    """Make the year at every gauge, by id; the same seed gives the same numbers.

    Parameters
    ----------
    seed : int
        Seed of the random generator.

    Returns
    -------
    dict of str to DemoSeries
        In the order of `GAUGES`.
    """
    random = np.random.default_rng(seed)
    clock = np.arange(START, END)
    t_h = hours_from_datetime64(clock)
    # Ten days of run-up serve the delays of the weather.
    weather = _red(random, len(t_h) + 480, memory_h=70.0, sd=0.085)
    return {gauge.id: _one(random, gauge, clock, t_h, weather) for gauge in GAUGES}


def _one(
    random: np.random.Generator, gauge: DemoGauge, clock: NDArray[np.datetime64], t_h: Float, weather: Float
) -> DemoSeries:
    true_h = t_h - gauge.clock_min / 60.0 - gauge.zone_h
    constants = true_constants(gauge)
    height = predict_heights(constants, true_h)
    # Cusps: the tide's own small wandering, by an internal tide that comes and goes over weeks.
    wander = _red(random, len(t_h), memory_h=350.0, sd=0.006)
    height += wander * (height - gauge.mean_m)
    delay = gauge.along_km / (WEATHER_SPEED_M_PER_S * 3.6)
    passing = np.interp(true_h - t_h[0] - delay, np.arange(-480, len(t_h)), weather)
    # The weather's shelf wave is held to the coast far more tightly than the tide.
    height += passing * np.exp(-gauge.offshore_km / 80.0)
    height += _red(random, len(t_h), memory_h=18.0, sd=0.018)
    height += random.normal(0.0, 0.006, len(t_h))
    height += gauge.step_m * (clock >= STEP_AT)
    height *= gauge.scale
    keep = np.ones(len(t_h), dtype=bool)
    for hours in (int(random.integers(30, 110)), *random.integers(2, 30, 4)):
        start = int(random.integers(24, len(t_h) - 200))
        keep[start : start + int(hours)] = False
    height[random.integers(0, len(t_h), 12)] = np.nan
    return DemoSeries(clock[keep], height[keep])


def _red(random: np.random.Generator, count: int, *, memory_h: float, sd: float) -> Float:
    """First-order autoregressive noise of a memory and a standard deviation, stationary from its first value."""
    keep = float(np.exp(-1.0 / memory_h))
    shocks = random.normal(0.0, sd * np.sqrt(1.0 - keep**2), count)
    shocks[0] = random.normal(0.0, sd)
    return np.asarray(scipy.signal.lfilter([1.0], [1.0, -keep], shocks), dtype=np.float64)


def gauge_truth(gauge: DemoGauge) -> list[tuple[str, float]]:
    """Kind and size of each injected fault, as a finding states them."""
    sizes = {
        "clock_offset": gauge.clock_min,
        "time_zone": gauge.zone_h,
        "unit_scale": gauge.scale if gauge.scale != 1.0 else 0.0,
        "datum_step": gauge.step_m,
    }
    return [(kind, size) for kind, size in sizes.items() if size]
