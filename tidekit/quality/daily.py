"""Daily levels of the non-tidal residual, freed from the weather that neighbours share."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Float = NDArray[np.float64]

_LEAST_SHARE = 0.5
"""Part of a day's samples that a daily mean needs."""
_LEAST_COMMON_DAYS = 30
_NEIGHBOURS = 4
"""Neighbours compared with: an even few, so that a gauge amid the coast has as many before it as behind."""


@dataclass(frozen=True, eq=False)
class DailyLevels:
    """Daily means of residuals of g gauges on d common days."""

    days: NDArray[np.int64]
    """Days since 2000-01-01, shape (d,)."""
    level_m: Float
    """Mean residual, NaN where a day has too few samples, shape (g, d). [m]"""


def daily_levels(t_h: Sequence[Float], residual_m: Sequence[Float]) -> DailyLevels:
    """Average residuals by day.

    Parameters
    ----------
    t_h, residual_m : sequences of ndarray, one a gauge
        Times [UTC hours since 2000-01-01 00:00] and residuals [m].

    Returns
    -------
    DailyLevels
        Over all days that any gauge has.
    """
    day_of = [np.floor(times / 24.0).astype(np.int64) for times in t_h]
    first, last = min(days.min() for days in day_of), max(days.max() for days in day_of)
    levels = np.full((len(t_h), last - first + 1), np.nan)
    for row, (times, days, values) in enumerate(zip(t_h, day_of, residual_m, strict=True)):
        count = np.bincount(days - first, minlength=levels.shape[1])
        sums = np.bincount(days - first, weights=values, minlength=levels.shape[1])
        a_day = 24.0 / max(float(np.median(np.diff(times))), 1e-9)
        full = count >= max(_LEAST_SHARE * a_day, 1.0)
        levels[row, full] = sums[full] / count[full]
    return DailyLevels(np.arange(first, last + 1), levels)


def against_neighbours(levels: DailyLevels, gauge: int) -> Float:
    """Daily level of a gauge less what its neighbours agree on, shape (d,). [m]

    Neighbours are the few gauges whose day-to-day changes are most like this one's, wherever they stand. Each is
    scaled by regression to look like the gauge (another exposure, or a unit mistake), and the day's median over them
    is taken off: one faulty neighbour moves a median little. Without neighbours the level stays as it is.
    """
    own = levels.level_m[gauge]
    alike: list[tuple[float, Float]] = []
    for other in np.delete(levels.level_m, gauge, axis=0):
        # Differences from day to day see the weather and not a step, which would bias the slope.
        mine, theirs = np.diff(own), np.diff(other)
        both = np.isfinite(mine) & np.isfinite(theirs)
        if both.sum() >= _LEAST_COMMON_DAYS and np.any(theirs[both]) and np.any(mine[both]):
            product = float(mine[both] @ theirs[both])
            power = float(theirs[both] @ theirs[both])
            alike.append((product / np.sqrt(power * float(mine[both] @ mine[both])), other * (product / power)))
    if not alike:
        return np.asarray(own, dtype=np.float64)
    alike.sort(key=lambda pair: -pair[0])
    stack = np.array([scaled for _, scaled in alike[:_NEIGHBOURS]])
    enough = np.isfinite(stack).sum(axis=0) >= max(1, len(stack) // 2)
    shared = np.full(own.shape, np.nan)
    shared[enough] = np.nanmedian(stack[:, enough], axis=0)
    return np.asarray(own - shared, dtype=np.float64)
