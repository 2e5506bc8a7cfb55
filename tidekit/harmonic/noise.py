"""Noise under each parameter, from the spectrum of the residual.

The residual of a tide gauge is red, with cusps round the tidal bands, so one variance for all frequencies gives
error bars that are too small where tides are and too large elsewhere. A least-squares coefficient errs by the
noise's own Fourier coefficient at its frequency, so the residual's periodogram beside that frequency, not tapered,
tells its variance: it leaks and sees the gaps as the coefficient does. At the frequency itself the fit has taken
the noise out along with the tide; what it has taken is known, and made good.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Float = NDArray[np.float64]

NEAR_BINS = 12
"""Bins looked at on either side: enough for a steady mean."""
_COARSEST_H = 0.5
"""Samples are gathered to no longer than this before the transform: M10 then has 5 of them to a cycle. [h]"""
_CHUNK = 1 << 17


def noise_variance(residual: Float, t_h: Float, step_h: float, speeds_deg_per_h: Float) -> tuple[Float, Float]:
    """Spectral density of the noise at each fitted speed, as the variance that white noise of that density has.

    Parameters
    ----------
    residual : ndarray, shape (n,)
        What the fit leaves. [m]
    t_h : ndarray, shape (n,)
        Sorted times. [UTC hours since 2000-01-01 00:00]
    step_h : float
        Commonest step. [h]
    speeds_deg_per_h : ndarray, shape (k,)
        Speeds of the fitted columns, 0 for the mean level. [degrees per hour]

    Returns
    -------
    variance : ndarray, shape (k,)
        [m^2]
    freedom : ndarray, shape (k,)
        Degrees of freedom that it is known to.

    References
    ----------
    .. [1] Percival, D. B. and Walden, A. T., "Spectral Analysis for Physical Applications", Cambridge University
       Press (1993), chapter 6: the periodogram and its leakage.
    """
    gather = max(int(_COARSEST_H / step_h + 1e-6), 1)
    grid = _gathered(residual, t_h, gather * step_h)
    # A length without large prime factors; the zeros only refine the bins.
    length = _fast_length(len(grid))
    density = np.abs(np.fft.rfft(grid, length)) ** 2 / len(residual)
    bin_deg_per_h = 360.0 / (length * gather * step_h)
    width = length / len(grid)
    target = speeds_deg_per_h / bin_deg_per_h
    variance, freedom = _beside(density, target, width)
    # A mean over `gather` samples answers a wave of this speed by its sinc.
    return variance / np.sinc(speeds_deg_per_h * gather * step_h / 360.0) ** 2, freedom


def _gathered(residual: Float, t_h: Float, step_h: float) -> Float:
    """Sums of the residual over the cells of a grid."""
    cells = int((t_h[-1] - t_h[0]) / step_h + 0.5) + 1
    grid = np.zeros(cells)
    for begin in range(0, len(t_h), _CHUNK):
        place = ((t_h[begin : begin + _CHUNK] - t_h[0]) / step_h + 0.25).astype(np.int64)
        sums = np.bincount(place - place[0], weights=residual[begin : begin + _CHUNK])
        grid[place[0] : place[0] + len(sums)] += sums
    return grid


def _fast_length(count: int) -> int:
    """Smallest length of at least `count` that is a power of two times 1, 3, 5, 9 or 15."""
    return min(m << max(int(np.ceil(np.log2(count / m))), 0) for m in (1, 3, 5, 9, 15))


def _beside(density: Float, target: Float, width: float) -> tuple[Float, Float]:
    """Mean density near each target place, made good for what was fitted, and its degrees of freedom.

    `width` is the number of bins from one independent ordinate to the next.
    """
    reach = np.arange(-NEAR_BINS, NEAR_BINS + 1) * width
    # Independent ordinates about the target itself; those beyond either end of the spectrum mirror others.
    places = target[:, None] + reach
    inside = (places > 0.5 * width) & (places < len(density) - 1)
    bins = np.clip(np.rint(places), 0, len(density) - 1).astype(np.int64)
    lines = np.unique(target)
    first = np.searchsorted(lines, bins - 40.0 * width)
    left = np.ones(bins.shape)
    for step in range(int((np.searchsorted(lines, bins + 40.0 * width) - first).max(initial=0))):
        index = np.minimum(first + step, len(lines) - 1)
        counted = first + step < len(lines)
        left -= counted * np.sinc((bins - lines[index]) / width) ** 2
    left = np.maximum(left, 0.0) * inside
    weight = inside / (1.0 + np.abs(reach / width))
    total = np.sum(weight * left, axis=1)
    mean = np.sum(weight * inside * density[bins], axis=1) / np.maximum(total, 1e-300)
    freedom = 2.0 * total**2 / np.maximum(np.sum(weight**2 * left, axis=1), 1e-300)
    return mean, np.maximum(freedom, 1.0)
