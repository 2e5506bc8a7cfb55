"""Times from texts, against the standard library's own reading."""

from __future__ import annotations

from datetime import datetime, timedelta

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from tidekit.records.cutting import as_matrix
from tidekit.records.layout import DateOrder
from tidekit.records.times import read_times

MOMENTS = st.datetimes(datetime(1800, 1, 1), datetime(2150, 12, 31)).map(lambda t: t.replace(microsecond=0))
WRITTEN: list[tuple[str, DateOrder]] = [
    ("%Y-%m-%d %H:%M:%S", "year-month-day"),
    ("%Y/%m/%dT%H:%M:%S", "year-month-day"),
    ("%Y%m%d%H%M%S", "year-month-day"),
    ("%Y%m%dT%H%M%S", "year-month-day"),
    ("%d/%m/%Y %H:%M:%S", "day-month-year"),
    ("%d.%m.%Y %H:%M:%S", "day-month-year"),
    ("%d-%b-%Y %H:%M:%S", "day-month-year"),
    ("%d %B %Y %H:%M:%S", "day-month-year"),
    ("%m/%d/%Y %I:%M:%S %p", "month-day-year"),
    ("%b %d, %Y %H:%M:%S", "month-day-year"),
    ("%Y-%j %H:%M:%S", "year-day-of-year"),
    ("%Y%j %H:%M:%S", "year-day-of-year"),
]


def stamps(texts: list[str], order: DateOrder = "year-month-day", *parts: str) -> list[datetime | None]:
    times = read_times([as_matrix([text.encode() for text in texts])], parts or ("stamp",), order)
    return list(times.clock.tolist())


@pytest.mark.parametrize(("time_format", "order"), WRITTEN)
@given(moments=st.lists(MOMENTS, min_size=1, max_size=30))
@settings(max_examples=25, deadline=None)
def test_reads_what_the_standard_library_writes(time_format: str, order: DateOrder, moments: list[datetime]) -> None:
    # %Y writes years before 1000 without zeros; these begin at 1800.
    assert stamps([moment.strftime(time_format) for moment in moments], order) == moments


@given(moments=st.lists(MOMENTS, min_size=1, max_size=20), minutes=st.integers(-14 * 60, 14 * 60))
@settings(max_examples=50, deadline=None)
def test_offsets_as_in_iso_8601(moments: list[datetime], minutes: int) -> None:
    sign, size = "-" if minutes < 0 else "+", abs(minutes)
    texts = [f"{moment.isoformat()}{sign}{size // 60:02d}:{size % 60:02d}" for moment in moments]
    assert stamps(texts) == [moment - timedelta(minutes=minutes) for moment in moments]
    # ISO 8601 as the standard library reads it.
    assert stamps(texts) == [
        datetime.fromisoformat(text).replace(tzinfo=None) - datetime.fromisoformat(text).utcoffset() for text in texts
    ]  # type: ignore[operator]


@pytest.mark.parametrize(
    "text",
    [
        "2021-02-29 00:00", "2021-13-01 00:00", "2021-00-10 00:00", "2021-04-31 00:00", "2021-01-01 24:01",
        "2021-01-01 25:00", "2021-01-01 12:60", "2021-01-01 12:00:60", "2021-01-01", "12:00", "", "2021-01-01 0:0",
        "2021-01-01 13:00 PM", "2021-01-01 0:30 AM", "2021-01/01 12:00", "1599-01-01 00:00", "2021-01-01 12:00 +16:00",
        "x2021-01-01 12:00", "2021-01-01 12:00x", "2021-XYZ-01 12:00",
    ],
)  # fmt: skip
def test_no_time(text: str) -> None:
    assert stamps(["2021-01-01 00:00", text]) == [datetime(2021, 1, 1), None]


def test_rows_of_many_shapes_each_keep_their_own() -> None:
    rng = np.random.default_rng(5)
    moments = [datetime(2021, 1, 1) + timedelta(seconds=int(s)) for s in rng.integers(0, 3e7, 300)]
    kinds = ["%Y-%m-%d %H:%M:%S", "%Y/%m/%d %H:%M:%S", "%Y%m%d%H%M%S", "%Y-%b-%d %H:%M:%S", "%Y.%m.%d %H:%M:%SZ"]
    junk = ["?" * int(n) + "~" * int(m) for n, m in rng.integers(0, 12, (120, 2))]
    texts = [moment.strftime(kinds[n % 5]) for n, moment in enumerate(moments)] + junk
    assert stamps(texts) == [*moments, *[None] * len(junk)]


def test_end_of_day_two_digit_years_and_fractions() -> None:
    assert stamps(["2020-12-31 24:00"]) == [datetime(2021, 1, 1)]
    # POSIX.1-2017, strptime, %y: 69 to 99 are 1969 to 1999, 00 to 68 are 2000 to 2068.
    assert stamps(["01.02.68 00:00", "01.02.69 00:00"], "day-month-year") == [
        datetime(2068, 2, 1),
        datetime(1969, 2, 1),
    ]
    assert stamps(["2021-01-01 00:00:00.25"]) == [datetime(2021, 1, 1, microsecond=250000)]
    assert stamps(["2021-01-01 00:00:00,123456789"]) == [datetime(2021, 1, 1, microsecond=123456)]


def columns(*cells: list[str]) -> list[np.ndarray]:
    return [as_matrix([text.encode() for text in column]) for column in cells]


def test_time_in_several_columns() -> None:
    year, month, day = ["2021", "2021", "2021"], ["3", "17", "2.5"], ["4", "1", "1"]
    times = read_times(columns(year, month, day, ["5.5"] * 3), ("year", "month", "day", "hour"), "year-month-day")
    assert times.clock.tolist() == [datetime(2021, 3, 4, 5, 30), None, None]
    times = read_times(
        columns(year, ["366", "365.25", "60"], ["0"] * 3), ("year", "day_of_year", "hour"), "year-month-day"
    )
    assert times.clock.tolist() == [None, datetime(2021, 12, 31, 6), datetime(2021, 3, 1)]
    times = read_times(columns(["2021-03-04"] * 3, ["530", "2400", "99"]), ("date", "hhmm"), "year-month-day")
    assert times.clock.tolist() == [datetime(2021, 3, 4, 5, 30), datetime(2021, 3, 5), None]


def test_seconds_since_1970() -> None:
    times = read_times(columns(["0", "1614834000.5", "1e308", "-86400", "x", "9" * 13]), ("epoch_s",), "year-month-day")
    assert times.clock.tolist() == [
        datetime(1970, 1, 1), datetime(2021, 3, 4, 5, 0, 0, 500000), None, datetime(1969, 12, 31), None, None,
    ]  # fmt: skip
    assert times.zoned.tolist() == [True, True, False, True, False, False]
