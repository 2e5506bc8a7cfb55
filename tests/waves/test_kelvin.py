"""The Kelvin wave satisfies the equations it solves, and travel times equal numerical quadrature (scipy)."""

import math
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.testing import assert_allclose
from scipy.integrate import quad

from tidekit.errors import AnalysisError
from tidekit.waves.kelvin import KelvinWave, travel_time_h
from tidekit.waves.rotation import GRAVITY_M_PER_S2, coriolis_rad_per_s

M2_DEG_PER_H = 28.9841042
QUADRATURE = 1e-9
"""Relative; scipy's quadrature is asked for 1e-11 between the kinks."""
DIFFERENCING = 1e-6
"""Relative error of the central differences below: (step over scale) squared, and rounding."""


@pytest.mark.parametrize("latitude_deg", [50.0, -50.0])
def test_it_satisfies_the_shallow_water_equations(latitude_deg: float) -> None:
    # u_t - f v = -g z_x, v_t + f u = -g z_y, z_t + h (u_x + v_y) = 0 (Gill 1982, section 10.4), with u = 0. Here y is
    # the way of travel and x points to sea: with the coast on the right that is a left-handed pair (north), with it
    # on the left a right-handed one and f negative (south), so that |f| v = -g z_x in both.
    wave = KelvinWave(80.0, latitude_deg)
    rate = math.radians(M2_DEG_PER_H) / 3600.0

    def height(x_km: float, y_km: float, t_s: float) -> float:
        lag = math.radians(float(wave.lag_deg(y_km, M2_DEG_PER_H)))
        return float(wave.amplitude_ratio(x_km)) * math.cos(rate * t_s - lag)

    def current(x_km: float, y_km: float, t_s: float) -> float:
        return float(wave.current_m_per_s(height(x_km, y_km, t_s)))

    x, y, t, km, second = 30.0, 110.0, 5000.0, 0.1, 5.0
    slope_x = (height(x + km, y, t) - height(x - km, y, t)) / (2e3 * km)
    slope_y = (height(x, y + km, t) - height(x, y - km, t)) / (2e3 * km)
    rise = (height(x, y, t + second) - height(x, y, t - second)) / (2 * second)
    speeding = (current(x, y, t + second) - current(x, y, t - second)) / (2 * second)
    stretch = (current(x, y + km, t) - current(x, y - km, t)) / (2e3 * km)
    assert_allclose(abs(wave.coriolis_rad_per_s) * current(x, y, t), -GRAVITY_M_PER_S2 * slope_x, rtol=DIFFERENCING)
    assert_allclose(speeding, -GRAVITY_M_PER_S2 * slope_y, rtol=DIFFERENCING)
    assert_allclose(rise, -wave.depth_m * stretch, rtol=DIFFERENCING)


@given(st.floats(1.0, 8000.0), st.floats(1.0, 90.0))
def test_hemispheres_mirror_each_other(depth_m: float, latitude_deg: float) -> None:
    north, south = KelvinWave(depth_m, latitude_deg), KelvinWave(depth_m, -latitude_deg)
    assert (north.coast_side, south.coast_side) == ("right", "left")
    assert north.speed_m_per_s == south.speed_m_per_s
    assert north.rossby_radius_km == south.rossby_radius_km
    assert north.coriolis_rad_per_s == -south.coriolis_rad_per_s


@given(st.floats(1.0, 8000.0), st.floats(1.0, 90.0), st.floats(0.04, 120.0))
def test_speed_is_wavelength_over_period(depth_m: float, latitude_deg: float, speed_deg_per_h: float) -> None:
    wave = KelvinWave(depth_m, latitude_deg)
    length = wave.wavelength_km(speed_deg_per_h)
    assert_allclose(length * speed_deg_per_h / 360.0 / 3.6, wave.speed_m_per_s, rtol=1e-12)
    assert_allclose(wave.lag_deg(length, speed_deg_per_h), 360.0, rtol=1e-12)


def test_amplitude_falls_to_one_over_e_in_a_radius() -> None:
    wave = KelvinWave(60.0, -41.2)
    assert_allclose(wave.amplitude_ratio([0.0, wave.rossby_radius_km]), [1.0, math.exp(-1.0)], rtol=1e-14)


def test_wrong_requests_are_said() -> None:
    for depth in (0.0, -5.0, math.inf, math.nan):
        with pytest.raises(AnalysisError, match="wanted a positive number of metres"):
            KelvinWave(depth, 45.0)
    with pytest.raises(AnalysisError, match="on the equator"):
        KelvinWave(50.0, 0.0)
    for latitude in (91.0, math.nan):
        with pytest.raises(AnalysisError, match="wanted -90 to 90"):
            coriolis_rad_per_s(latitude)
    with pytest.raises(AnalysisError, match="wanted 0 or more"):
        KelvinWave(50.0, 45.0).amplitude_ratio([3.0, -1.0])


positions = st.lists(st.floats(-500.0, 2500.0), min_size=2, max_size=7, unique_by=round)


@given(positions, st.data())
def test_travel_time_is_the_integral_of_slowness(along_km: list[float], data: st.DataObject) -> None:
    along_km.sort()
    depth_m = data.draw(st.lists(st.floats(3.0, 6000.0), min_size=len(along_km), max_size=len(along_km)))
    start, end = data.draw(st.floats(-700.0, 2700.0)), data.draw(st.floats(-700.0, 2700.0))

    def slowness_h_per_km(x_km: float) -> float:
        return 1e3 / 3600.0 / math.sqrt(GRAVITY_M_PER_S2 * float(np.interp(x_km, along_km, depth_m)))

    # Piece by piece between the kinks, which quadrature would miss.
    low, high = sorted((start, end))
    knots = [low, *(x for x in along_km if low < x < high), high]
    pieces = [quad(slowness_h_per_km, a, b, epsabs=1e-13, epsrel=1e-11)[0] for a, b in pairwise(knots)]
    wanted = math.copysign(sum(pieces), end - start)
    found = travel_time_h(along_km, depth_m, start, end)
    assert_allclose(found, wanted, rtol=QUADRATURE, atol=1e-12)
    assert_allclose(travel_time_h(along_km, depth_m, end, start), -found, rtol=1e-12)


def test_travel_time_over_one_depth_is_distance_over_speed() -> None:
    hours = travel_time_h([0.0, 100.0], [60.0, 60.0], -50.0, 400.0)
    assert_allclose(hours, 450e3 / KelvinWave(60.0, 45.0).speed_m_per_s / 3600.0, rtol=1e-14)


@pytest.mark.parametrize(
    ("along_km", "depth_m", "said"),
    [
        ([0.0, 0.0], [5.0, 5.0], "increasing positions"),
        ([0.0, 9.0], [5.0, 0.0], "positive depths"),
        ([0.0, 9.0], [5.0, math.nan], "positive depths"),
        ([0.0, 9.0, 12.0], [5.0, 6.0], "3 positions and 2 depths"),
        ([0.0], [5.0], "at least 2"),
    ],
)
def test_travel_time_wants_a_sound_profile(along_km: list[float], depth_m: list[float], said: str) -> None:
    with pytest.raises(AnalysisError, match=said):
        travel_time_h(along_km, depth_m, 0.0, 5.0)
