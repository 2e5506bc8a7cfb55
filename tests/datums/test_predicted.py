"""Predicted datums: closed forms, dense heights, and errors against repeated draws."""

from dataclasses import replace

import numpy as np
import pytest
from numpy.testing import assert_allclose

from tidekit.constituents.constants import HarmonicConstants
from tidekit.datums.formulae import form_number
from tidekit.datums.predicted import EPOCH_YEARS, predicted_datums
from tidekit.datums.table import RANGES
from tidekit.errors import AnalysisError
from tidekit.prediction.heights import predict_heights

MILLIMETRE = 1e-3
DRAWS = 100
SD_TOLERANCE = 0.28
"""A standard deviation of 100 draws is good to 1 / sqrt(200) = 7 %: four of that."""


def constants_of(parts: dict[str, tuple[float, float, float, float]]) -> HarmonicConstants:
    """Amplitude and its sd [m], phase lag and its sd [degrees] of each name; mean level 1.2 m, sd 2 cm."""
    columns = np.array(list(parts.values())).T
    return HarmonicConstants(
        names=tuple(parts),
        amplitude_m=columns[0],
        amplitude_sd_m=columns[1],
        phase_lag_deg=columns[2],
        phase_lag_sd_deg=columns[3],
        basis=("fitted",) * len(parts),
        mean_level_m=1.2,
        mean_level_sd_m=0.02,
        vertical_reference="staff zero",
    )


MIXED = constants_of(
    {
        "M2": (0.80, 0.010, 205.0, 0.8),
        "S2": (0.25, 0.010, 230.0, 2.0),
        "K1": (0.32, 0.012, 40.0, 2.0),
        "O1": (0.20, 0.012, 20.0, 3.0),
        "Sa": (0.08, 0.020, 150.0, 12.0),
    }
)
DIURNAL = constants_of({"K1": (0.4, 0.01, 40.0, 2.0), "O1": (0.3, 0.01, 20.0, 2.0), "M2": (0.02, 0.005, 0.0, 20.0)})


def test_one_unmodulated_constituent() -> None:
    """S2 alone under the mid-year convention never changes: every high water is Z0 + S2, every low Z0 - S2."""
    s2 = replace(constants_of({"S2": (0.5, 0.01, 75.0, 1.0)}), nodal="mid_year")
    table = predicted_datums(s2, years=(2000, 2001))
    for name in ("HAT", "MHHW", "MHW"):
        assert_allclose(table.height(name), 1.7, atol=MILLIMETRE)
        # At the vertex the phase lag does not matter: the errors of Z0 and of the amplitude are left.
        assert_allclose(table.height_sd(name), np.hypot(0.02, 0.01), rtol=1e-6)
    for name in ("LAT", "MLLW", "MLW"):
        assert_allclose(table.height(name), 0.7, atol=MILLIMETRE)
    assert_allclose([table.height(n) for n in ("MSL", "MTL", "DTL")], 1.2, atol=MILLIMETRE)
    # The mean level falls out of a range, twice the amplitude's error stays.
    assert_allclose([table.height(n) for n in RANGES], [1.0, 1.0, 0.0, 0.0], atol=MILLIMETRE)
    assert_allclose(table.height_sd("MN"), 0.02, rtol=1e-6)
    assert_allclose(table.height_sd("MTL"), 0.02, rtol=1e-6)


def test_springs_neaps_and_indian_low_water_by_their_formulae() -> None:
    """Pugh (1987) and Darwin (from memory): Z0 +- (M2 + S2), Z0 +- (M2 - S2), Z0 - (M2 + S2 + K1 + O1)."""
    table = predicted_datums(MIXED, years=(2000, 2000))
    expected = {"MHWS": 2.25, "MLWS": 0.15, "MHWN": 1.75, "MLWN": 0.65, "ISLW": -0.37}
    for name, height in expected.items():
        assert_allclose(table.height(name), height, atol=1e-9)
        assert table.methods[table.names.index(name)].startswith("sum of constants: Z0")
    assert_allclose(table.height_sd("MHWS"), np.sqrt(0.02**2 + 2 * 0.01**2), rtol=1e-9)
    assert_allclose(table.height_sd("ISLW"), np.sqrt(0.02**2 + 2 * 0.01**2 + 2 * 0.012**2), rtol=1e-9)


def test_extremes_against_heights_every_six_minutes() -> None:
    table = predicted_datums(MIXED)
    start = 24.0 * float(
        (np.datetime64(f"{EPOCH_YEARS[0]}-01-01") - np.datetime64("2000-01-01")) / np.timedelta64(1, "D")
    )
    days = int((np.datetime64("2002-01-01") - np.datetime64("1983-01-01")) / np.timedelta64(1, "D"))
    height = predict_heights(MIXED, start + np.arange(0.0, 24.0 * days, 0.1))
    # In the three minutes from a sample to its vertex a tide of 1.6 m moves by 1.6 m (0.5 / h x 0.05 h)^2 / 2.
    assert_allclose([table.height("HAT"), table.height("LAT")], [height.max(), height.min()], atol=MILLIMETRE)
    assert_allclose(height.mean(), table.height("MSL"), atol=MILLIMETRE)


def test_the_order_of_the_levels() -> None:
    table = predicted_datums(MIXED)
    falling = ["HAT", "MHHW", "MHW", "MSL", "MLW", "MLLW", "LAT"]
    assert np.all(np.diff([table.height(n) for n in falling]) < 0)
    frame = table.to_frame()
    assert list(frame.columns) == ["gauge", "datum", "height_m", "height_sd_m", "method"]
    assert len(set(frame["datum"])) == len(frame) == 18
    assert all(str(year) in table.methods[0] for year in EPOCH_YEARS)
    assert table.details["hat_time"] != table.details["lat_time"]
    assert table.vertical_reference == "staff zero"


@pytest.mark.parametrize("constants", [MIXED, DIURNAL], ids=["mixed", "diurnal"])
def test_errors_against_repeated_draws(constants: HarmonicConstants) -> None:
    """Datums of constants drawn from their errors scatter as the table says; ranks and times may change freely."""
    years = (2004, 2004)
    table = predicted_datums(constants, years=years)
    rng = np.random.default_rng(11)
    drawn = []
    for _ in range(DRAWS):
        other = replace(
            constants,
            amplitude_m=np.abs(rng.normal(constants.amplitude_m, constants.amplitude_sd_m)),
            phase_lag_deg=rng.normal(constants.phase_lag_deg, constants.phase_lag_sd_deg),
            mean_level_m=rng.normal(constants.mean_level_m, constants.mean_level_sd_m),
        )
        drawn.append(predicted_datums(other, years=years).height_m)
    scatter = np.std(drawn, axis=0)
    levels = [i for i, name in enumerate(table.names) if name not in RANGES]
    assert_allclose(table.height_sd_m[levels], scatter[levels], rtol=SD_TOLERANCE)


def test_notes_say_what_is_lacking() -> None:
    bare = replace(
        MIXED, amplitude_sd_m=np.full(5, np.nan), phase_lag_sd_deg=np.full(5, np.nan), mean_level_sd_m=np.nan
    )
    table = predicted_datums(bare, years=(2000, 2001))
    assert np.all(np.isnan(table.height_sd_m))
    assert any("without standard deviations" in note for note in table.notes)
    assert any("2 years are less than a nodal cycle" in note for note in table.notes)
    some = MIXED.amplitude_sd_m.copy()
    some[4] = np.nan
    partly = predicted_datums(replace(MIXED, amplitude_sd_m=some), years=(2000, 2001))
    assert np.all(np.isfinite(partly.height_sd_m))
    assert any("leave out those of Sa" in note for note in partly.notes)
    diurnal = predicted_datums(DIURNAL, years=(2000, 2001))
    assert any("mainly diurnal" in note for note in diurnal.notes)
    assert any("no seasonal constituents" in note for note in diurnal.notes)
    assert "MHWS" not in diurnal.names  # no S2


def test_a_constituent_lost_in_the_noise_is_as_uncertain_across_as_along() -> None:
    lag_sd = MIXED.phase_lag_sd_deg.copy()
    lag_sd[3] = np.nan
    filled = lag_sd.copy()
    filled[3] = np.rad2deg(MIXED.amplitude_sd_m[3] / MIXED.amplitude_m[3])
    one, other = (predicted_datums(replace(MIXED, phase_lag_sd_deg=sd), years=(2000, 2000)) for sd in (lag_sd, filled))
    assert_allclose(one.height_sd_m, other.height_sd_m, rtol=1e-12)
    assert not any("leave out" in note for note in one.notes)


def test_form_number_and_type() -> None:
    """0.52 / 1.05 = 0.495 is mixed, mainly semidiurnal (0.25 to 1.5)."""
    assert_allclose(form_number(MIXED), 0.52 / 1.05, rtol=1e-12)
    table = predicted_datums(MIXED, years=(2000, 2000))
    assert table.details["tide_type"] == "mixed, mainly semidiurnal"
    assert predicted_datums(DIURNAL, years=(2000, 2000)).details["tide_type"] == "diurnal"


def test_years_must_run_forward() -> None:
    with pytest.raises(AnalysisError, match="years run from 2001 to 1983"):
        predicted_datums(MIXED, years=(2001, 1983))


def test_no_tide_has_no_datums() -> None:
    still = replace(MIXED, amplitude_m=np.full(5, 0.001))
    with pytest.raises(AnalysisError, match="no high and low waters"):
        predicted_datums(still, years=(2000, 2000))
