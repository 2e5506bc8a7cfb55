"""Places on a coast line, against the geodesic formula of Vincenty (1975) and exact cases."""

from __future__ import annotations

from math import atan, atan2, cos, radians, sin, sqrt, tan

import pytest

from tidekit.errors import AnalysisError
from tidekit.records.coast_line import coast_position

FLAT_RATIO = 1e-3
"""A segment is taken flat: over 100 km at 50 degrees the chord and its scale err by less than this share."""


def vincenty_km(a: tuple[float, float], b: tuple[float, float]) -> float:
    """Distance on WGS 84.

    T. Vincenty, "Direct and inverse solutions of geodesics on the ellipsoid with application of nested equations",
    Survey Review 23 (176), 1975, equations 13 to 21 (typed from memory; checked below against a printed distance).
    """
    major, flat = 6378137.0, 1 / 298.257223563
    minor = major * (1 - flat)
    u1, u2 = atan((1 - flat) * tan(radians(a[0]))), atan((1 - flat) * tan(radians(b[0])))
    apart = radians(b[1] - a[1])
    lam = apart
    for _ in range(100):
        sin_sigma = sqrt((cos(u2) * sin(lam)) ** 2 + (cos(u1) * sin(u2) - sin(u1) * cos(u2) * cos(lam)) ** 2)
        if sin_sigma == 0:
            return 0.0
        cos_sigma = sin(u1) * sin(u2) + cos(u1) * cos(u2) * cos(lam)
        sigma = atan2(sin_sigma, cos_sigma)
        sin_alpha = cos(u1) * cos(u2) * sin(lam) / sin_sigma
        cos2_alpha = 1 - sin_alpha**2
        cos_2m = cos_sigma - 2 * sin(u1) * sin(u2) / cos2_alpha if cos2_alpha else 0.0
        c = flat / 16 * cos2_alpha * (4 + flat * (4 - 3 * cos2_alpha))
        lam = apart + (1 - c) * flat * sin_alpha * (
            sigma + c * sin_sigma * (cos_2m + c * cos_sigma * (2 * cos_2m**2 - 1))
        )
    k = cos2_alpha * (major**2 - minor**2) / minor**2
    big_a = 1 + k / 16384 * (4096 + k * (-768 + k * (320 - 175 * k)))
    big_b = k / 1024 * (256 + k * (-128 + k * (74 - 47 * k)))
    sixth = big_b / 6 * cos_2m * (4 * sin_sigma**2 - 3) * (4 * cos_2m**2 - 3)
    delta = big_b * sin_sigma * (cos_2m + big_b / 4 * (cos_sigma * (2 * cos_2m**2 - 1) - sixth))
    return minor * big_a * (sigma - delta) / 1000


def test_the_oracle_gives_the_length_of_a_degree() -> None:
    # The metre as first defined: a quarter meridian is 10 001.966 km on WGS 84.
    assert vincenty_km((0.0, 10.0), (89.999999, 10.0)) == pytest.approx(10001.966, abs=0.01)


@pytest.mark.parametrize("end", [(48.9, 5.0), (48.0, 6.3), (48.6, 5.9), (47.4, 4.2), (-48.0, 5.0), (0.4, 5.9)])
def test_along_a_segment_as_the_geodesic(end: tuple[float, float]) -> None:
    start = (48.0, 5.0) if end[0] > 1 else (-48.7, 4.6) if end[0] < 0 else (0.0, 5.0)
    along, offshore = coast_position([start, end], *end)
    assert along == pytest.approx(vincenty_km(start, end), rel=FLAT_RATIO)
    assert offshore == pytest.approx(0.0, abs=1e-9)


def test_offshore_distance_and_foot_on_a_bent_line() -> None:
    line = [(48.0, 5.0), (48.5, 5.0), (48.5, 6.0)]
    corner = vincenty_km(line[0], line[1])
    along, offshore = coast_position(line, 48.8, 5.5)
    assert along == pytest.approx(corner + vincenty_km((48.5, 5.0), (48.5, 5.5)), rel=FLAT_RATIO)
    assert offshore == pytest.approx(vincenty_km((48.5, 5.5), (48.8, 5.5)), rel=FLAT_RATIO)


def test_place_before_the_first_point_is_at_zero() -> None:
    along, offshore = coast_position([(48.0, 5.0), (49.0, 5.0)], 47.5, 5.0)
    assert along == 0.0
    assert offshore == pytest.approx(vincenty_km((48.0, 5.0), (47.5, 5.0)), rel=FLAT_RATIO)


def test_line_across_the_date_line() -> None:
    along, _ = coast_position([(-18.0, 179.5), (-18.0, -179.5)], -18.0, 180.0)
    assert along == pytest.approx(vincenty_km((-18.0, 179.5), (-18.0, 180.0)), rel=FLAT_RATIO)


@pytest.mark.parametrize(("line", "message"), [([(1.0, 2.0)], "two points"), ([(1.0, 2.0)] * 2, "distinct points")])
def test_line_that_is_none(line: list[tuple[float, float]], message: str) -> None:
    with pytest.raises(AnalysisError, match=message):
        coast_position(line, 0.0, 0.0)
