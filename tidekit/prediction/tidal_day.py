"""Higher and lower high waters, lower and higher low waters of each tidal day."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from tidekit.prediction.turning_points import TurningPoints

TIDAL_DAY_H = 24.841202
"""The Moon's mean day: 360 degrees at half the speed of M2, 14.4920521 deg/h. [h]"""

_OWN_DAY_H = 0.75 * TIDAL_DAY_H
"""Two highs this far apart are one tide of a diurnal kind each, though one window may hold both. [h]"""
_CLEARANCE_PERCENT = 1.0
"""Part of the waters that may lie nearer the window's edge than its clearance."""


def tidal_day_kinds(points: TurningPoints) -> NDArray[np.str_]:
    """Name each turning point by its rank in its tidal day.

    Parameters
    ----------
    points : TurningPoints
        Highs and lows; those that are no tides already left out.

    Returns
    -------
    ndarray of str, shape (n,)
        ``HH`` the higher high water of its tidal day, ``H`` another high, ``LL`` the lower low water, ``L``
        another low. The only high of a day is its higher one, the only low its lower one.

    Notes
    -----
    Tidal days are windows of `TIDAL_DAY_H`, for highs and for lows each laid where their edges are farthest
    from the waters, so that the daily pair is not torn apart.

    References
    ----------
    .. [1] NOAA/NOS, "Tide and Current Glossary", 2000: tidal day, mean higher high water (from memory).
    """
    kinds = np.where(points.is_high, "H", "L").astype("<U2")
    for high, name in ((True, "HH"), (False, "LL")):
        place = np.flatnonzero(points.is_high == high)
        reach = points.height_m[place] if high else -points.height_m[place]
        kinds[place[_foremost(points.t_h[place], reach)]] = name
    return kinds


def tidal_day_edge_h(t_h: NDArray[np.float64]) -> float:
    """Find where tidal days should start so that their edges are clear of the waters of one kind.

    Parameters
    ----------
    t_h : ndarray, shape (n,)
        Times of the highs, or of the lows. [h]

    Returns
    -------
    float
        One edge; the others lie whole tidal days from it. [h, likewise]
    """
    if len(t_h) == 0:
        return 0.0
    edges = np.arange(0.0, TIDAL_DAY_H, 0.25)
    half = 0.5 * TIDAL_DAY_H
    phase = np.mod(t_h, TIDAL_DAY_H)[:, np.newaxis]
    distance = np.abs(np.mod(phase - edges + half, TIDAL_DAY_H) - half)
    return float(edges[np.argmax(np.percentile(distance, _CLEARANCE_PERCENT, axis=0))])


def tidal_day_numbers(t_h: NDArray[np.float64], edge_h: float) -> NDArray[np.int64]:
    """Tidal day of each time.

    Parameters
    ----------
    t_h : ndarray, shape (n,)
        Times. [h]
    edge_h : float
        Start of a tidal day. [h, likewise]

    Returns
    -------
    ndarray of int, shape (n,)
        Tidal days since that one.
    """
    return np.asarray(np.floor((t_h - edge_h) / TIDAL_DAY_H), dtype=np.int64)


def _foremost(t_h: NDArray[np.float64], reach_m: NDArray[np.float64]) -> NDArray[np.intp]:
    """Places of the waters that reach farthest in their tidal day."""
    _, day = np.unique(tidal_day_numbers(t_h, tidal_day_edge_h(t_h)), return_inverse=True)
    order = np.lexsort((-reach_m, day))
    first = order[np.flatnonzero(np.diff(day[order], prepend=-1))]
    apart = np.abs(t_h - t_h[first][day]) > _OWN_DAY_H
    return np.asarray(np.union1d(first, np.flatnonzero(apart)))
