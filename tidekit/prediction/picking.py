"""The trade's rule for which turning points count as tides."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from tidekit.prediction.turning_points import TurningPoints

_Array = NDArray[np.float64]
_Indices = NDArray[np.intp]

LEAST_RANGE_M = 0.03
"""A high and a low nearer than this in height are no tide (0.10 ft in the source). [m]"""
LEAST_INTERVAL_H = 2.0
"""A high and a low nearer than this in time are no tide. [h]"""


def pick_tides(
    points: TurningPoints,
    *,
    least_range_m: float = LEAST_RANGE_M,
    least_interval_h: float = LEAST_INTERVAL_H,
) -> TurningPoints:
    """Leave out pairs of a high and a low that are too near each other to count as a tide.

    Parameters
    ----------
    points : TurningPoints
        Highs and lows by turns.
    least_range_m : float
        Least difference of height between neighbours. [m]
    least_interval_h : float
        Least difference of time between neighbours. [h]

    Returns
    -------
    TurningPoints
        The rest, highs and lows by turns. Of two highs about a low that went, the higher stays; of two lows,
        the lower.

    Notes
    -----
    What goes is always the smallest wiggle about: a near pair whose neighbouring pair has a lesser range (it is
    near in time only) gives its place to that one. At an end of the series nothing beyond tells whether the
    outer turning point is a tide: it alone goes.

    References
    ----------
    .. [1] NOAA/NOS, "Computational Techniques for Tidal Datums Handbook", NOS CO-OPS 2, 2003, section 2.3:
       0.10 ft and 2.0 h (from memory).
    """
    place = np.arange(len(points))
    while len(place) > 1:
        height_range = np.abs(np.diff(points.height_m[place]))
        near = (height_range < least_range_m) | (np.diff(points.t_h[place]) < least_interval_h)
        if not near.any():
            break
        wiggles = _least_about(height_range, np.flatnonzero(near))
        place = np.delete(place, _leaving(wiggles, len(place)))
    return points.where(place)


def _least_about(height_range: _Array, pairs: _Indices) -> _Indices:
    """Pairs of locally least range downhill of the given ones, no two of them neighbours."""
    padded = np.pad(height_range, 1, constant_values=np.inf)
    # Self first: the first of equals wins, so a flat stretch does not send its pairs wandering.
    around = np.stack([padded[1:-1], padded[:-2], padded[2:]])
    downhill = np.arange(len(height_range)) + np.array([0, -1, 1])[np.argmin(around, axis=0)]
    while np.any(downhill[pairs] != pairs):
        pairs = np.unique(downhill[pairs])
    neighbour = np.diff(pairs, prepend=-2) == 1
    return np.asarray(pairs[~neighbour])


def _leaving(pairs: _Indices, count: int) -> _Indices:
    """Places of the turning points that go with these pairs: both, or only the outer one at an end."""
    earlier = pairs[(pairs == 0) | (pairs < count - 2)]
    later = pairs[pairs > 0] + 1
    return np.concatenate([earlier, later])
