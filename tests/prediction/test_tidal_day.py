"""Ranks of waters in their tidal days."""

import numpy as np
from numpy.testing import assert_allclose

from tidekit.prediction.tidal_day import TIDAL_DAY_H, tidal_day_edge_h, tidal_day_kinds, tidal_day_numbers
from tidekit.prediction.turning_points import TurningPoints


def semidiurnal(days: int, inequality_m: float, *, start_h: float = 0.0) -> TurningPoints:
    """Two highs and two lows a tidal day; the second high is higher, the first low lower."""
    quarter = TIDAL_DAY_H / 4
    t_h = start_h + quarter * np.arange(4 * days)
    heights = np.tile([1.0, -1.0 - inequality_m, 1.0 + inequality_m, -1.0], days)
    return TurningPoints(t_h=t_h, height_m=heights, is_high=heights > 0)


def test_a_mixed_tide() -> None:
    for start in np.arange(0.0, 25.0, 2.3):
        kinds = tidal_day_kinds(semidiurnal(30, 0.2, start_h=start)).tolist()
        assert kinds[4:-4] == ["H", "LL", "HH", "L"] * 28


def test_the_only_high_of_a_day_is_its_higher_one() -> None:
    """A diurnal tide at the speed of K1 drifts through the tidal day and yet has one HH and one LL each time."""
    t_h = 23.934 / 2 * np.arange(400)
    heights = np.tile([1.0, -1.0], 200)
    kinds = tidal_day_kinds(TurningPoints(t_h=t_h, height_m=heights, is_high=heights > 0))
    assert set(kinds[0::2]) == {"HH"}
    assert set(kinds[1::2]) == {"LL"}


def test_edges_are_clear_of_the_waters() -> None:
    rng = np.random.default_rng(4)
    t_h = np.sort(np.concatenate([k * TIDAL_DAY_H + rng.normal([5.0, 17.4], 0.5) for k in range(200)]))
    edge = tidal_day_edge_h(t_h)
    distance = np.abs(np.mod(t_h - edge + TIDAL_DAY_H / 2, TIDAL_DAY_H) - TIDAL_DAY_H / 2)
    assert distance.min() > 3.5
    assert np.bincount(tidal_day_numbers(t_h, edge) + 1).max() == 2


def test_every_day_has_one_leader() -> None:
    points = semidiurnal(50, 0.0)  # ties everywhere
    kinds = tidal_day_kinds(points)
    assert_allclose([(kinds == k).sum() for k in ("HH", "H", "LL", "L")], 50, atol=1)


def test_nothing_to_rank() -> None:
    empty = semidiurnal(1, 0.0).where(np.zeros(4, dtype=bool))
    assert tidal_day_kinds(empty).tolist() == []
