"""Clock slips and drifts inside a record, on a tide made by the predictor; invented, for behaviour."""

import numpy as np
from numpy.testing import assert_allclose

from tidekit.constituents.constants import HarmonicConstants
from tidekit.harmonic.analysis import analyse
from tidekit.prediction.heights import predict_heights
from tidekit.quality.slips import daily_lateness, find_drift, find_slips

T_H = 24.0 * 7000 + np.arange(24.0 * 330)
TIDE = HarmonicConstants(
    names=("M2", "S2", "N2", "K1", "O1"),
    amplitude_m=np.array([0.8, 0.25, 0.16, 0.4, 0.25]),
    phase_lag_deg=np.array([40.0, 70.0, 20.0, 110.0, 95.0]),
    amplitude_sd_m=np.full(5, np.nan),
    phase_lag_sd_deg=np.full(5, np.nan),
    basis=("published",) * 5,
)


def record(late_h: np.ndarray, seed: int = 1) -> np.ndarray:
    random = np.random.default_rng(seed)
    return np.array(predict_heights(TIDE, T_H - late_h)) + random.normal(0.0, 0.02, len(T_H))


def test_a_slip_is_found_dated_and_sized() -> None:
    late_h = np.where(T_H - T_H[0] >= 24.0 * 200, 0.25, 0.0)
    (slip,) = find_slips(daily_lateness(analyse(T_H, record(late_h))))
    assert abs(slip.day - 7200) <= 1
    # The whole record's fit follows the slip a little with its closest constituents.
    assert_allclose(slip.size_min, 15.0, atol=max(3 * slip.sd_min, 1.5))


def test_a_drift_is_found_and_sized() -> None:
    late_h = 0.04 / 60.0 * (T_H - T_H[0]) / 24.0
    drift = find_drift(daily_lateness(analyse(T_H, record(late_h))))
    assert drift is not None
    assert_allclose(drift.rate_min_per_day, 0.04, rtol=0.25)


def test_a_sound_clock_is_left_in_peace() -> None:
    for seed in range(10):
        lateness = daily_lateness(analyse(T_H, record(np.zeros_like(T_H), seed)))
        assert find_slips(lateness) == ()
        assert find_drift(lateness) is None


def test_days_with_few_samples_have_no_lateness() -> None:
    keep = np.ones(len(T_H), dtype=bool)
    keep[24 * 50 : 24 * 50 + 16] = False
    lateness = daily_lateness(analyse(T_H[keep], record(np.zeros_like(T_H))[keep]))
    assert np.isnan(lateness.late_min[50])
    assert np.isfinite(lateness.late_min[49])
