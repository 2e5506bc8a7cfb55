"""Delays from phases: wrapping over periods, errors, and what too few constituents leave open."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.testing import assert_allclose

from tidekit.constituents.catalogue import speeds_deg_per_h
from tidekit.network.delays import CLEAR_LEAD, joint_delay, wrapped_deg

FIVE = speeds_deg_per_h(["O1", "K1", "N2", "M2", "S2"])
SD = np.full(5, 1.0)
ROUNDING_H = 1e-9


@given(st.floats(-59.0, 59.0))
def test_a_delay_of_days_is_found_without_neighbours(delay_h: float) -> None:
    found = joint_delay(wrapped_deg(FIVE * delay_h), SD, FIVE, search_h=60.0)
    assert_allclose(found.delay_h, delay_h, atol=ROUNDING_H)
    assert_allclose(found.log_likelihood, 0.0, atol=1e-9)
    assert found.lead > CLEAR_LEAD


@given(st.floats(-12.0, 12.0))
def test_a_record_upside_down_is_a_turn_of_all(delay_h: float) -> None:
    found = joint_delay(wrapped_deg(FIVE * delay_h + 180.0), SD, FIVE, turn_deg=180.0)
    assert_allclose(found.delay_h, delay_h, atol=ROUNDING_H)


def test_its_error_is_that_of_weighted_least_squares() -> None:
    # Monte Carlo over the phases' errors, against the stated one: 3 % is three errors of a standard deviation of 4000.
    random, sd = np.random.default_rng(1), np.array([2.0, 1.5, 1.0, 0.2, 0.6])
    draws = [joint_delay(FIVE * 3.0 + sd * random.standard_normal(5), sd, FIVE) for _ in range(4000)]
    assert_allclose(np.std([delay.delay_h for delay in draws]), draws[0].delay_sd_h, rtol=0.03)
    assert_allclose(np.mean([delay.delay_h for delay in draws]), 3.0, atol=4 * draws[0].delay_sd_h / np.sqrt(4000))


@pytest.mark.parametrize("name", ["M2", "K1", "S2"])
def test_one_constituent_leaves_whole_periods_open(name: str) -> None:
    speeds = speeds_deg_per_h([name])
    found = joint_delay(wrapped_deg(speeds * 30.0), np.ones(1), speeds)
    assert found.lead < CLEAR_LEAD
    # Of delays as good as each other the smallest is taken.
    period = 360.0 / float(speeds[0])
    assert_allclose(found.delay_h, (30.0 + period / 2) % period - period / 2, atol=ROUNDING_H)


@pytest.mark.parametrize("names", [["M2", "S2"], ["M2", "K1"], ["M2", "S2", "N2"]])
def test_two_tell_how_many_periods(names: list[str]) -> None:
    speeds = np.sort(speeds_deg_per_h(names))
    found = joint_delay(wrapped_deg(speeds * 30.0), np.full(len(names), 0.5), speeds)
    assert_allclose(found.delay_h, 30.0, atol=ROUNDING_H)
    assert found.lead > CLEAR_LEAD


@given(st.floats(-1e4, 1e4))
def test_wrapped_angles_lie_on_the_half_open_circle(angle_deg: float) -> None:
    wrapped = float(wrapped_deg(np.array(angle_deg)))
    assert -180.0 <= wrapped < 180.0
    assert_allclose(np.exp(1j * np.deg2rad(wrapped)), np.exp(1j * np.deg2rad(angle_deg)), atol=1e-11)
