"""Regression that a minority of wrong gauges cannot drag.

References
----------
.. [1] DerSimonian, R. and Laird, N., "Meta-analysis in clinical trials", Control. Clin. Trials 7 (1986) 177-188:
   variance between groups beyond their own errors, by the method of moments.
.. [2] Paule, R. C. and Mandel, J., "Consensus values and weighting factors", J. Res. Natl. Bur. Stand. 87 (1982)
   377-385: the same, turned until the weighted sum of squares equals its expectation.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
import scipy.stats
from numpy.typing import NDArray

from tidekit.network.agreement import Prior, Scatter, agreeing

Float = NDArray[np.float64]

_TURNS = 50


@dataclass(frozen=True, eq=False)
class RobustFit:
    """A weighted regression on the gauges that agree."""

    coefficients: Float
    """Coefficients, shape (p,)."""
    covariance: Float
    """Their covariance, the misfit between gauges included, shape (p, p)."""
    used: NDArray[np.bool_]
    """Which gauges agree, shape (n,)."""
    misfit_sd: float
    """Scatter between gauges beyond their own errors."""
    freedom: int
    """Gauges used less coefficients that they determine, and those of the belief in a usual scatter."""

    lead: float = float("inf")
    """Lead in log evidence of the gauges that agree over the best line of other gauges."""

    def predict(self, row: Float) -> tuple[float, float]:
        """Value at a design row, and its standard deviation with that of one more gauge's misfit."""
        variance = float(row @ self.covariance @ row) + self.misfit_sd**2
        return float(row @ self.coefficients), float(np.sqrt(variance))

    def reach(self, confidence: float) -> float:
        """Half width of an interval in standard deviations; infinite where no scatter was measured."""
        return float(scipy.stats.t.ppf(0.5 + confidence / 2, self.freedom)) if self.freedom >= 1 else float("inf")


def robust_fit(design: Float, values: Float, sd: Float, *, scatter: Scatter, prior: Prior) -> RobustFit:
    """Fit values on a design, leaving out those that disagree.

    Parameters
    ----------
    design : ndarray, shape (n, p)
        Rows of gauges.
    values, sd : ndarray, shape (n,)
        Observations and their own standard deviations.
    scatter : Scatter
        How gauges depart from the line.
    prior : Prior
        What is known of the coefficients; it fills in for those that the gauges do not determine.

    Returns
    -------
    RobustFit
        With fewer than p + 2 gauges nothing can be called wrong, and all are used.
    """
    if len(values) < design.shape[1] + 2:
        return plain_fit(design, values, sd, np.ones(len(values), dtype=np.bool_), scatter=scatter, prior=prior)
    used, lead = agreeing(design, values, sd, scatter, prior)
    return replace(plain_fit(design, values, sd, used, scatter=scatter, prior=prior), lead=lead)


def plain_fit(
    design: Float, values: Float, sd: Float, used: NDArray[np.bool_], *, scatter: Scatter, prior: Prior
) -> RobustFit:
    """Fit the given gauges, with a variance between them found by matching its expected chi-square.

    Parameters
    ----------
    design : ndarray, shape (n, p)
        Rows of gauges.
    values, sd : ndarray, shape (n,)
        Observations and their own standard deviations.
    used : ndarray of bool, shape (n,)
        Those to fit.
    scatter : Scatter
        The smallest scatter between gauges to believe in, and the usual one.
    prior : Prior
        What is known of the coefficients.

    Returns
    -------
    RobustFit
        Its covariance holds the scatter that was found.
    """
    rows, heard, own = design[used], values[used], sd[used]
    freedom = len(heard) - int(np.linalg.matrix_rank(rows * prior.sd))
    variance = scatter.floor**2
    if freedom > 0:
        variance = _variance_between(rows, heard, own, freedom, variance, prior)
    if scatter.usual_freedom:  # the mean of a scaled inverse chi-square, by gauges' worth
        believed = scatter.usual_freedom * scatter.usual**2 + freedom * variance
        freedom += scatter.usual_freedom
        variance = believed / freedom
    coefficients, covariance = _least_squares(rows, heard, own**2 + variance, prior)
    return RobustFit(coefficients, covariance, used.copy(), float(np.sqrt(variance)), freedom)


def _variance_between(rows: Float, heard: Float, own: Float, freedom: int, least: float, prior: Prior) -> float:
    variance = least
    for _ in range(_TURNS):
        total = own**2 + variance
        residual = heard - rows @ _least_squares(rows, heard, total, prior)[0]
        # The weighted sum of squares expects the degrees of freedom; a Newton step toward that.
        excess = float(np.sum(residual**2 / total)) - freedom
        slope = float(np.sum((residual / total) ** 2))
        updated = max(variance + excess / slope, least) if slope > 0 else least
        if abs(updated - variance) <= 1e-9 * variance:
            return updated
        variance = updated
    return variance


def _least_squares(rows: Float, heard: Float, variance: Float, prior: Prior) -> tuple[Float, Float]:
    precision = (rows.T / variance) @ rows + np.diag(prior.sd**-2.0)
    covariance = np.linalg.inv(precision * np.outer(prior.sd, prior.sd)) * np.outer(prior.sd, prior.sd)
    return covariance @ (rows.T @ (heard / variance) + prior.mean / prior.sd**2), covariance
