"""The theory of a coast: effective depths against an exact solution, quadrature, and the way the wave must go."""

import math
from itertools import pairwise

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.integrate import quad

from tidekit.network.coast import CoastTheory, coast_bearing_deg, coast_theory
from tidekit.records.network import CoastSpec, Side
from tidekit.records.station import Station

SHELF_TOLERANCE = 0.015
"""Relative: the effective depth is of first order in the shelf's width over the trapping scale, 6 to 14 % here."""


def stations(latitude_deg: float, *, along_km: tuple[float, ...] = (0.0, 100.0, 300.0)) -> list[Station]:
    return [
        Station(id=f"g{n}", latitude_deg=latitude_deg + x / 111.2, longitude_deg=88.0, along_coast_km=x)
        for n, x in enumerate(along_km)
    ]


def theory(coast: CoastSpec, gauges: list[Station]) -> CoastTheory:
    found = coast_theory(coast, gauges)
    assert found is not None
    return found


@pytest.mark.parametrize(
    ("latitude_deg", "shelf_m", "deep_m", "width_km", "speed_m_per_s"),
    [
        (32.0, 200.0, 4000.0, 80.0, 192.1500),
        (32.0, 600.0, 3600.0, 150.0, 178.1448),
        (45.0, 200.0, 3000.0, 60.0, 165.7559),
    ],
)
def test_a_step_shelf_slows_the_wave(
    latitude_deg: float, shelf_m: float, deep_m: float, width_km: float, speed_m_per_s: float
) -> None:
    # Step shelf with divergence after Munk, Snodgrass and Wimbush (1970): K1 speeds, computed from matching conditions.
    profile = ((0.0, shelf_m), (width_km, shelf_m), (width_km + 0.001, deep_m), (2 * width_km, deep_m))
    found = theory(CoastSpec(side="right", depth_cross_shore=profile), stations(latitude_deg, along_km=(0.0, 0.1)))
    assert_allclose(found.wave.speed_m_per_s, speed_m_per_s, rtol=SHELF_TOLERANCE)
    assert "weighted by the energy" in found.depth_note


def test_trapped_depth_is_the_mean_under_its_own_decay() -> None:
    profile = ((0.0, 30.0), (40.0, 120.0), (90.0, 2000.0))
    found = theory(CoastSpec(side="right", depth_cross_shore=profile), stations(45.0))
    radius = found.wave.rossby_radius_km
    knots = [0.0, 40.0, 90.0, 12 * radius]

    def weighted(x: float) -> float:
        return float(np.interp(x, *zip(*profile, strict=True))) * math.exp(-2 * x / radius) * 2 / radius

    mean = sum(quad(weighted, a, b)[0] for a, b in pairwise(knots))
    assert_allclose(found.wave.depth_m, mean, rtol=1e-8)


def test_depth_along_the_coast_keeps_the_travel_time() -> None:
    profile = ((0.0, 20.0), (150.0, 200.0), (300.0, 50.0))
    found = theory(CoastSpec(side="right", depth_along_coast=profile), stations(45.0))

    def slowness(x: float) -> float:
        return 1.0 / math.sqrt(9.81 * float(np.interp(x, *zip(*profile, strict=True))))

    wanted = 300.0 / (quad(slowness, 0.0, 150.0)[0] + quad(slowness, 150.0, 300.0)[0])
    assert_allclose(found.wave.speed_m_per_s, wanted, rtol=1e-9)


@pytest.mark.parametrize(
    ("latitude_deg", "side", "sense"),
    [(45.0, "right", 1), (45.0, "left", -1), (-45.0, "left", 1), (-45.0, "right", -1)],
)
def test_the_wave_keeps_the_coast_on_its_own_side(latitude_deg: float, side: Side, sense: int) -> None:
    assert theory(CoastSpec(side=side, depth_m=60.0), stations(latitude_deg)).sense == sense


def test_nothing_to_compare_with() -> None:
    deep = CoastSpec(side="right", depth_m=60.0)
    assert coast_theory(CoastSpec(side="right"), stations(45.0)) is None
    assert coast_theory(deep, []) is None
    assert coast_theory(deep, [Station(id="a", along_coast_km=0.0)]) is None
    # On both sides of the equator, or on it: no one side for the coast.
    assert coast_theory(deep, stations(-1.0)) is None
    assert coast_theory(deep, [Station(id="a", latitude_deg=0.0, longitude_deg=0.0, along_coast_km=0.0)]) is None
    # A profile along the coast says nothing of a single place.
    along = CoastSpec(side="right", depth_along_coast=((0.0, 20.0), (9.0, 30.0)))
    assert coast_theory(along, stations(45.0, along_km=(5.0,))) is None


@pytest.mark.parametrize("bearing_deg", [0.0, 75.0, 140.0, 255.0, 340.0])
@pytest.mark.parametrize("longitude_deg", [-124.0, 179.5])
def test_bearing_of_a_straight_coast(bearing_deg: float, longitude_deg: float) -> None:
    # On a plane beside 40 S, across the date line too.
    turn, shrink = math.radians(bearing_deg), math.cos(math.radians(40.0))
    gauges = [
        Station(
            id=f"g{n}",
            latitude_deg=-40.0 + x * math.cos(turn) / 111.2,
            longitude_deg=(longitude_deg + x * math.sin(turn) / 111.2 / shrink + 180.0) % 360.0 - 180.0,
            along_coast_km=1000.0 + x,
        )
        for n, x in enumerate((-80.0, -20.0, 30.0, 70.0))
    ]
    found = coast_bearing_deg(gauges)
    assert_allclose((found - bearing_deg + 180.0) % 360.0 - 180.0, 0.0, atol=0.5)  # a degree of longitude shrinks


def test_bearing_wants_two_places() -> None:
    assert math.isnan(coast_bearing_deg([]))
    assert math.isnan(coast_bearing_deg(stations(45.0, along_km=(5.0,))))
    assert math.isnan(coast_bearing_deg([Station(id="a", along_coast_km=0.0), Station(id="b", along_coast_km=9.0)]))
