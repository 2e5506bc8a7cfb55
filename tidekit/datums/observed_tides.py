"""High and low waters of an observed series: vertices of local parabolas through noisy samples."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.interpolate import CubicSpline
from scipy.signal import savgol_coeffs

from tidekit.errors import AnalysisError
from tidekit.prediction.picking import pick_tides
from tidekit.prediction.turning_points import TurningPoints

_Array = NDArray[np.float64]

HALF_WINDOW_H = 1.0
"""Reach of the parabola on either side. On M2 its least-squares vertex is low by 3/35 (omega w)^4 / 24 = 2e-4 of
the amplitude; the noise of 6-minute samples falls to a third. [h]"""
SPLINE_ACROSS_H = 1.0
"""Longest hole between samples that a cubic spline bridges; M2 is right there to 1e-3 of its amplitude. [h]"""
COARSEST_STEP_H = 1.0
"""With samples farther apart high waters are guesses. [h]"""
_OFF_GRID_PART = 0.1
"""Samples farther than this part of a step from the grid are not taken for regular."""


@dataclass(frozen=True, eq=False, kw_only=True)
class ObservedTides:
    """What an observed series shows of its tides."""

    points: TurningPoints
    """High and low waters that count as tides."""
    grid_h: _Array
    """Regular times from the first sample to the last, shape (n,). [UTC hours since 2000-01-01 00:00]"""
    height_m: _Array
    """Heights at them, short holes bridged, NaN in the long ones, shape (n,). [m]"""
    searched: NDArray[np.bool_]
    """Where the series is whole enough to see a turning point, shape (n,)."""


def observed_tides(t_h: ArrayLike, height_m: ArrayLike, step_h: float) -> ObservedTides:
    """Find the high and low waters of an observed series.

    Parameters
    ----------
    t_h : array-like, shape (m,)
        Times, increasing; holes are times that are lacking. [UTC hours since 2000-01-01 00:00]
    height_m : array-like, shape (m,)
        Observed heights. [m]
    step_h : float
        Sampling step, at most `COARSEST_STEP_H`. [h]

    Returns
    -------
    ObservedTides
        Its points never lie in a hole; across one, two highs may follow each other.

    Raises
    ------
    AnalysisError
        If the step is too coarse, the times are not regular, or there are too few samples.

    Notes
    -----
    A parabola is fitted by least squares to the samples within `HALF_WINDOW_H` of each grid time (of three
    hourly samples it is the one through them). The slopes of neighbouring parabolas bracket a turning point; its
    time is where the line between the two slopes crosses zero and its height the mean of the two parabolas
    there. Then the trade's picking rule sorts out the wiggles.

    References
    ----------
    .. [1] Savitzky, A. and Golay, M. J. E., "Smoothing and differentiation of data by simplified least squares
       procedures", Analytical Chemistry 36 (1964) 1627-1639. doi:10.1021/ac60214a047
    """
    grid, height = _regular(np.asarray(t_h, dtype=np.float64), np.asarray(height_m, dtype=np.float64), step_h)
    half = max(1, round(HALF_WINDOW_H / step_h))
    level, slope, curvature = (_parabola(height, half, step_h, order) for order in (0, 1, 2))
    searched = np.isfinite(level)
    before = np.flatnonzero((slope[:-1] >= 0.0) != (slope[1:] >= 0.0))
    before = before[searched[before] & searched[before + 1]]
    after = before + 1
    part = slope[before] / (slope[before] - slope[after])
    on, back = part * step_h, (part - 1.0) * step_h
    earlier = level[before] + slope[before] * on + 0.5 * curvature[before] * on**2
    later = level[after] + slope[after] * back + 0.5 * curvature[after] * back**2
    points = TurningPoints(t_h=grid[before] + on, height_m=0.5 * (earlier + later), is_high=slope[before] >= 0.0)
    run = np.cumsum(~searched)[before]
    return ObservedTides(points=_pick_by_run(points, run), grid_h=grid, height_m=height, searched=searched)


def _pick_by_run(points: TurningPoints, run: NDArray[np.int64]) -> TurningPoints:
    """Apply the picking rule within each run of samples without a hole."""
    picked = [pick_tides(points.where(run == number)) for number in np.unique(run)]
    empty = points.where(np.zeros(len(points), dtype=np.bool_))
    parts = picked or [empty]
    return TurningPoints(
        t_h=np.concatenate([part.t_h for part in parts]),
        height_m=np.concatenate([part.height_m for part in parts]),
        is_high=np.concatenate([part.is_high for part in parts]),
    )


def _regular(t_h: _Array, height_m: _Array, step_h: float) -> tuple[_Array, _Array]:
    """Grid and heights on it: short holes bridged, NaN in the others."""
    if not step_h <= COARSEST_STEP_H * 1.001:
        message = f"one sample every {step_h:g} h; high and low waters need one every {COARSEST_STEP_H:g} h or closer"
        raise AnalysisError(message)
    place = np.rint((t_h - t_h[0]) / step_h).astype(np.intp)
    strays = np.abs(t_h - t_h[0] - place * step_h) > _OFF_GRID_PART * step_h
    strays[1:] |= np.diff(place) < 1
    if np.any(strays):
        message = (
            f"{int(strays.sum())} of {len(t_h)} times do not lie on a regular grid of {step_h * 60:g} min; "
            "high and low waters are sought in regular records only"
        )
        raise AnalysisError(message)
    grid = t_h[0] + step_h * np.arange(place[-1] + 1)
    height = np.full(len(grid), np.nan)
    height[place] = height_m
    lacking = np.flatnonzero(np.isnan(height))
    if len(lacking) and len(t_h) > 3:
        follower = np.searchsorted(place, lacking)
        hole_h = t_h[follower] - t_h[follower - 1]
        short = lacking[hole_h <= SPLINE_ACROSS_H * 1.001]
        height[short] = CubicSpline(t_h, height_m)(grid[short])
    return grid, height


def _parabola(height: _Array, half: int, step_h: float, order: int) -> _Array:
    """Value, slope or curvature of the local parabola at each grid time; NaN where its window has a hole."""
    weights = savgol_coeffs(2 * half + 1, 2, deriv=order, delta=step_h)
    result = np.full(len(height), np.nan)
    if len(height) > 2 * half:
        result[half:-half] = np.convolve(height, weights, mode="valid")
    return result
