"""Ratios of the Sun's lines that differ only in the perigee's angle, from a Kepler orbit.

The solar perigee moves 1.7 degrees a century, so no fit to centuries of positions can part lines that differ
only in p_s. On a Kepler ellipse h and p_s are two free angles, and a two-dimensional Fourier transform over
them gives each line by itself.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

_ECCENTRICITY, _OBLIQUITY_RAD = 0.0167086, np.deg2rad(23.439279)
"""Earth's orbit and equator at J2000 (IAU 2006 obliquity; Simon et al. 1994, Astron. Astrophys. 282, 663)."""

_POINTS = 64
"""Points on each circle: harmonics up to 32, far beyond any line kept."""


def sun_on_ellipse() -> tuple[NDArray[np.float64], NDArray[np.float64], NDArray[np.float64]]:
    """Right ascension, declination [radians] and mean distance over distance, over h (rows) and p_s (columns)."""
    angle = 2 * np.pi * np.arange(_POINTS) / _POINTS
    h, p_s = np.meshgrid(angle, angle, indexing="ij")
    anomaly = h - p_s
    eccentric = anomaly.copy()
    for _ in range(30):  # contracts by the eccentricity each time: 30 are past double precision
        eccentric = anomaly + _ECCENTRICITY * np.sin(eccentric)
    true = 2 * np.arctan2(
        np.sqrt(1 + _ECCENTRICITY) * np.sin(eccentric / 2), np.sqrt(1 - _ECCENTRICITY) * np.cos(eccentric / 2)
    )
    longitude = true + p_s
    right_ascension = np.arctan2(np.sin(longitude) * np.cos(_OBLIQUITY_RAD), np.cos(longitude))
    declination = np.arcsin(np.sin(longitude) * np.sin(_OBLIQUITY_RAD))
    return right_ascension, declination, 1.0 / (1.0 - _ECCENTRICITY * np.cos(eccentric))


def harmonic(field: NDArray[np.complex128], k_h: int, k_p_s: int) -> complex:
    """Coefficient of ``exp(i(k_h h + k_p_s p_s))`` in a field over h and p_s."""
    return complex(np.fft.fft2(field)[k_h, k_p_s] / field.size)
