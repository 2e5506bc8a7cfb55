"""The picking rule: small cases by hand, and the one-at-a-time version as the oracle."""

from itertools import pairwise

import numpy as np
import pytest

from tidekit.prediction.picking import LEAST_INTERVAL_H, LEAST_RANGE_M, pick_tides
from tidekit.prediction.turning_points import TurningPoints


def points_of(times: list[float] | np.ndarray, heights: list[float] | np.ndarray) -> TurningPoints:
    heights = np.asarray(heights, dtype=float)
    is_high = np.empty(len(heights), dtype=bool)
    is_high[0] = heights[0] > heights[1]
    is_high[1:] = np.diff(heights) > 0
    return TurningPoints(t_h=np.asarray(times, dtype=float), height_m=heights, is_high=is_high)


@pytest.mark.parametrize(
    ("times", "heights", "kept"),
    [
        # A wiggle of 2 cm on the fall: the low and the high of it go.
        ([0, 3, 6, 12], [1.0, 0.50, 0.52, 0.0], [0, 3]),
        # The same wiggle of 4 cm, three hours wide, is a tide.
        ([0, 3, 6, 12], [1.0, 0.50, 0.54, 0.0], [0, 1, 2, 3]),
        # A double high water an hour apart: the higher stays, first or second.
        ([0, 6, 6.5, 7.5, 13], [0.0, 1.00, 0.95, 0.99, 0.1], [0, 1, 4]),
        ([0, 6, 6.5, 7.5, 13], [0.0, 0.99, 0.95, 1.00, 0.1], [0, 3, 4]),
        # Near in time to a low that is itself the lesser wiggle with the high before it.
        ([0, 5.0, 8.0, 9.5, 15], [0.0, 1.0, 0.9, 1.3, 0.0], [0, 3, 4]),
        # At an end only the outer one goes.
        ([0, 1.0, 7], [0.51, 0.50, 1.0], [1, 2]),
        ([0, 6, 7], [0.0, 1.0, 0.99], [0, 1]),
    ],
)
def test_by_hand(times: list[float], heights: list[float], kept: list[int]) -> None:
    picked = pick_tides(points_of(times, heights))
    assert picked.t_h.tolist() == np.asarray(times, dtype=float)[kept].tolist()


def one_at_a_time(points: TurningPoints) -> TurningPoints:
    """The rule in its slow form: the least near pair, or the lesser one beside it, until none is near."""
    place = list(range(len(points)))
    while len(place) > 1:
        span = [abs(points.height_m[b] - points.height_m[a]) for a, b in pairwise(place)]
        wait = [points.t_h[b] - points.t_h[a] for a, b in pairwise(place)]
        near = [i for i in range(len(span)) if span[i] < LEAST_RANGE_M or wait[i] < LEAST_INTERVAL_H]
        if not near:
            break
        pair = min(near, key=lambda i: span[i])
        while True:
            lower = min((i for i in (pair - 1, pair, pair + 1) if 0 <= i < len(span)), key=lambda i: span[i])
            if span[lower] >= span[pair]:
                break
            pair = lower
        if pair == 0:
            del place[0]
        elif pair == len(span) - 1:
            del place[-1]
        else:
            del place[pair : pair + 2]
    return points.where(np.array(place))


@pytest.mark.parametrize("seed", range(6))
def test_against_one_at_a_time(seed: int) -> None:
    rng = np.random.default_rng(seed)
    t_h = np.cumsum(rng.uniform(0.5, 6.0, 400))
    heights = np.cos(t_h * 0.5) + 0.3 * (-1.0) ** np.arange(400) * rng.uniform(0.0, 1.0, 400)
    turns = np.flatnonzero(np.diff(np.sign(np.diff(heights))) != 0) + 1
    points = points_of(t_h[turns], heights[turns])
    picked, slow = pick_tides(points), one_at_a_time(points)
    assert len(picked) < len(points)
    assert np.all(picked.is_high[:-1] != picked.is_high[1:])
    assert picked.t_h.tolist() == slow.t_h.tolist()


def test_thousands_of_wiggles_are_quick_and_leave_the_tide() -> None:
    """A metre of tide under samples that wiggle by a centimetre: only the tide is left."""
    t_h = np.arange(0.0, 8766.0, 0.1)
    heights = np.cos(2 * np.pi * t_h / 12.42) + 0.005 * (-1.0) ** np.arange(len(t_h))
    turns = np.flatnonzero(np.diff(np.sign(np.diff(heights))) != 0) + 1
    picked = pick_tides(points_of(t_h[turns], heights[turns]))
    assert abs(len(picked) - 2 * 8766.0 / 12.42) <= 2


def test_nothing_to_pick() -> None:
    empty = points_of([0.0, 6.0], [0.0, 1.0]).where(np.zeros(2, dtype=bool))
    assert len(pick_tides(empty)) == 0
