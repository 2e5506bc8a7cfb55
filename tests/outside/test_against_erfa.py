"""Time scales and mean longitudes against a general astronomy library, pyerfa (IAU SOFA's routines)."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from tidekit.astronomy.longitudes import mean_longitudes_rad, rates_deg_per_h
from tidekit.astronomy.timescales import hours_from_datetime64, julian_centuries_tt, tt_minus_utc_s

erfa = pytest.importorskip("erfa", reason="pyerfa comes with the extra `test`")

J2000 = 2451545.0
LONGITUDE_TOLERANCE_DEG = 1e-5
"""The bar; a degree of tau is four minutes of time, so this is 2.4 ms."""
EXACT_S = 1e-6  # leap seconds are whole; datetime64 keeps microseconds
HALF_CENTURIES_H = np.linspace(-876600.0, 876600.0, 2001)  # 1900 to 2100


@pytest.mark.parametrize("column", range(6), ids=["tau", "s", "h", "p", "N'", "p_s"])
def test_mean_longitudes(column: int) -> None:
    t = julian_centuries_tt(HALF_CENTURIES_H)
    s = erfa.faf03(t) + erfa.faom03(t)
    h = s - erfa.fad03(t)
    sidereal = erfa.gmst06(J2000 - 0.5, HALF_CENTURIES_H / 24.0, J2000, t * 36525.0)
    expected = [sidereal - s - np.pi, s, h, s - erfa.fal03(t), -erfa.faom03(t), h - erfa.falp03(t)][column]
    difference = np.exp(1j * (mean_longitudes_rad(HALF_CENTURIES_H)[:, column] - expected))
    assert_allclose(np.rad2deg(np.angle(difference)), 0.0, atol=LONGITUDE_TOLERANCE_DEG)


def test_rates_are_those_of_the_longitudes() -> None:
    hours = np.array([12.0 - 50.0, 12.0 + 50.0])
    change = np.rad2deg(np.diff(mean_longitudes_rad(hours), axis=0)[0]) / 100.0
    assert_allclose(rates_deg_per_h(), change, atol=1e-10)  # differences of 1e5 degrees in double precision


def test_leap_seconds() -> None:
    for year, month, tai_minus_utc in erfa.leap_seconds.get():
        if year >= 1972:
            after = hours_from_datetime64(np.array([f"{year}-{month:02d}-01T00:00:01"], dtype="datetime64[us]"))
            assert_allclose(tt_minus_utc_s(after), tai_minus_utc + 32.184, atol=EXACT_S)


def test_before_leap_seconds_utc_is_near_universal_time() -> None:
    """From 1961 the library knows TAI - UTC; UTC then kept within 0.15 s of universal time."""
    for year in range(1961, 1972):
        t_h = hours_from_datetime64(np.array([f"{year}-07-01"], dtype="datetime64[us]"))
        assert_allclose(tt_minus_utc_s(t_h), erfa.dat(year, 7, 1, 0.0) + 32.184, atol=0.5)


def test_the_step_into_leap_seconds_is_small() -> None:
    edges = hours_from_datetime64(np.array(["1971-12-31T23:59:59", "1972-01-01T00:00:01"], dtype="datetime64[us]"))
    assert abs(float(np.diff(tt_minus_utc_s(edges))[0])) < 0.5


@pytest.mark.parametrize(("year", "seconds"), [(1900, -2.7), (1920, 21.2), (1950, 29.1), (1965, 35.7)])
def test_delta_t_before_leap_seconds(year: int, seconds: float) -> None:
    """Observed Delta T as printed in the Astronomical Almanac's table (from memory), to a tenth of a second."""
    t_h = hours_from_datetime64(np.array([f"{year}-01-01"], dtype="datetime64[us]"))
    assert_allclose(tt_minus_utc_s(t_h), seconds, atol=0.5)
