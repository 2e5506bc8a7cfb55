"""Observed waters and datums: the truth of invented series is known from the prediction's roots."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from tidekit.constituents.constants import HarmonicConstants
from tidekit.datums.observed import datums_of_series
from tidekit.datums.observed_tides import observed_tides
from tidekit.errors import AnalysisError
from tidekit.prediction.heights import predict_heights
from tidekit.prediction.turning_points import TurningPoints, turning_points

CONSTANTS = HarmonicConstants(
    names=("O1", "K1", "N2", "M2", "S2", "M4"),
    amplitude_m=np.array([0.20, 0.32, 0.15, 0.80, 0.25, 0.03]),
    phase_lag_deg=np.array([20.0, 40.0, 190.0, 205.0, 230.0, 90.0]),
    amplitude_sd_m=np.full(6, np.nan),
    phase_lag_sd_deg=np.full(6, np.nan),
    basis=("fitted",) * 6,
    mean_level_m=1.5,
)
START_H, YEAR_H = 1000.0, 8766.0
CURVATURE_M = {0.1: 0.001, 0.25: 0.0015, 1.0: 0.003}
"""What the parabolas leave of this tide of 1.6 m, M4 included, by sampling step."""
TIME_H = 1.5 / 60
"""Hourly parabolas, too, find the time of a water to a minute or so."""


def series(step_h: float, *, hours: float = YEAR_H) -> tuple[np.ndarray, np.ndarray]:
    t_h = START_H + step_h * np.arange(round(hours / step_h))
    return t_h, predict_heights(CONSTANTS, t_h)


def matched(found: TurningPoints, truth: TurningPoints) -> np.ndarray:
    """Place of the true water nearest to each one found."""
    after = np.clip(np.searchsorted(truth.t_h, found.t_h), 1, len(truth) - 1)
    return after - (found.t_h - truth.t_h[after - 1] < truth.t_h[after] - found.t_h)


@pytest.mark.parametrize("step_h", [0.1, 0.25, 1.0])
def test_waters_without_noise(step_h: float) -> None:
    t_h, height = series(step_h)
    found = observed_tides(t_h, height, step_h).points
    truth = turning_points(CONSTANTS, START_H + 1.0, START_H + YEAR_H - 2.0)
    place = matched(found, truth)
    assert abs(len(found) - len(truth)) <= 1
    assert np.all(found.is_high == truth.is_high[place])
    assert_allclose(found.height_m, truth.height_m[place], atol=CURVATURE_M[step_h], rtol=0)
    assert np.median(np.abs(found.t_h - truth.t_h[place])) < TIME_H


def test_noise_does_not_lift_the_waters() -> None:
    """The highest of noisy 6-minute samples is high by two sd or so; the parabola's vertex is not."""
    t_h, height = series(0.1)
    noisy = height + np.random.default_rng(3).normal(0.0, 0.03, len(height))
    found = observed_tides(t_h, noisy, 0.1).points
    truth = turning_points(CONSTANTS, START_H, START_H + YEAR_H)
    misfit = found.height_m - truth.height_m[matched(found, truth)]
    assert abs(len(found) - len(truth)) <= 2
    # A parabola through 21 samples: sd 1.5 x 0.03 / sqrt(21) = 1.0 cm, mean of 700 good to 0.4 mm.
    assert abs(misfit[found.is_high].mean()) < 0.003
    assert abs(misfit[~found.is_high].mean()) < 0.003
    assert misfit.std() < 0.012


def test_no_water_is_seen_in_a_hole_and_short_holes_are_bridged() -> None:
    t_h, height = series(0.1, hours=1000.0)
    keep = np.ones(len(t_h), dtype=bool)
    keep[3000:3400] = False  # 40 h
    keep[np.random.default_rng(5).choice(3000, 60, replace=False)] = False
    tides = observed_tides(t_h[keep], height[keep], 0.1)
    whole = observed_tides(t_h, height, 0.1)
    assert not np.any((tides.points.t_h > t_h[2999]) & (tides.points.t_h < t_h[3400]))
    early = whole.points.t_h < t_h[2980]
    assert_allclose(tides.points.t_h[: early.sum()], whole.points.t_h[early], atol=0.02)
    assert np.all(np.isnan(tides.height_m[3000:3400]))
    assert np.isfinite(tides.height_m[20:2980]).all()


@pytest.mark.parametrize("step_h", [0.1, 1.0])
def test_datums_against_the_predicted_waters(step_h: float) -> None:
    """The means of the true waters of the same year, ranked by the same rule."""
    t_h, height = series(step_h)
    table = datums_of_series(t_h, height, step_h, gauge="A", vertical_reference="staff zero")
    truth = turning_points(CONSTANTS, START_H, START_H + YEAR_H)
    assert_allclose(table.height("MHW"), truth.height_m[truth.is_high].mean(), atol=0.003)
    assert_allclose(table.height("MLW"), truth.height_m[~truth.is_high].mean(), atol=0.003)
    assert_allclose(table.height("MSL"), 1.5, atol=0.001)
    assert_allclose(table.height("GT"), table.height("MHHW") - table.height("MLLW"), atol=1e-12)
    assert_allclose(table.height("DHQ"), table.height("MHHW") - table.height("MHW"), atol=1e-12)
    assert_allclose(table.height("DTL"), 0.5 * (table.height("MHHW") + table.height("MLLW")), atol=1e-12)
    assert table.names[:7] == ("MHHW", "MHW", "MSL", "MTL", "DTL", "MLW", "MLLW")
    assert table.details["tidal_days"] in (351, 352)


def test_a_hole_leaves_its_tidal_days_out() -> None:
    """Twenty days lost about neaps: whole days only, so that the means stay near those of the whole year."""
    t_h, height = series(1.0)
    keep = np.ones(len(t_h), dtype=bool)
    keep[4000:4480:24] = False  # one hour a day, for twenty days
    table, whole = datums_of_series(t_h[keep], height[keep], 1.0), datums_of_series(t_h, height, 1.0)
    lost = whole.details["tidal_days"] - table.details["tidal_days"]
    assert 18 <= lost <= 40  # up to two tidal days an hour
    assert_allclose(table.height_m, whole.height_m, atol=0.03)
    assert any("without a hole" in note for note in table.notes)


def test_weather_enters_the_errors() -> None:
    """Means of 20 years scatter as the errors of one say; hourly weather that forgets in four days, sd 10 cm."""
    rng = np.random.default_rng(9)
    t_h, height = series(1.0)
    tables = []
    for _ in range(20):
        shocks = rng.normal(0.0, 0.1 * np.sqrt(1 - np.exp(-2 / 96)), len(t_h) + 2000)
        weather = np.zeros(len(shocks))
        for i in range(1, len(shocks)):
            weather[i] = np.exp(-1 / 96) * weather[i - 1] + shocks[i]
        tables.append(datums_of_series(t_h, height + weather[2000:], 1.0))
    for name in ("MSL", "MHHW", "MLLW"):
        scatter = np.std([table.height(name) for table in tables], ddof=1)
        stated = np.mean([table.height_sd(name) for table in tables])
        # Twenty means know their scatter to 16 %, twelve months their own to 20 %.
        assert_allclose(stated, scatter, rtol=0.5)


def test_a_short_record_has_datums_without_errors() -> None:
    table = datums_of_series(*series(1.0, hours=24.0 * 40), 1.0)
    assert np.all(np.isnan(table.height_sd_m))
    assert any("no errors" in note for note in table.notes)


@pytest.mark.parametrize(
    ("t_h", "step_h", "match"),
    [
        (np.arange(0.0, 300.0, 3.0), 3.0, "one sample every 3 h"),
        (np.array([0.0, 1.0, 2.4, 3.0, 4.0]), 1.0, "1 of 5 times do not lie on a regular grid of 60 min"),
        (np.arange(0.0, 20.0), 1.0, "no whole tidal day in 19.0 h"),
        (np.array([1.0]), 1.0, "1 usable samples"),
    ],
)
def test_what_cannot_be_done_is_said(t_h: np.ndarray, step_h: float, match: str) -> None:
    with pytest.raises(AnalysisError, match=match):
        datums_of_series(t_h, np.cos(t_h / 2), step_h)
