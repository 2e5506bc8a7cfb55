"""Free waves obey ``w^2 = f^2 + g h k^2`` (Gill 1982, section 8.2), and channels keep them out where it has no root."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.testing import assert_allclose

from tidekit.errors import AnalysisError
from tidekit.waves.inertia_gravity import (
    critical_width_km,
    evanescent_scale_km,
    frequency_rad_per_s,
    wavelength_km,
)
from tidekit.waves.kelvin import KelvinWave
from tidekit.waves.rotation import angular_speed_rad_per_s, coriolis_rad_per_s, inertial_latitude_deg

M2 = angular_speed_rad_per_s(28.9841042)
ROUNDING = 1e-9
"""Relative; roots of differences of squares lose some of double precision's digits."""


@given(st.floats(1.0, 8000.0), st.floats(-90.0, 90.0).filter(lambda x: abs(x) > 0.1), st.floats(1e-7, 1e-2))
def test_dispersion_relation(depth_m: float, latitude_deg: float, wavenumber: float) -> None:
    wave = KelvinWave(depth_m, latitude_deg)
    frequency = frequency_rad_per_s(wave, wavenumber)
    squares = wave.coriolis_rad_per_s**2 + wave.speed_m_per_s**2 * wavenumber**2
    assert_allclose(frequency**2, squares, rtol=ROUNDING)
    # Group times phase speed is g h: d(w^2)/d(k^2).
    step = 1e-4 * wavenumber
    group = (frequency_rad_per_s(wave, wavenumber + step) - frequency_rad_per_s(wave, wavenumber - step)) / (2 * step)
    assert_allclose(group * frequency / wavenumber, wave.speed_m_per_s**2, rtol=1e-5)  # differencing, and rounding


@given(st.floats(1.0, 8000.0), st.floats(-73.0, 73.0).filter(lambda x: abs(x) > 0.1))
def test_wavelength_is_the_root_of_the_dispersion_relation(depth_m: float, latitude_deg: float) -> None:
    wave = KelvinWave(depth_m, latitude_deg)
    wavenumber = 2 * math.pi / (1e3 * wavelength_km(wave, M2))
    assert_allclose(frequency_rad_per_s(wave, wavenumber), M2, rtol=ROUNDING)


@pytest.mark.parametrize("latitude_deg", [80.0, -80.0])
def test_no_free_wave_poleward_of_the_inertial_latitude(latitude_deg: float) -> None:
    wave = KelvinWave(50.0, latitude_deg)
    assert math.isinf(wavelength_km(wave, M2))
    assert math.isinf(critical_width_km(wave, M2))
    assert math.isfinite(evanescent_scale_km(wave, M2, 5000.0))


def test_a_mode_dies_below_its_critical_width_and_travels_above() -> None:
    wave = KelvinWave(50.0, 45.0)
    for mode in (1, 2, 3):
        width = critical_width_km(wave, M2, mode=mode)
        assert_allclose(width, mode * critical_width_km(wave, M2), rtol=1e-14)
        assert math.isinf(evanescent_scale_km(wave, M2, 1.001 * width, mode=mode))
        assert math.isfinite(evanescent_scale_km(wave, M2, 0.999 * width, mode=mode))
    # In a narrow channel the scale is the width over pi, whatever rotation does (Taylor 1921).
    assert_allclose(evanescent_scale_km(wave, M2, 1.0), 1.0 / math.pi, rtol=1e-5)


@given(st.floats(0.1, 90.0))
def test_inertial_latitude_inverts_the_coriolis_parameter(latitude_deg: float) -> None:
    for signed in (latitude_deg, -latitude_deg):
        assert_allclose(inertial_latitude_deg(coriolis_rad_per_s(signed)), latitude_deg, rtol=1e-6)  # flat at the pole
    assert math.isnan(inertial_latitude_deg(angular_speed_rad_per_s(57.9682084)))  # M4 is faster than any inertial


def test_wrong_requests_are_said() -> None:
    wave = KelvinWave(50.0, 45.0)
    with pytest.raises(AnalysisError, match="count from 1"):
        critical_width_km(wave, M2, mode=0)
    with pytest.raises(AnalysisError, match="count from 1"):
        evanescent_scale_km(wave, M2, 100.0, mode=0)
    for width in (0.0, -3.0, math.nan):
        with pytest.raises(AnalysisError, match="positive number of kilometres"):
            evanescent_scale_km(wave, M2, width)
