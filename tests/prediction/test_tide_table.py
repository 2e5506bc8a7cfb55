"""Tide tables: local times, ranks that do not depend on the period, whole days."""

import numpy as np
import pandas as pd
import pytest
from numpy.testing import assert_allclose

from tidekit.constituents.constants import HarmonicConstants
from tidekit.errors import AnalysisError
from tidekit.prediction.tide_table import ranked_tides, tide_table
from tidekit.prediction.turning_points import turning_points

NAMES = ("O1", "K1", "N2", "M2", "S2")
CONSTANTS = HarmonicConstants(
    names=NAMES,
    amplitude_m=np.array([0.20, 0.32, 0.15, 0.80, 0.25]),
    phase_lag_deg=np.array([20.0, 40.0, 190.0, 205.0, 230.0]),
    amplitude_sd_m=np.full(5, np.nan),
    phase_lag_sd_deg=np.full(5, np.nan),
    basis=("fitted",) * 5,
    mean_level_m=1.5,
)
APRIL_2013_H = 24.0 * 4839  # 2013-04-01 00:00 UTC
HALF_A_MINUTE = pd.Timedelta("30s")


def test_local_time_with_its_offset_over_a_clock_change() -> None:
    """Chatham Islands: UTC+13:45 until 2013-04-07 03:45 local, then UTC+12:45 (IANA database)."""
    local = tide_table(CONSTANTS, APRIL_2013_H, APRIL_2013_H + 14 * 24.0, time_zone="Pacific/Chatham")
    utc = tide_table(CONSTANTS, APRIL_2013_H, APRIL_2013_H + 14 * 24.0)
    assert (local["time"] == utc["time"]).all()
    assert {str(time)[-6:] for time in local["time"]} == {"+13:45", "+12:45"}
    assert local["time"].is_monotonic_increasing
    exact = turning_points(CONSTANTS, APRIL_2013_H, APRIL_2013_H + 14 * 24.0).to_frame()
    assert (exact["time"] - utc["time"]).abs().max() <= HALF_A_MINUTE
    assert_allclose(utc["height_m"], exact["height_m"], atol=1e-5)  # blocks start elsewhere


def test_a_water_has_one_rank_in_every_table() -> None:
    year = tide_table(CONSTANTS, APRIL_2013_H - 90 * 24.0, APRIL_2013_H + 275 * 24.0).set_index("time")
    for day in range(0, 30, 7):
        start = APRIL_2013_H + 24.0 * day + 3.7
        week = tide_table(CONSTANTS, start, start + 168.0).set_index("time")
        assert (year.loc[week.index, "kind"] == week["kind"]).all()
    assert set(year["kind"]) == {"HH", "H", "L", "LL"}


def test_the_end_is_not_included() -> None:
    points, _ = ranked_tides(CONSTANTS, APRIL_2013_H, APRIL_2013_H + 48.0)
    third = float(points.t_h[2])
    assert len(ranked_tides(CONSTANTS, APRIL_2013_H, third)[0]) == 2
    assert len(ranked_tides(CONSTANTS, third, APRIL_2013_H + 48.0)[0]) == len(points) - 2


def test_the_period_must_run_forward() -> None:
    with pytest.raises(AnalysisError, match="must end after its start"):
        tide_table(CONSTANTS, 10.0, 5.0)
