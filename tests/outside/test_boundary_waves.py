"""Waves against exact solutions of boundary_waves.csv, which cites the formula each figure was computed from."""

import csv
from collections.abc import Callable
from pathlib import Path

import pytest
from numpy.testing import assert_allclose

from tidekit.constituents.catalogue import resolve
from tidekit.waves.channel import amphidrome_offset_km
from tidekit.waves.inertia_gravity import critical_width_km
from tidekit.waves.kelvin import KelvinWave
from tidekit.waves.rotation import GRAVITY_M_PER_S2, angular_speed_rad_per_s, inertial_latitude_deg

Row = dict[str, str]
ROWS: list[Row] = list(csv.DictReader((Path(__file__).parent / "boundary_waves.csv").read_text("utf-8").splitlines()))
ANYWHERE = KelvinWave(50.0, 45.0)
CONSTANTS_TOLERANCE = 2e-6
"""Relative: the solutions hold the Earth's rotation at 7.2921e-5 rad/s, five digits of the one used here."""


def wave(row: Row) -> KelvinWave:
    return KelvinWave(float(row["depth_m"]), float(row["latitude_deg"]))


def speed(row: Row) -> float:
    return resolve(row["constituent"]).speed_deg_per_h


FOUND: dict[str, Callable[[Row], float]] = {
    "kelvin_speed_m_per_s": lambda row: wave(row).speed_m_per_s,
    "rossby_radius_km": lambda row: wave(row).rossby_radius_km,
    "wavelength_km": lambda row: wave(row).wavelength_km(speed(row)),
    "depth_of_speed_m": lambda row: float(row["parameter"]) ** 2 / GRAVITY_M_PER_S2,
    "critical_width_km": lambda row: critical_width_km(
        wave(row), angular_speed_rad_per_s(speed(row)), mode=int(row["parameter"])
    ),
    "inertial_latitude_deg": lambda row: inertial_latitude_deg(angular_speed_rad_per_s(speed(row))),
    "amphidrome_offset_over_radius": lambda row: (
        amphidrome_offset_km(ANYWHERE, float(row["parameter"])) / ANYWHERE.rossby_radius_km
    ),
}


@pytest.mark.parametrize("row", ROWS, ids=[f"{row['quantity']}-{number}" for number, row in enumerate(ROWS)])
def test_solution(row: Row) -> None:
    # The tolerance is half of the figure's last printed digit.
    found = FOUND[row["quantity"]](row)
    assert_allclose(found, float(row["value"]), rtol=CONSTANTS_TOLERANCE, atol=float(row["half_last_digit"]))


def test_every_quantity_has_its_figures() -> None:
    assert {row["quantity"] for row in ROWS} == set(FOUND)
    assert all(row["source"] and row["status"] for row in ROWS)
