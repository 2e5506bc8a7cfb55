"""Errors of means of serially correlated batches, against a general statistics library."""

import numpy as np
import pytest
import statsmodels.api as sm
from numpy.testing import assert_allclose

from tidekit.datums.serial import BATCH_H, batch_numbers, mean_sd


@pytest.mark.parametrize("count", [3, 12, 49, 240])
def test_against_statsmodels(count: int) -> None:
    """A regression on a constant with Newey and West's covariance, small-sample correction on."""
    rng = np.random.default_rng(count)
    values = np.cumsum(rng.normal(size=(count, 2)), axis=0) * 0.2 + rng.normal(size=(count, 2))
    options = {"maxlags": int(np.cbrt(count)), "use_correction": True}
    expected = [sm.OLS(column, np.ones(count)).fit(cov_type="HAC", cov_kwds=options).bse[0] for column in values.T]
    assert_allclose(mean_sd(values), expected, rtol=1e-10)


def test_correlation_widens_the_error() -> None:
    """Means of 400 runs of a first-order autoregression of 0.5 scatter as far as the errors say, within a fifth.

    Bartlett's weights reach back six months only and leave some 10 % of the error out.
    """
    rng = np.random.default_rng(7)
    runs = rng.normal(size=(400, 240))
    for month in range(1, 240):
        runs[:, month] += 0.5 * runs[:, month - 1]
    errors = mean_sd(runs.T)
    assert_allclose(np.median(errors), runs.mean(axis=1).std(), rtol=0.2)
    assert np.median(errors) > 1.4 * np.median(runs.std(axis=1)) / np.sqrt(240)


def test_too_few_batches_have_no_error() -> None:
    assert np.all(np.isnan(mean_sd(np.zeros((2, 3)))))


def test_batches_are_months() -> None:
    assert batch_numbers(np.array([5.0, 5.0 + BATCH_H - 0.1, 5.0 + BATCH_H]), 5.0).tolist() == [0, 0, 1]
