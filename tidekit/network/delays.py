"""Delay of the tide between places, from the phases of all constituents at once.

A single constituent gives a delay only up to its period. Together M2, S2, N2, K1 and O1 repeat only after a
fortnight or more, so a search over delays resolves the wrapping without assuming that gauges are neighbours.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

Float = NDArray[np.float64]

SEARCH_H = 40.0
"""Delays sought on either side: a day of travel and the widest error of time zone. [h]"""
MODEL_SD_DEG = 2.0
"""Phase scatter that real coasts add to each constituent, beyond its measurement (common practice, no source)."""
CLEAR_LEAD = 7.0
"""Lead in log likelihood from which one explanation counts as the only one: odds of a thousand to one."""
_TRIAL_DEG = 2.0
"""Step of the search, in phase of the fastest constituent: half of it costs little of the likelihood."""
_USUAL_H = 6.0
"""Of delays that explain phases alike, the smaller is likelier by 1 / (1 + (delay / this)^2)."""


@dataclass(frozen=True)
class Delay:
    """Delay that best explains phase differences, ``difference = speed * delay`` in every constituent."""

    delay_h: float
    """Delay. [h]"""
    delay_sd_h: float
    """Its standard deviation from the phases' own. [h]"""
    log_likelihood: float
    """Logarithm of how well it explains them: 0 is perfect."""
    lead: float
    """What the best other delay, half a period of the fastest constituent or more away, has less of it."""


def joint_delay(
    difference_deg: Float,
    sd_deg: Float,
    speeds_deg_per_h: Float,
    *,
    search_h: float = SEARCH_H,
    usual_h: float = _USUAL_H,
    turn_deg: float = 0.0,
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
    usual_h : float
        Size of usual delays: a much larger one is taken only where it explains the phases better. [h]
    turn_deg : float
        Turn taken off every difference first: 180 asks about a record turned upside down. [degrees]

    Returns
    -------
    Delay
        The best, refined by least squares on the unwrapped remainder.

    Notes
    -----
    The log likelihood of a remainder r is ``(cos r - 1) / sd^2`` (von Mises), a normal one's where r is small.
    """
    turned = difference_deg - turn_deg
    weights = 1.0 / (sd_deg**2 + MODEL_SD_DEG**2)
    trial, cosines, sines = _trials(tuple(speeds_deg_per_h.tolist()), search_h)
    rigid, angle = weights * np.rad2deg(1.0) ** 2, np.deg2rad(turned)
    likely = cosines @ (rigid * np.cos(angle)) + sines @ (rigid * np.sin(angle)) - rigid.sum()
    fastest = float(speeds_deg_per_h.max())
    delay = float(trial[np.argmax(likely - np.log1p((trial / usual_h) ** 2))])
    slopes = weights * speeds_deg_per_h / np.sum(weights * speeds_deg_per_h**2)
    for _ in range(3):  # Gauss-Newton on a remainder that is small after the search
        delay += float(slopes @ wrapped_deg(turned - speeds_deg_per_h * delay))
    reached = float(rigid @ (np.cos(np.deg2rad(turned - speeds_deg_per_h * delay)) - 1.0))
    elsewhere = likely[np.abs(trial - delay) > 180.0 / fastest]
    return Delay(
        delay_h=delay,
        delay_sd_h=float(np.sqrt(np.sum((slopes * sd_deg) ** 2))),
        log_likelihood=reached,
        lead=reached - float(elsewhere.max(initial=-np.inf)),
    )


@lru_cache(maxsize=8)
def _trials(speeds_deg_per_h: tuple[float, ...], search_h: float) -> tuple[Float, Float, Float]:
    """Trial delays, shape (t,), zero among them, and cosine and sine of the phases they give, shape (t, k)."""
    step = _TRIAL_DEG / max(speeds_deg_per_h)
    most = int(np.ceil(search_h / step))
    trial: Float = step * np.arange(-most, most + 1, dtype=np.float64)
    angle: Float = np.deg2rad(np.outer(trial, speeds_deg_per_h))
    return trial, np.cos(angle), np.sin(angle)


def wrapped_deg(angle_deg: Float) -> Float:
    """Angle on the half-open circle [-180, 180). [degrees]"""
    return np.asarray((angle_deg + 180.0) % 360.0 - 180.0)
