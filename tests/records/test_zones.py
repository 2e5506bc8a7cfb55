"""Local times to UTC, against the standard library's zones."""

from __future__ import annotations

from datetime import UTC, datetime, timedelta
from zoneinfo import ZoneInfo

import numpy as np
import pytest

from tidekit.errors import RecordError
from tidekit.records.zones import to_utc, zone_in, zone_named

ZONES = (
    "Europe/Paris",
    "America/New_York",
    "Pacific/Auckland",
    "Australia/Lord_Howe",
    "Asia/Kathmandu",
    "America/St_Johns",
)


@pytest.mark.parametrize("name", ZONES)
@pytest.mark.parametrize("step_min", [30, 60])
def test_a_regular_year_of_local_clocks(name: str, step_min: int) -> None:
    zone, count = ZoneInfo(name), 366 * 1440 // step_min
    utc = [datetime(2021, 1, 1, tzinfo=UTC) + timedelta(minutes=step_min * n) for n in range(count)]
    local = np.array([time.astimezone(zone).replace(tzinfo=None) for time in utc], dtype="datetime64[us]")
    found, doubtful = to_utc(local, zone)
    expected = np.array([time.replace(tzinfo=None) for time in utc], dtype="datetime64[us]")
    settled = ~doubtful
    assert (found[settled] == expected[settled]).all()
    # Hourly rows around a change of half an hour show no clock going back; every other change is settled.
    assert int(doubtful.sum()) <= (1 if name == "Australia/Lord_Howe" and step_min == 60 else 0)


def test_one_pass_only_is_in_doubt() -> None:
    local = np.array(["2021-10-31T01:00", "2021-10-31T02:00", "2021-10-31T03:00"], dtype="datetime64[us]")
    utc, doubtful = to_utc(local, ZoneInfo("Europe/Paris"))
    assert doubtful.tolist() == [False, True, False]
    assert np.isnat(utc).tolist() == [False, True, False]


def test_an_hour_never_shown_is_in_doubt() -> None:
    local = np.array(["2021-03-28T01:00", "2021-03-28T02:30", "2021-03-28T03:00", "NaT"], dtype="datetime64[us]")
    assert to_utc(local, ZoneInfo("Europe/Paris"))[1].tolist() == [False, True, False, False]


@pytest.mark.parametrize(
    ("text", "hours"),
    [
        ("UTC", 0), ("GMT", 0), ("UTC-8", -8), ("UTC+05:45", 5.75), ("+09:30", 9.5), ("-3", -3), ("GMT+1", 1),
        ("PST", -8), ("EST", -5), ("AEST", 10), ("LST (UTC-8, no daylight saving)", -8), ("UTC + 6", 6),
    ],
)  # fmt: skip
def test_fixed_offsets(text: str, hours: float) -> None:
    assert zone_named(text).utcoffset(None) == timedelta(hours=hours)


@pytest.mark.parametrize("text", ["CST", "EDT", "LST", "local", "Mars/Olympus", "", "UTC+99", "../etc/passwd", "Z8"])
def test_no_zone(text: str) -> None:
    with pytest.raises(RecordError, match=r"time zone|no time zone"):
        zone_named(text)


def test_a_standard_time_abbreviation_is_one_offset_in_summer_too() -> None:
    summer = np.array(["2021-07-01T00:00"], dtype="datetime64[us]")
    assert to_utc(summer, zone_named("PST"))[0][0] == np.datetime64("2021-07-01T08:00", "us")


@pytest.mark.parametrize(
    ("line", "zone"),
    [
        ("Time: PST,Water Level: m (MSL),,,", "PST"), ("Time_Zone,PST", "PST"), ("times: UTC", "UTC"),
        ("# timezone: LST (UTC-8, no daylight saving)", "UTC-8"), ("clock Pacific/Auckland", "Pacific/Auckland"),
        ("time_utc", "UTC"), ("Station time", None), ("Time zone: CST", None), ("m/s speed", None),
    ],
)  # fmt: skip
def test_zones_written_in_headers(line: str, zone: str | None) -> None:
    assert zone_in(line) == zone
