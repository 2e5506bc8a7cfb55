"""Datum steps: a level that changes at a date and stays changed.

References
----------
.. [1] Williams, S. D. P., "Offsets in Global Positioning System time series", J. Geophys. Res. 108 (2003) 2310,
   doi 10.1029/2002JB002156: steps in series with coloured noise.
.. [2] Cochrane, D. and Orcutt, G. H., "Application of least squares regression to relationships containing
   auto-correlated error terms", J. Am. Stat. Assoc. 44 (1949) 32-61.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Float = NDArray[np.float64]

CRITICAL_T = 5.0
"""Largest |t| over all dates that chance exceeds once in several hundred years of red daily levels (measured by
tests/quality/test_steps.py)."""
EDGE_DAYS = 10
"""Steps nearer to an end of the record are not told from weather."""
MOST_STEPS = 5
_YEAR_DAYS = 365.2422
_MONTH_DAYS = 30


@dataclass(frozen=True)
class Step:
    """One step of a daily level."""

    day: int
    """First day at the new level, since 2000-01-01."""
    size_m: float
    """Level after less level before. [m]"""
    sd_m: float
    """Its standard deviation under red noise. [m]"""
    slow_sd_m: float = 0.0
    """What the wandering of monthly levels, which is redder still, adds up to in such a step. [m]"""


def find_steps(days: NDArray[np.int64], level_m: Float) -> tuple[Step, ...]:
    """Find steps in daily levels, the clearest first, then others with those taken into account.

    Parameters
    ----------
    days : ndarray of int, shape (d,)
        Days since 2000-01-01.
    level_m : ndarray, shape (d,)
        Daily levels that a harmonic fit has been taken from; NaN where missing. [m]

    Returns
    -------
    tuple of Step
        In order of date. The mean and the annual and semi-annual terms, which the harmonic fit bent to follow a
        step, are fitted again beside it.
    """
    known = np.isfinite(level_m)
    day, level = days[known], level_m[known]
    if len(day) < 4 * EDGE_DAYS:
        return ()
    base = _smooth_columns(day)
    found: list[int] = []
    while len(found) < MOST_STEPS:
        place = _clearest(base, day, level, found)
        if place is None:
            break
        found.append(place)
    if not found:
        return ()
    design = np.column_stack([base, *(_after(len(day), place) for place in found)])
    coefficients, sd = _red_fit(design, level)
    left = level - design @ coefficients
    steps = [
        Step(
            int(day[place]),
            float(coefficients[base.shape[1] + n]),
            float(sd[base.shape[1] + n]),
            slow_sd_m(day, left, place),
        )
        for n, place in enumerate(found)
    ]
    return tuple(sorted(steps, key=lambda step: step.day))


def season_m(days: NDArray[np.int64], level_m: Float, steps: tuple[Step, ...]) -> Float:
    """Mean and season of a level, fitted beside its steps as `find_steps` does, shape (d,). [m]

    A harmonic fit bends the annual and semi-annual tide to follow a step; with this taken off the step stands plain.
    """
    known = np.isfinite(level_m)
    columns = _smooth_columns(days)
    stepped = level_m - np.sum([step.size_m * (days >= step.day) for step in steps], axis=0)
    coefficients = np.linalg.lstsq(columns[known], stepped[known], rcond=None)[0]
    return np.asarray(columns @ coefficients, dtype=np.float64)


def slow_sd_m(day: NDArray[np.int64], left: Float, place: int) -> float:
    """Standard deviation of a step between two means of months, from the scatter of monthly means of what is left."""
    month = (day - day[0]) // _MONTH_DAYS
    means = np.bincount(month, weights=left)[np.unique(month)] / np.unique(month, return_counts=True)[1]
    before, after = max(place / _MONTH_DAYS, 1.0), max((len(day) - place) / _MONTH_DAYS, 1.0)
    return float(means.std(ddof=1) * np.sqrt(1.0 / before + 1.0 / after))


def red_line(days: NDArray[np.int64], values: Float) -> tuple[float, float]:
    """Slope of a straight line a day and its standard deviation under first-order autoregressive noise."""
    design = np.column_stack([np.ones(len(days)), days - days.mean()])
    coefficients, sd = _red_fit(design, values)
    return float(coefficients[1]), float(sd[1])


def red_step(days: NDArray[np.int64], level_m: Float, day: int) -> tuple[float, float]:
    """Size of a step at a given day and its standard deviation under first-order autoregressive noise. [m]"""
    known = np.isfinite(level_m)
    design = np.column_stack([_smooth_columns(days[known]), days[known] >= day])
    coefficients, sd = _red_fit(design.astype(np.float64), level_m[known])
    return float(coefficients[-1]), float(sd[-1])


def _smooth_columns(day: NDArray[np.int64]) -> Float:
    """Mean, and annual and semi-annual terms where the record is long enough for the harmonic fit to have them."""
    columns = [np.ones(len(day))]
    for cycles in (1, 2):
        if (day[-1] - day[0]) * cycles >= 0.9 * _YEAR_DAYS:
            angle = 2 * np.pi * cycles * day / _YEAR_DAYS
            columns += [np.cos(angle), np.sin(angle)]
    return np.column_stack(columns)


def _after(count: int, place: int) -> Float:
    return (np.arange(count) >= place).astype(np.float64)


def _clearest(base: Float, day: NDArray[np.int64], level: Float, found: list[int]) -> int | None:
    """Place of the step with the largest |t|, or None where that is within chance."""
    count = len(day)
    design = np.column_stack([base, *(_after(count, place) for place in found)])
    keep = _memory(level - design @ np.linalg.lstsq(design, level, rcond=None)[0])
    best: tuple[float, int] | None = None
    for _ in range(2):  # the second round knows the memory of the noise without the step
        scores = _step_t(design, level, keep)
        near = [place for step in found for place in range(step - EDGE_DAYS, step + EDGE_DAYS)]
        scores[[place for place in near if 0 <= place < count]] = 0.0
        place = int(np.argmax(np.abs(scores)))
        best = float(abs(scores[place])), place
        with_step = np.column_stack([design, _after(count, place)])
        keep = _memory(level - with_step @ np.linalg.lstsq(with_step, level, rcond=None)[0])
    return best[1] if best is not None and best[0] > CRITICAL_T else None


def _step_t(design: Float, level: Float, keep: float) -> Float:
    """|t| of a step at each place, all fits at once by sweeping the other columns out (Frisch-Waugh)."""
    count = len(level)
    white = _whitened(np.column_stack([design, level]), keep)
    basis = np.linalg.qr(white[:, :-1])[0]
    target = white[:, -1] - basis @ (basis.T @ white[:, -1])
    steps = _whitened(np.tri(count, dtype=np.float64), keep)  # column p is 1 from place p on
    steps -= basis @ (basis.T @ steps)
    power = np.einsum("ij,ij->j", steps, steps)
    projection = steps.T @ target
    with np.errstate(divide="ignore", invalid="ignore"):
        left = float(target @ target) - projection**2 / power
        t = projection / np.sqrt(power * np.maximum(left, 1e-300) / (count - design.shape[1] - 1))
    t[:EDGE_DAYS] = t[count - EDGE_DAYS :] = 0.0
    return np.asarray(np.nan_to_num(t), dtype=np.float64)


def _memory(residual: Float) -> float:
    """Lag-one autocorrelation, corrected for the bias of short series (Kendall 1954), within [0, 0.98]."""
    raw = float(residual[1:] @ residual[:-1] / max(float(residual @ residual), 1e-300))
    return float(np.clip(raw + (1 + 4 * raw) / len(residual), 0.0, 0.98))


def _whitened(columns: Float, keep: float) -> Float:
    """Take from each row `keep` times the row before; the first row is scaled to the same variance."""
    return np.vstack([columns[:1] * np.sqrt(1 - keep**2), columns[1:] - keep * columns[:-1]])


def _red_fit(design: Float, level: Float) -> tuple[Float, Float]:
    """Coefficients and their standard deviations under first-order autoregressive noise."""
    keep = _memory(level - design @ np.linalg.lstsq(design, level, rcond=None)[0])
    white = _whitened(np.column_stack([design, level]), keep)
    coefficients, *_ = np.linalg.lstsq(white[:, :-1], white[:, -1], rcond=None)
    left = white[:, -1] - white[:, :-1] @ coefficients
    variance = float(left @ left) / (len(level) - design.shape[1])
    covariance = variance * np.linalg.inv(white[:, :-1].T @ white[:, :-1])
    return np.asarray(coefficients, dtype=np.float64), np.asarray(np.sqrt(np.diag(covariance)), dtype=np.float64)
