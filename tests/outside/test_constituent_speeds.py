"""Speeds of the catalogue against published ones: tests/outside/constituent_speeds.csv states their sources."""

import csv
from pathlib import Path

import pytest
from numpy.testing import assert_allclose

from tidekit.constituents.catalogue import resolve

ROWS = list(csv.DictReader((Path(__file__).parent / "constituent_speeds.csv").read_text("utf-8").splitlines()))
SPEED_TOLERANCE_DEG_PER_H = 2e-7
"""Published speeds have seven decimals and an epoch of 1900; 2e-7 deg/h is 0.002 degrees a year."""


@pytest.mark.parametrize("row", ROWS, ids=[row["name"] for row in ROWS])
def test_speed(row: dict[str, str]) -> None:
    speed = resolve(row["name"]).speed_deg_per_h
    assert_allclose(speed, float(row["speed_deg_per_h"]), atol=SPEED_TOLERANCE_DEG_PER_H, rtol=0)
    assert_allclose(speed, float(row["published_speed_deg_per_h"]), atol=SPEED_TOLERANCE_DEG_PER_H, rtol=0)


def test_the_list_is_whole() -> None:
    assert len({row["name"] for row in ROWS}) == len(ROWS) >= 75
