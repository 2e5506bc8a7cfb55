"""Noise under each constituent, from the spectrum of the residual.

The residual of a tide gauge is red, with cusps round the tidal bands, so one variance for all frequencies gives
error bars that are too small where tides are and too large elsewhere. The spectral density beside a constituent's
frequency is what counts for it; the bins that the fit has emptied are left out.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Float = NDArray[np.float64]

NEAR_BINS = 10
"""Bins averaged on either side: wide enough for a steady mean, narrow enough to follow the cusps."""
_EMPTIED_BINS = 1.5
"""A Hann-tapered line fills three bins: these hold what the fit took out."""
NOISE_FREEDOM = 2.0 * NEAR_BINS * 2.0 * 0.5
"""Degrees of freedom of such a mean: two a bin, halved as a Hann taper ties neighbouring bins together."""


def noise_variance(residual: Float, t_h: Float, speeds_deg_per_h: Float) -> Float:
    """Spectral density of the residual beside each speed, as the variance that white noise of that density has.

    Parameters
    ----------
    residual : ndarray, shape (n,)
        What the fit leaves. [m]
    t_h : ndarray, shape (n,)
        Sorted times. [UTC hours since 2000-01-01 00:00]
    speeds_deg_per_h : ndarray, shape (k,)
        Speeds of all fitted columns, 0 for the mean. [degrees per hour]

    Returns
    -------
    ndarray, shape (k,)
        Variance. [m^2]

    References
    ----------
    .. [1] Percival, D. B. and Walden, A. T., "Spectral Analysis for Physical Applications", Cambridge University
       Press (1993), chapter 6: direct spectral estimates with a taper.
    """
    step_h = float(np.median(np.diff(t_h)))
    place = np.rint((t_h - t_h[0]) / step_h).astype(np.int64)
    points = int(place[-1]) + 1
    taper = np.zeros(points)
    # Samples that share a place (jittered loggers) are averaged with weights that add up.
    np.add.at(taper, place, 1.0)
    grid = np.bincount(place, weights=residual, minlength=points) / np.maximum(taper, 1.0)
    taper = np.hanning(points + 2)[1:-1] * (taper > 0)
    density = np.abs(np.fft.rfft((grid - residual.mean()) * taper)) ** 2 / np.sum(taper**2)
    bin_deg_per_h = 360.0 / (points * step_h)
    return _beside(density, speeds_deg_per_h / bin_deg_per_h)


def _beside(density: Float, target_bins: Float) -> Float:
    """Mean density of the nearest usable bins on either side of each target."""
    bins = np.arange(len(density))
    gap = np.abs(bins[:, None] - np.sort(target_bins)[None, :]).min(axis=1)
    usable = bins[gap > _EMPTIED_BINS]
    if len(usable) < 4:
        usable = bins
    result = np.empty(len(target_bins))
    for column, target in enumerate(target_bins):
        place = int(np.searchsorted(usable, target))
        near = usable[max(place - NEAR_BINS, 0) : place + NEAR_BINS]
        result[column] = density[near].mean()
    return result
