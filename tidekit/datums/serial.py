"""Standard errors of means over a record whose samples are not independent."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

BATCH_H = 29.530589 * 24.0
"""A synodic month: every batch holds two whole cycles from spring to neap, so these do not pass for noise. [h]"""
YEAR_H = 8765.82
"""Mean tropical year. [h]"""
FEWEST_BATCHES = 3
BATCHES_A_YEAR = 12
"""Twelve months of 29.5 days and the part of one that a year has over."""


def batch_numbers(t_h: NDArray[np.float64], start_h: float) -> NDArray[np.int64]:
    """Batch of each time, counted from the record's start.

    Parameters
    ----------
    t_h : ndarray, shape (n,)
        Times. [h]
    start_h : float
        The record's start. [h]

    Returns
    -------
    ndarray of int, shape (n,)
        Numbers of the months.
    """
    return np.asarray(np.floor((t_h - start_h) / BATCH_H), dtype=np.int64)


def seasonal_waves(t_h: NDArray[np.float64]) -> NDArray[np.float64]:
    """Annual and semiannual cosines and sines, shape (n, 4)."""
    angle = 2 * np.pi * t_h / YEAR_H
    return np.column_stack([np.cos(angle), np.sin(angle), np.cos(2 * angle), np.sin(2 * angle)])


def mean_sd(batch_means: NDArray[np.float64], batch_t_h: NDArray[np.float64]) -> NDArray[np.float64]:
    """Standard deviation of means from the means of successive batches.

    Parameters
    ----------
    batch_means : ndarray, shape (b, d)
        Means of each batch of each of d quantities.
    batch_t_h : ndarray, shape (b,)
        Middles of the batches. [h]

    Returns
    -------
    ndarray, shape (d,)
        NaN with fewer than `FEWEST_BATCHES`.

    Notes
    -----
    Over a year or more the seasons (of sea level, and of the diurnal inequality with the Sun's declination) come
    round and are no error of the mean: waves of a year and of half a year are fitted beside it. A shorter record
    keeps them in its scatter. What is left hangs together from month to month; autocovariances up to the cube root
    of the number of batches enter with Bartlett's weights, which keep the variance positive.

    References
    ----------
    .. [1] Newey, W. K. and West, K. D., "A simple, positive semi-definite, heteroskedasticity and
       autocorrelation consistent covariance matrix", Econometrica 55 (1987) 703-708, Eq. (5).
       doi:10.2307/1913610
    """
    count = len(batch_means)
    if count < FEWEST_BATCHES:
        return np.full(batch_means.shape[1], np.nan)
    design = np.ones((count, 1))
    if count >= BATCHES_A_YEAR:
        design = np.hstack([design, seasonal_waves(batch_t_h)])
    inverse = np.linalg.inv(design.T @ design)
    departure = batch_means - design @ (inverse @ (design.T @ batch_means))
    # The row of the inverse that makes the mean turns each batch's scatter into its share of the mean's.
    share = (design @ inverse[0])[:, np.newaxis] * departure
    lags = int(np.cbrt(count))
    variance = np.sum(share**2, axis=0)
    for lag in range(1, lags + 1):
        variance += 2.0 * (1.0 - lag / (lags + 1.0)) * np.sum(share[lag:] * share[:-lag], axis=0)
    return np.asarray(np.sqrt(variance * count / (count - design.shape[1])))
