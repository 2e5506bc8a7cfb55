"""High and low waters against closed forms and against dense sampling."""

from dataclasses import replace

import numpy as np
import pytest
from numpy.testing import assert_allclose

from tidekit.constituents.catalogue import resolve
from tidekit.constituents.constants import HarmonicConstants, NodalConvention
from tidekit.constituents.modulation import arguments_rad
from tidekit.errors import AnalysisError
from tidekit.prediction.heights import predict_heights, rate_m_per_h
from tidekit.prediction.turning_points import TurningPoints, safeguarded_newton, turning_points

SECOND_H = 1.0 / 3600.0
MICROMETRE_M = 1e-6


def constants_of(parts: dict[str, tuple[float, float]], *, nodal: NodalConvention = "mid_year") -> HarmonicConstants:
    """Constants with amplitude [m] and phase lag [degrees] of each name, mean level 2 m."""
    unknown = np.full(len(parts), np.nan)
    return HarmonicConstants(
        names=tuple(parts),
        amplitude_m=np.array([h for h, _ in parts.values()]),
        phase_lag_deg=np.array([g for _, g in parts.values()]),
        amplitude_sd_m=unknown,
        phase_lag_sd_deg=unknown,
        basis=("fitted",) * len(parts),
        mean_level_m=2.0,
        nodal=nodal,
    )


def dense_turns(constants: HarmonicConstants, start_h: float, end_h: float, step_h: float) -> TurningPoints:
    """The obvious way: changes of sign among dense samples of the rate."""
    t_h = np.arange(start_h, end_h, step_h)
    rising = rate_m_per_h(constants, t_h) >= 0.0
    turn = np.flatnonzero(rising[:-1] != rising[1:])
    middle = t_h[turn] + 0.5 * step_h
    return TurningPoints(t_h=middle, height_m=predict_heights(constants, middle), is_high=rising[turn])


def clock_lag_deg(name: str, high_at_h: float = 0.0) -> float:
    """Phase lag that puts a high water of an unmodulated constituent at this time on 2000-01-01."""
    return float(np.mod(np.rad2deg(arguments_rad([name], [high_at_h])[0, 0]), 360.0))


def test_one_constituent_in_closed_form() -> None:
    """S2: high waters 12 h apart, lows six hours later, amplitude about the mean level of 2 m."""
    points = turning_points(constants_of({"S2": (0.7, clock_lag_deg("S2", 2.5))}), 0.0, 240.0)
    assert_allclose(points.t_h, 2.5 + 6.0 * np.arange(40), atol=SECOND_H, rtol=0)
    assert_allclose(points.height_m, np.tile([2.7, 1.3], 20), atol=MICROMETRE_M, rtol=0)
    assert points.is_high.tolist() == [True, False] * 20


def test_two_constituents_in_closed_form() -> None:
    """The sum cos x + a cos 2x turns at x = 0, pi and, where a > 1/4, also where cos x = -1 / (4a).

    S2 and S4 (its double, by make-up 2*S2) of zero lag with a = 1/2: double low waters of height -3/4 at
    cos x = -1/2, that is 4 h and 8 h after high water, about a high of -1/2 at 6 h.
    """
    points = turning_points(
        constants_of({"S2": (1.0, clock_lag_deg("S2")), "S4": (0.5, clock_lag_deg("S4"))}), -1.0, 23.0
    )
    assert_allclose(points.t_h, [0, 4, 6, 8, 12, 16, 18, 20], atol=SECOND_H, rtol=0)
    assert_allclose(points.height_m - 2.0, [1.5, -0.75, -0.5, -0.75] * 2, atol=MICROMETRE_M, rtol=0)
    assert points.is_high.tolist() == [True, False] * 4


@pytest.mark.parametrize(
    ("ratio", "waters"), [(0.2499, 4), (0.2501, 8), (0.251, 8)], ids=["just single", "just double", "double"]
)
def test_the_birth_of_a_double_low_water(ratio: float, waters: int) -> None:
    """The double low of cos x + a cos 2x appears at a = 1/4; near it two turns lie minutes apart."""
    parts = {"S2": (1.0, clock_lag_deg("S2")), "S4": (ratio, clock_lag_deg("S4"))}
    points = turning_points(constants_of(parts), -1.0, 23.0)
    assert len(points) == waters
    assert np.all(points.is_high[:-1] != points.is_high[1:])


MIXED = {"M2": (0.58, 208.0), "S2": (0.14, 216.0), "N2": (0.12, 183.0), "K1": (0.37, 225.0), "O1": (0.23, 208.0)}
DIURNAL = {"K1": (0.40, 30.0), "O1": (0.39, 300.0), "P1": (0.12, 28.0), "M2": (0.03, 10.0), "Sa": (0.10, 150.0)}
DOUBLE = {"M2": (0.45, 0.0), "S2": (0.15, 50.0), "M4": (0.20, 130.0), "M6": (0.08, 80.0), "M8": (0.02, 0.0)}
CASES = {"mixed": MIXED, "diurnal, vanishing fortnightly": DIURNAL, "double waters": DOUBLE}


@pytest.mark.parametrize("nodal", ["exact", "mid_year"])
@pytest.mark.parametrize("parts", CASES.values(), ids=CASES)
def test_against_dense_sampling(parts: dict[str, tuple[float, float]], nodal: NodalConvention) -> None:
    """A year and a half over two New Years, sampled every 18 s."""
    constants = constants_of(parts, nodal=nodal)
    start, end, step = 8000.3, 8000.3 + 13200.0, 0.005
    found, dense = turning_points(constants, start, end), dense_turns(constants, start, end, step)
    assert len(found) == len(dense)
    assert found.is_high.tolist() == dense.is_high.tolist()
    assert_allclose(found.t_h, dense.t_h, atol=step, rtol=0)
    assert_allclose(found.height_m, dense.height_m, atol=1e-5, rtol=0)  # the curvature over 9 s
    assert np.abs(rate_m_per_h(constants, found.t_h)).max() < 1e-6


def test_every_water_of_a_rich_tide_alternates_and_is_extreme() -> None:
    names = ["2Q1", "Q1", "O1", "M1", "K1", "J1", "mu2", "N2", "M2", "L2", "S2", "K2", "M3", "M4", "MS4", "M6", "M8"]
    rng = np.random.default_rng(8)
    parts = {n: (float(rng.uniform(0.05, 0.3)) / max(1, resolve(n).species), 360 * float(rng.random())) for n in names}
    constants = constants_of(parts, nodal="exact")
    points = turning_points(constants, 0.0, 6 * 8766.0)
    assert np.all(points.is_high[:-1] != points.is_high[1:])
    for offset in (-0.05, 0.05):
        beside = predict_heights(constants, points.t_h + offset)
        lower = beside < points.height_m
        near_flat = np.abs(beside - points.height_m) < 1e-5
        assert np.all((lower == points.is_high) | near_flat)


def test_the_end_of_a_year_breaks_no_alternation() -> None:
    """Mid-year factors jump at New Year, here right at a high water."""
    constants = constants_of(MIXED)
    new_year = 15 * 8766.0 - 6.0  # 2015-01-01 00:00: 15 years with 4 leap days
    highs = turning_points(constants, new_year - 30.0, new_year + 30.0)
    nearest = highs.t_h[np.argmin(np.abs(highs.t_h - new_year))] - new_year
    for shift in np.linspace(nearest - 0.01, nearest + 0.01, 21):
        lags = constants.phase_lag_deg - shift * np.array([resolve(n).speed_deg_per_h for n in constants.names])
        points = turning_points(replace(constants, phase_lag_deg=np.mod(lags, 360.0)), new_year - 60.0, new_year + 60.0)
        assert np.all(points.is_high[:-1] != points.is_high[1:])


def test_what_does_not_move_has_no_waters() -> None:
    assert len(turning_points(constants_of({"M2": (0.0, 0.0)}), 0.0, 100.0)) == 0
    assert len(turning_points(constants_of({"Sa": (0.1, 0.0)}), 0.0, 24.0)) <= 1


def test_the_period_must_run_forward() -> None:
    with pytest.raises(AnalysisError, match="must end after its start"):
        turning_points(constants_of(MIXED), 10.0, 10.0)


def test_newton_falls_back_to_bisection() -> None:
    """The cube root's slope sends Newton's method away from its root; bisection holds it."""
    target = np.array([0.3, -0.7, 0.999])

    def cube_root(which: np.ndarray, x: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        away = x - target[which]
        return np.cbrt(away), np.abs(away) ** (-2 / 3) / 3

    roots = safeguarded_newton(cube_root, np.full(3, -1.0), np.full(3, 1.0))
    assert_allclose(roots, target, atol=2e-6, rtol=0)


def test_table_of_turning_points() -> None:
    frame = turning_points(constants_of({"S2": (0.7, clock_lag_deg("S2", 2.5))}), 0.0, 12.0).to_frame()
    assert frame["kind"].tolist() == ["high", "low"]
    assert str(frame["time"].dt.round("s")[0]) == "2000-01-01 02:30:00+00:00"
