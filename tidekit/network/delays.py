"""Delay of the tide between places, from the phases of all constituents at once.

A single constituent gives a delay only up to its period. Together M2, S2, N2, K1 and O1 repeat only after a
fortnight or more, so a search over delays resolves the wrapping without assuming that gauges are neighbours.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Float = NDArray[np.float64]

SEARCH_H = 40.0
"""Delays sought on either side: a day of travel and the widest error of time zone. [h]"""
MODEL_SD_DEG = 2.0
"""Phase scatter that real coasts add to each constituent, beyond its measurement (common practice, no source)."""


@dataclass(frozen=True)
class Delay:
    """Delay that best explains phase differences, ``difference = speed * delay`` in every constituent."""

    delay_h: float
    """Delay. [h]"""
    delay_sd_h: float
    """Its standard deviation from the phases' own. [h]"""
    fit: float
    """Weighted mean cosine of what remains: 1 is perfect."""
    runner_up: float
    """The same at the best other delay, half a period of the fastest constituent or more away."""


def joint_delay(
    difference_deg: Float, sd_deg: Float, speeds_deg_per_h: Float, *, search_h: float = SEARCH_H, turn_deg: float = 0.0
) -> Delay:
    """Find the delay common to the constituents' phase differences.

    Parameters
    ----------
    difference_deg, sd_deg : ndarray, shape (k,)
        Phase differences and their standard deviations. [degrees]
    speeds_deg_per_h : ndarray, shape (k,)
        Speeds. [degrees per hour]
    search_h : float
        Search from minus to plus this. [h]
    turn_deg : float
        Turn taken off every difference first: 180 asks about a record turned upside down. [degrees]

    Returns
    -------
    Delay
        The best, refined by least squares on the unwrapped remainder.
    """
    weights = 1.0 / (sd_deg**2 + MODEL_SD_DEG**2)
    step = 5.0 / float(speeds_deg_per_h.max())
    trial = np.arange(-search_h, search_h + step, step)
    remainder = np.deg2rad(difference_deg - turn_deg - np.outer(trial, speeds_deg_per_h))
    score = np.cos(remainder) @ weights / weights.sum()
    delay = float(trial[np.argmax(score)])
    for _ in range(3):  # Gauss-Newton on a remainder that is small after the search
        left = wrapped_deg(difference_deg - turn_deg - speeds_deg_per_h * delay)
        delay += float(np.sum(weights * speeds_deg_per_h * left) / np.sum(weights * speeds_deg_per_h**2))
    left = wrapped_deg(difference_deg - turn_deg - speeds_deg_per_h * delay)
    apart = np.abs(trial - delay) > 180.0 / float(speeds_deg_per_h.max())
    own = 1.0 / np.maximum(sd_deg, 1e-6) ** 2
    slopes = weights * speeds_deg_per_h / np.sum(weights * speeds_deg_per_h**2)
    return Delay(
        delay_h=delay,
        delay_sd_h=float(np.sqrt(np.sum(slopes**2 / own))),
        fit=float(np.cos(np.deg2rad(left)) @ weights / weights.sum()),
        runner_up=float(score[apart].max(initial=-1.0)),
    )


def wrapped_deg(angle_deg: Float) -> Float:
    """Angle on the half-open circle [-180, 180). [degrees]"""
    return np.asarray((angle_deg + 180.0) % 360.0 - 180.0)
