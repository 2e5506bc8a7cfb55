"""Errors of means of serially correlated batches, against a general statistics library."""

import numpy as np
import pytest
import statsmodels.api as sm
from numpy.testing import assert_allclose

from tidekit.datums.serial import BATCH_H, BATCHES_A_YEAR, batch_numbers, mean_sd, seasonal_waves


def months(count: int) -> np.ndarray:
    return 3000.0 + BATCH_H * (np.arange(count) + 0.5)


@pytest.mark.parametrize("count", [3, 11, 12, 49, 240])
def test_against_statsmodels(count: int) -> None:
    """A regression with Newey and West's covariance, small-sample correction on: the error of its constant."""
    rng = np.random.default_rng(count)
    values = np.cumsum(rng.normal(size=(count, 2)), axis=0) * 0.2 + rng.normal(size=(count, 2))
    design = np.ones((count, 1))
    if count >= BATCHES_A_YEAR:
        design = np.hstack([design, seasonal_waves(months(count))])
    options = {"maxlags": int(np.cbrt(count)), "use_correction": True}
    expected = [sm.OLS(column, design).fit(cov_type="HAC", cov_kwds=options).bse[0] for column in values.T]
    assert_allclose(mean_sd(values, months(count)), expected, rtol=1e-9)


def test_correlation_widens_the_error() -> None:
    """Means of 400 runs of a first-order autoregression of 0.5 scatter as far as the errors say, within a fifth.

    Bartlett's weights reach back six months only and leave some 10 % of the error out.
    """
    rng = np.random.default_rng(7)
    runs = rng.normal(size=(400, 240))
    for month in range(1, 240):
        runs[:, month] += 0.5 * runs[:, month - 1]
    errors = mean_sd(runs.T, months(240))
    assert_allclose(np.median(errors), runs.mean(axis=1).std(), rtol=0.2)
    assert np.median(errors) > 1.4 * np.median(runs.std(axis=1)) / np.sqrt(240)


def test_seasons_are_no_error_once_they_come_round() -> None:
    noise = 0.01 * np.random.default_rng(6).normal(size=(24, 1))
    seasons = 0.1 * seasonal_waves(months(24)).sum(axis=1, keepdims=True)
    assert_allclose(mean_sd(noise + seasons, months(24)), mean_sd(noise, months(24)), rtol=1e-9)
    assert mean_sd(noise[:11] + seasons[:11], months(11)) > 3 * mean_sd(noise, months(24))


def test_too_few_batches_have_no_error() -> None:
    assert np.all(np.isnan(mean_sd(np.zeros((2, 3)), months(2))))


def test_batches_are_months() -> None:
    assert batch_numbers(np.array([5.0, 5.0 + BATCH_H - 0.1, 5.0 + BATCH_H]), 5.0).tolist() == [0, 0, 1]
