"""The eleven tests of the IOOS water-level manual (2021, version 2.1) on worked cases at its own example thresholds."""

import numpy as np
import pytest
from numpy.testing import assert_array_equal

from tidekit.quality.level_tests import (
    Attenuation,
    attenuated_signal,
    climatology,
    flat_line,
    gross_range,
    location,
    multi_variate,
    neighbor,
    rate_of_change,
    spike,
    spike_by_third_difference,
    syntax,
    timing_gap,
    trailing_sd,
)

NAN = np.nan


def a(*values: float) -> np.ndarray:
    return np.array(values, dtype=float)


def test_1_timing_gap() -> None:
    """TIM_INC = 1 h: a value that is not there is 9; one after a longer silence cannot be judged by what was before."""
    flags = timing_gap(a(0.0, 1.0, 2.0, 3.0, 5.0), a(1.0, 1.0, NAN, 1.0, 1.0), longest_h=1.0)
    assert_array_equal(flags, [1, 1, 9, 2, 2])


def test_2_syntax() -> None:
    """NCHAR = 128: REC_CHAR != NCHAR fails."""
    assert_array_equal(syntax(np.array([128, 127, 129]), expected=128), [1, 4, 4])


def test_3_location() -> None:
    """RANGEMAX = 500 m; |lat| > 90 or |lon| > 180 fails."""
    flags = location(a(45, 91, 45, 45), a(-120, 0, 181, 10), displaced_m=a(499, 0, 0, 501), most_m=500.0)
    assert_array_equal(flags, [1, 4, 4, 3])


def test_4_gross_range() -> None:
    """SENSOR_MAX = 10.0, SENSOR_MIN = -0.5, USER_MAX = 5.0, USER_MIN = -0.5 m."""
    flags = gross_range(a(-0.6, -0.5, 5.0, 5.1, 10.0, 10.1, NAN), sensor=(-0.5, 10.0), user=(-0.5, 5.0))
    assert_array_equal(flags, [4, 1, 1, 3, 3, 4, 9])


def test_5_climatology() -> None:
    """SPRING_MIN = -2.0, SPRING_MAX = 4.0 m: suspect outside, no fail."""
    assert_array_equal(climatology(a(-2.1, -2.0, 4.0, 99.0), low_m=a(-2.0), high_m=a(4.0)), [3, 1, 1, 3])


def test_6_spike() -> None:
    """LOW = 0.1, HIGH = 0.2 m against the mean of the neighbours; at a threshold itself the lower flag stands."""
    level = a(1.0, 1.0625, 1.0, 1.0, 1.15, 1.0, 1.0, 1.25, 1.0, NAN, 1.0)
    assert_array_equal(spike(level, low_m=0.1, high_m=0.2), [2, 1, 1, 1, 3, 1, 3, 4, 2, 9, 2])


def test_6_spike_by_the_third_difference() -> None:
    """The alternative form: a step of 0.15 m gives |0 - 0 + 0 - 0.15|, then three times it."""
    level = a(1.0, 1.0, 1.0, 1.15, 1.15, 1.15, 1.15)
    assert_array_equal(spike_by_third_difference(level, low_m=0.1, high_m=0.2), [2, 2, 2, 3, 4, 3, 1])


def test_7_rate_of_change() -> None:
    """N_DEV = 3 over TIM_DEV = 25 h: suspect only."""
    hours = np.arange(30.0)
    level = np.where(hours % 2 == 0, 0.0, 0.1)
    level[28] = 0.5
    sd = trailing_sd(hours, level, span_h=25.0)
    # Half the values at 0 and half at 0.1: a standard deviation of 0.05 with n - 1 in the divisor.
    np.testing.assert_allclose(sd[27], 0.05 * np.sqrt(25 / 24), rtol=2e-3)
    flags = rate_of_change(level, deviations=3.0, sd_m=sd)
    assert flags[28] == 3
    assert set(flags[4:28]) == {1}


def test_8_flat_line() -> None:
    """REP_CNT_FAIL = 5, REP_CNT_SUSPECT = 3, EPS = 0.001 m: earlier flags stay; a slow fall is not flat."""
    assert_array_equal(flat_line(a(0.5, 1.0, 1.0, 1.0, 1.0005, 1.0, 1.0, 2.0)), [1, 1, 1, 3, 3, 4, 4, 1])
    assert_array_equal(flat_line(a(1.0, 0.99, 0.98, 0.97, 0.96, 0.95)), [1] * 6)


def test_9_multi_variate() -> None:
    """N_WLMV_DEV = 2, N_WS_DEV = 2: a jump of level is suspect without a jump of wind."""
    level, calm, gust = a(0.0, 0.0, 0.5), a(5.0, 5.0, 5.1), a(5.0, 5.0, 25.0)
    sd = {"height_sd_m": a(0.1), "other_sd": a(1.0)}
    assert_array_equal(multi_variate(level, calm, **sd), [2, 1, 3])
    assert_array_equal(multi_variate(level, gust, **sd), [2, 1, 1])


def test_10_attenuated_signal() -> None:
    """TST_TIM = 12 h, WARN = 0.5 m, FAIL = 0.1 m on the range."""
    hours = np.arange(40.0)
    for size, flag in ((0.6, 1), (0.4, 3), (0.05, 4)):
        level = np.where(hours % 2 == 0, 0.0, size)
        assert_array_equal(attenuated_signal(hours, level, Attenuation()), [2] * 12 + [flag] * 28)


def test_11_neighbor() -> None:
    """SUSPECT = 3 cm, FAIL = 5 cm."""
    flags = neighbor(a(1.0, 1.0, 1.0, NAN, 1.0), a(1.02, 1.04, 1.06, 1.0, NAN))
    assert_array_equal(flags, [1, 3, 4, 9, 2])


@pytest.mark.parametrize("test", [flat_line, lambda h: spike(h, low_m=0.1, high_m=0.2)])
def test_missing_is_never_judged(test) -> None:  # type: ignore[no-untyped-def]
    assert_array_equal(test(np.full(8, NAN)), [9] * 8)
