"""Standard errors of means over a record whose samples are not independent."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

BATCH_H = 29.530589 * 24.0
"""A synodic month: every batch holds two whole cycles from spring to neap, so these do not pass for noise. [h]"""
FEWEST_BATCHES = 3


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


def mean_sd(batch_means: NDArray[np.float64]) -> NDArray[np.float64]:
    """Standard deviation of means from the means of successive batches.

    Parameters
    ----------
    batch_means : ndarray, shape (b, d)
        Means of each batch of each of d quantities.

    Returns
    -------
    ndarray, shape (d,)
        NaN with fewer than `FEWEST_BATCHES`.

    Notes
    -----
    Successive months still hang together, through the seasons; autocovariances up to the cube root of the number
    of batches enter with Bartlett's weights, which keep the variance positive.

    References
    ----------
    .. [1] Newey, W. K. and West, K. D., "A simple, positive semi-definite, heteroskedasticity and
       autocorrelation consistent covariance matrix", Econometrica 55 (1987) 703-708, Eq. (5).
       doi:10.2307/1913610
    """
    count = len(batch_means)
    if count < FEWEST_BATCHES:
        return np.full(batch_means.shape[1], np.nan)
    departure = batch_means - batch_means.mean(axis=0)
    lags = int(np.cbrt(count))
    variance = np.mean(departure**2, axis=0)
    for lag in range(1, lags + 1):
        weight = 1.0 - lag / (lags + 1.0)
        variance += 2.0 * weight * np.sum(departure[lag:] * departure[:-lag], axis=0) / count
    # The mean takes one of the degrees of freedom.
    return np.asarray(np.sqrt(variance / (count - 1.0)))
