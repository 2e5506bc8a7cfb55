"""Regression that a minority of wrong gauges cannot drag.

References
----------
.. [1] Rousseeuw, P. J. and Leroy, A. M., "Robust Regression and Outlier Detection", Wiley (1987), chapter 4:
   least trimmed squares from elemental subsets, then reweighting.
.. [2] DerSimonian, R. and Laird, N., "Meta-analysis in clinical trials", Control. Clin. Trials 7 (1986) 177-188:
   variance between groups beyond their own errors.
"""

from __future__ import annotations

import itertools
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Float = NDArray[np.float64]

_MOST_SUBSETS = 3000
_DEGENERATE = 1e9
"""Condition number from which gauges at one place make no line."""
_CUT = 3.0
"""Residuals beyond this many robust standard deviations are left out of the final fit."""


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
    """Gauges used less coefficients."""

    def predict(self, row: Float) -> tuple[float, float]:
        """Value at a design row, and its standard deviation with that of one more gauge's misfit."""
        variance = float(row @ self.covariance @ row) + self.misfit_sd**2
        return float(row @ self.coefficients), float(np.sqrt(variance))


def robust_fit(
    design: Float, values: Float, sd: Float, *, floor: float, cost: Callable[[Float], float] | None = None
) -> RobustFit:
    """Fit values on a design, trimming those that disagree.

    Parameters
    ----------
    design : ndarray, shape (n, p)
        Rows of gauges.
    values, sd : ndarray, shape (n,)
        Observations and their own standard deviations.
    floor : float
        Smallest misfit between gauges to believe in.
    cost : callable, optional
        Cost of residuals, shape (n,), by which the fit through some gauges is chosen; least trimmed squares by
        default.

    Returns
    -------
    RobustFit
        With fewer than p + 2 gauges, the plain fit of all.
    """
    used = np.ones(len(values), dtype=np.bool_)
    if len(values) >= design.shape[1] + 2:
        used = _agreeing(design, values, np.sqrt(sd**2 + floor**2), cost or _trimmed(len(values), design.shape[1]))
    coefficients, covariance, misfit = _weighted(design[used], values[used], sd[used], floor)
    return RobustFit(coefficients, covariance, used, misfit, int(used.sum()) - design.shape[1])


def _trimmed(count: int, width: int) -> Callable[[Float], float]:
    half = (count + width + 1) // 2
    return lambda residual: float(np.sum(np.sort(residual**2)[:half]))


def _agreeing(design: Float, values: Float, own: Float, cost: Callable[[Float], float]) -> NDArray[np.bool_]:
    """Gauges near the cheapest of the fits through as many gauges as coefficients."""
    count, width = design.shape
    best, residual = np.inf, values
    for subset in itertools.islice(itertools.combinations(range(count), width), _MOST_SUBSETS):
        square = design[list(subset)]
        if np.linalg.cond(square) < _DEGENERATE:
            trial = values - design @ np.linalg.solve(square, values[list(subset)])
            if (score := cost(trial)) < best:
                best, residual = score, trial
    # The median residual scales the cut (1.4826: consistent for normal errors).
    scale = 1.4826 * float(np.median(np.abs(residual)))
    return np.asarray(np.abs(residual) < _CUT * np.maximum(scale, own), dtype=np.bool_)


def _weighted(design: Float, values: Float, sd: Float, floor: float) -> tuple[Float, Float, float]:
    """Weighted least squares with a variance between gauges found by matching its expected chi-square."""
    count, width = design.shape
    variance = 0.0
    for _ in range(50):
        weights = 1.0 / (sd**2 + variance)
        normal = np.linalg.pinv((design.T * weights) @ design)
        coefficients = normal @ (design.T @ (weights * values))
        residual = values - design @ coefficients
        if count <= width:
            break
        # Method of moments: the weighted sum of squares expects count - width.
        excess = float(np.sum(weights * residual**2)) - (count - width)
        slope = float(np.sum(weights**2 * residual**2))
        updated = max(variance + excess / slope, 0.0) if slope > 0 else 0.0
        if abs(updated - variance) <= 1e-9 * (updated + floor**2):
            variance = updated
            break
        variance = updated
    variance = max(variance, floor**2)
    weights = 1.0 / (sd**2 + variance)
    normal = np.linalg.pinv((design.T * weights) @ design)
    return normal @ (design.T @ (weights * values)), np.asarray(normal, dtype=np.float64), float(np.sqrt(variance))
