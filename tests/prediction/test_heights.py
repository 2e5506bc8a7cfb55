"""Heights and derivatives against the plain sum over carriers and against closed forms."""

from dataclasses import replace

import numpy as np
import pytest
from numpy.testing import assert_allclose

from tidekit.constituents.catalogue import catalogue, speeds_deg_per_h
from tidekit.constituents.constants import HarmonicConstants, NodalConvention
from tidekit.constituents.modulation import carriers
from tidekit.errors import AnalysisError
from tidekit.prediction.heights import acceleration_m_per_h2, predict_heights, rate_m_per_h

BLOCK_TOLERANCE_M = 2e-5
"""The chord of a block strays by 2e-4 of a side line at most: here 68 constituents of a decimetre or less."""
RATE_TOLERANCE = 1e-6
"""Central differences over 36 s: truncation (0.01 h)^2 / 6 times the third derivative, some 1e-6 m/h."""

S2_CLOCK_DEG = 0.016
"""The mean sun of Universal Time stands 20.5 arcseconds (aberration) from h, and UTC up to 0.9 s from UT1: 0.012
and 0.004 degrees of S2's own angle."""


def some_constants(names: list[str], *, seed: int = 5, nodal: NodalConvention = "exact") -> HarmonicConstants:
    rng = np.random.default_rng(seed)
    unknown = np.full(len(names), np.nan)
    return HarmonicConstants(
        names=tuple(names),
        amplitude_m=rng.uniform(0.01, 0.1, len(names)),
        phase_lag_deg=rng.uniform(0.0, 360.0, len(names)),
        amplitude_sd_m=unknown,
        phase_lag_sd_deg=unknown,
        basis=("fitted",) * len(names),
        mean_level_m=1.25,
        nodal=nodal,
    )


ALL = some_constants(list(catalogue()))


def plain_sum(constants: HarmonicConstants, t_h: np.ndarray) -> np.ndarray:
    factors = carriers(constants.names, t_h, nodal=constants.nodal)
    return constants.mean_level_m + (factors @ constants.phasors_m).real


@pytest.mark.parametrize("nodal", ["exact", "mid_year"])
@pytest.mark.parametrize(
    "t_h",
    [
        np.arange(-3 * 8766.0, 3 * 8766.0, 7.0),
        np.delete(np.arange(8000.0, 9500.0, 0.1), np.r_[5:9, 700:4000]),
        np.random.default_rng(1).uniform(-50000.0, 50000.0, 2000),
        np.array([3.0]),
        np.array([10.0, 3.0]),
        np.array([5.0, 5.0, 5.0]),
    ],
    ids=["coarse grid over years", "fine grid with holes", "scattered", "one", "two, reversed", "one thrice"],
)
def test_against_the_plain_sum(t_h: np.ndarray, nodal: NodalConvention) -> None:
    constants = replace(ALL, nodal=nodal)
    heights = predict_heights(constants, t_h)
    assert_allclose(heights, plain_sum(constants, t_h), atol=BLOCK_TOLERANCE_M, rtol=0)


def test_override_of_the_nodal_convention() -> None:
    t_h = np.arange(0.0, 500.0, 1.0)
    overridden = predict_heights(ALL, t_h, nodal="mid_year")
    assert_allclose(overridden, predict_heights(replace(ALL, nodal="mid_year"), t_h), atol=0, rtol=0)
    assert np.ptp(overridden - predict_heights(ALL, t_h)) > 1e-3


@pytest.mark.parametrize("nodal", ["exact", "mid_year"])
def test_derivatives_against_differences(nodal: NodalConvention) -> None:
    t_h = np.random.default_rng(2).uniform(-50000.0, 50000.0, 300)
    constants = replace(some_constants(["Sa", "O1", "K1", "M2", "K2", "M4", "M6"]), nodal=nodal)
    step = 0.005

    def height(times: np.ndarray) -> np.ndarray:
        return predict_heights(constants, times)

    slope = (height(t_h + step) - height(t_h - step)) / (2 * step)
    assert_allclose(rate_m_per_h(constants, t_h), slope, atol=2 * RATE_TOLERANCE, rtol=0)
    bend = (rate_m_per_h(constants, t_h + step) - rate_m_per_h(constants, t_h - step)) / (2 * step)
    assert_allclose(acceleration_m_per_h2(constants, t_h), bend, atol=4 * RATE_TOLERANCE, rtol=0)


def test_s2_is_a_cosine_of_clock_time() -> None:
    """S2 in closed form: V is twice the mean sun's hour angle, 30 degrees an hour from 0 at midnight UT.

    Without modulation (mid-year convention: f = 1, u = 0) high water of lag G is G / 30 hours after midnight.
    """
    constants = replace(some_constants(["S2"]), amplitude_m=np.array([0.7]), phase_lag_deg=np.array([75.0]))
    t_h = np.arange(0.0, 48.0, 0.5)
    expected = 1.25 + 0.7 * np.cos(np.deg2rad(30.0 * t_h - 75.0))
    predicted = predict_heights(constants, t_h, nodal="mid_year")
    assert_allclose(predicted, expected, atol=0.7 * np.deg2rad(S2_CLOCK_DEG), rtol=0)


def test_no_amplitude_leaves_the_mean_level() -> None:
    still = replace(ALL, amplitude_m=np.zeros(len(ALL.names)))
    assert_allclose(predict_heights(still, [0.0, 10.0]), [1.25, 1.25], atol=0)
    assert predict_heights(ALL, []).shape == (0,)


def test_the_height_has_no_seam_within_the_exact_convention() -> None:
    t_h = np.arange(200.0, 300.0, 0.001)  # over the edge of the first block
    steps = np.diff(predict_heights(ALL, t_h))
    fastest = np.deg2rad(speeds_deg_per_h(ALL.names)) @ ALL.amplitude_m * 1.5
    assert np.abs(steps).max() < fastest * 0.001


def test_times_must_be_finite() -> None:
    with pytest.raises(AnalysisError, match="1 of 2 times are not finite"):
        predict_heights(ALL, [0.0, np.nan])
