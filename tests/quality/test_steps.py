"""Datum steps under red noise: found, sized, and not seen where there are none.

Invented noise, for behaviour; the closed form of a step's error under white noise is the outside check.
"""

import numpy as np
import scipy.signal
from numpy.testing import assert_allclose

from tidekit.quality.daily import DailyLevels, against_neighbours, daily_levels
from tidekit.quality.steps import CRITICAL_T, Step, find_steps, season_m, slow_sd_m

DAYS = np.arange(7000, 7365)


def red(random: np.random.Generator, count: int, keep: float, sd: float) -> np.ndarray:
    """First-order autoregressive noise, stationary."""
    shocks = random.normal(0.0, sd * np.sqrt(1 - keep**2), count)
    shocks[0] = random.normal(0.0, sd)
    return scipy.signal.lfilter([1.0], [1.0, -keep], shocks)


def test_the_error_of_a_step_under_white_noise() -> None:
    """Two means of 182 and 183 days differ with variance sd^2 (1/182 + 1/183): elementary statistics."""
    random = np.random.default_rng(3)
    level = random.normal(0.0, 0.01, 250) + 0.05 * (np.arange(250) >= 125)  # under a year: no annual terms beside it
    (step,) = find_steps(DAYS[:250], level)
    # The sample's own variance and memory enter: a tenth is four of their standard deviations over 250 days.
    assert_allclose(step.sd_m, 0.01 * np.sqrt(2 / 125), rtol=0.25)
    assert abs(step.size_m - 0.05) < 4 * step.sd_m
    assert abs(step.day - DAYS[125]) <= 1


def test_red_noise_alone_makes_no_steps() -> None:
    """600 years of daily levels with a memory of two to five days: chance passes `CRITICAL_T` in under 1 %."""
    random = np.random.default_rng(11)
    found = sum(bool(find_steps(DAYS, red(random, 365, keep, 0.05))) for keep in (0.6, 0.7, 0.8) for _ in range(200))
    assert CRITICAL_T == 5.0
    assert found <= 12


def test_steps_are_found_and_sized_with_honest_errors() -> None:
    random = np.random.default_rng(5)
    deviations = []
    for _ in range(60):
        place = int(random.integers(60, 300))
        level = red(random, 365, 0.6, 0.02) + 0.08 * (np.arange(365) >= place)
        steps = find_steps(DAYS, level)
        near = [step for step in steps if abs(step.day - DAYS[place]) <= 10]
        assert len(near) == 1
        deviations.append((near[0].size_m - 0.08) / near[0].sd_m)
    # 60 draws: the mean is within 3/sqrt(60) of zero, give or take the selection of the best date; the spread near one.
    assert abs(float(np.mean(deviations))) < 0.6
    assert 0.6 < float(np.std(deviations)) < 1.6


def test_two_steps_are_two() -> None:
    random = np.random.default_rng(8)
    day = np.arange(365)
    level = red(random, 365, 0.5, 0.01) + 0.06 * (day >= 100) - 0.10 * (day >= 260)
    steps = find_steps(DAYS, level)
    assert len(steps) == 2
    assert all(abs(s.size_m - size) < 3 * s.sd_m for s, size in zip(steps, (0.06, -0.10), strict=True))


def test_gaps_and_short_records() -> None:
    assert find_steps(DAYS[:30], np.zeros(30)) == ()
    random = np.random.default_rng(2)
    level = red(random, 365, 0.5, 0.01) + 0.08 * (np.arange(365) >= 200)
    level[150:180] = np.nan
    (step,) = find_steps(DAYS, level)
    assert abs(step.day - DAYS[200]) <= 2


def test_weather_that_neighbours_share_is_taken_off_and_blames_nobody_else() -> None:
    random = np.random.default_rng(4)
    weather = red(random, 365, 0.75, 0.10)
    levels = np.array([weather * gain + red(random, 365, 0.5, 0.012) for gain in (1.0, 0.9, 1.1, 3.28, 0.5)])
    levels[1] += 0.08 * (np.arange(365) >= 220)
    daily = DailyLevels(DAYS, levels)
    found = [find_steps(DAYS, against_neighbours(daily, gauge)) for gauge in range(5)]
    assert [len(steps) for steps in found] == [0, 1, 0, 0, 0]
    assert abs(found[1][0].size_m - 0.08) < 3 * found[1][0].sd_m


def test_daily_means() -> None:
    """A day's mean is its samples' mean; a day with less than half of them has none."""
    t_h = 24.0 * DAYS[0] + np.arange(72.0)
    values = np.concatenate([np.full(24, 1.0), np.full(24, 2.0), np.full(24, 3.0)])
    keep = np.ones(72, dtype=bool)
    keep[30:48] = False
    daily = daily_levels([t_h[keep]], [values[keep]])
    assert daily.days.tolist() == DAYS[:3].tolist()
    assert_allclose(daily.level_m[0], [1.0, np.nan, 3.0])


def test_months_that_wander_weigh_against_a_step() -> None:
    """Twelve independent monthly levels scatter a step between halves by their sd times sqrt(1/6 + 1/6)."""
    random = np.random.default_rng(9)
    spreads = [slow_sd_m(DAYS[:360], random.normal(0.0, 0.02, 12)[np.arange(360) // 30], 180) for _ in range(400)]
    # The mean square over 400 draws of 11 degrees of freedom is known to 2 %.
    assert_allclose(np.sqrt(np.mean(np.square(spreads))), 0.02 * np.sqrt(1 / 6 + 1 / 6), rtol=0.06)


def test_the_season_beside_a_step_is_that_without_it() -> None:
    """A year's sine with a step of 10 cm: exact, since both are in the model."""
    days = np.arange(8000, 8365)
    season = 0.05 * np.cos(2 * np.pi * days / 365.2422) - 0.02
    step = Step(8200, 0.10, 0.01)
    level = season + 0.10 * (days >= 8200)
    level[50:60] = np.nan
    assert_allclose(season_m(days, level, (step,)), season, atol=1e-12)
