"""Hours since 2000 and back."""

import numpy as np
from numpy.testing import assert_array_equal

from tidekit.astronomy.timescales import datetime64_from_hours, hours_from_datetime64


def test_times_come_back() -> None:
    times = np.array(["1850-03-01T12:34:56", "2000-01-01T00:00:00", "2099-12-31T23:59:59.5"], dtype="datetime64[us]")
    assert_array_equal(datetime64_from_hours(hours_from_datetime64(times)), times)


def test_a_day_has_24_hours_even_with_a_leap_second() -> None:
    edges = np.array(["2016-12-31", "2017-01-01"], dtype="datetime64[us]")
    assert np.diff(hours_from_datetime64(edges)).tolist() == [24.0]


def test_any_unit_of_datetime64_will_do() -> None:
    for unit in ("D", "h", "m", "s", "ms", "ns"):
        assert hours_from_datetime64(np.array(["2000-01-03"], dtype=f"datetime64[{unit}]")).tolist() == [48.0]
