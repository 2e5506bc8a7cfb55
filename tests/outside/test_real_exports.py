"""Exports of public agencies, as they write them, against a count made without the reader.

Real files stand at ``../shared/real`` beside the repository and are not committed; where they are absent these tests
are skipped.
"""

from __future__ import annotations

import gzip
from datetime import UTC, datetime, timedelta
from pathlib import Path
from zoneinfo import ZoneInfo

import numpy as np
import pytest
from numpy.testing import assert_allclose

from tidekit.records.reading import read_record
from tidekit.records.record import FLAG_MISSING

REAL = Path(__file__).parents[2].parent / "shared" / "real"
FOOT_M = 0.3048
"""International foot, exact: the yard and pound agreement of 1959."""
ROUNDING_M = 1e-12
"""Heights are the file's own decimals times an exact factor: nothing but floating-point rounding may differ."""

pytestmark = pytest.mark.skipif(not REAL.is_dir(), reason="the real records are not beside this repository")


def plain_rows(path: Path, first: int, time_format: str) -> list[tuple[datetime, float]]:
    """Times and heights by the standard library alone: columns 1 and 2 of a comma file from line `first`."""
    raw = path.read_bytes()
    text = (gzip.decompress(raw) if path.suffix == ".gz" else raw).decode("latin-1")
    rows = [line.split(",") for line in text.splitlines()[first - 1 :] if line.strip()]
    return [(datetime.strptime(row[0], time_format), float(row[1] or "nan")) for row in rows]


PACIFIC = sorted(REAL.glob("pacific_coast/*.csv"))


@pytest.mark.parametrize("path", PACIFIC, ids=[path.stem for path in PACIFIC])
def test_pacific_coast_exports_row_by_row(path: Path) -> None:
    noaa = not path.name.startswith("wlev")
    expected = plain_rows(path, 4 if noaa else 9, "%Y-%m-%d %H:%M" if noaa else "%Y/%m/%d %H:%M")
    record = read_record(path)
    assert record.ledger.rows == record.ledger.kept == len(expected)
    assert record.ledger.adds_up
    assert not record.ledger.rejected
    # README of the records: UTC-8 all the year.
    utc = [(time + timedelta(hours=8)).replace(tzinfo=UTC) for time, _ in expected]
    assert list(record.heights.index.to_pydatetime()) == utc
    assert_allclose(record.heights.to_numpy(), [height for _, height in expected], rtol=0, atol=ROUNDING_M)


@pytest.mark.parametrize("kind", ["elev", "predictions"])
def test_golden_gate_year_row_by_row(kind: str) -> None:
    path = REAL / "golden_gate" / f"noaa_sffpx_9414290_{kind}_2015.csv.gz"
    expected = plain_rows(path, 9, "%Y-%m-%dT%H:%M:%S")
    record = read_record(path)
    assert record.ledger.kept == len(expected) == 365 * 240
    assert record.heights.index[0] == expected[0][0].replace(tzinfo=UTC) + timedelta(hours=8)
    assert_allclose(record.heights.to_numpy(), [height for _, height in expected], rtol=0, atol=ROUNDING_M)
    assert record.station.vertical_reference == "NAVD88"


def test_golden_gate_years_join_and_a_blank_is_flagged_missing() -> None:
    paths = sorted((REAL / "golden_gate").glob("*_elev_201[56].csv.gz"))
    expected = [height for path in paths for _, height in plain_rows(path, 9, "%Y-%m-%dT%H:%M:%S")]
    record = read_record(paths)
    assert record.ledger.rows == len(expected) == 240 * (365 + 366)
    assert record.ledger.flagged == (record.flags == FLAG_MISSING).sum() == np.isnan(expected).sum() == 1
    assert_allclose(record.heights.to_numpy(), expected, rtol=0, atol=ROUNDING_M)
    assert len(record.sources) == len(paths)


def test_high_low_waters_in_local_time_with_daylight_saving() -> None:
    path = REAL / "high_low_waters" / "portland_8418150_2015_2017.csv"
    expected = plain_rows(path, 2, "%Y-%m-%d %H:%M")
    record = read_record(path, time_zone="America/New_York")
    assert record.ledger.kept == len(expected)
    zone = ZoneInfo("America/New_York")
    # Turning points are hours apart: no row of this file stands in an hour that the clock shows twice.
    utc = [time.replace(tzinfo=zone).astimezone(UTC) for time, _ in expected]
    assert list(record.heights.index.to_pydatetime()) == sorted(utc)
    assert_allclose(record.heights.to_numpy(), [height * FOOT_M for _, height in expected], rtol=0, atol=ROUNDING_M)
