"""Which gauges agree on one line, judged by how likely all of them are under it.

Most gauges scatter about the line, by an amount that is not known beforehand; some stand where the water is
otherwise (a bay, a harbour), a little off it; a few are simply wrong, anywhere. The line and the scatter are those
under which all of the gauges together are the most likely; a gauge agrees where the first part of the mixture
explains it better than the other two.

References
----------
.. [1] Box, G. E. P. and Tiao, G. C., "A Bayesian approach to some outlier problems", Biometrika 55 (1968) 119-129:
   regression in which each observation is sound or comes from a wider law.
.. [2] Rousseeuw, P. J. and Leroy, A. M., "Robust Regression and Outlier Detection", Wiley (1987), chapter 5:
   candidates from elemental subsets, lines through as many observations as coefficients.
"""

from __future__ import annotations

import itertools
import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Float = NDArray[np.float64]

_SHARES = (0.70, 0.25, 0.05)
"""Shares of gauges that are sound, in special places, wrong (common practice, no source)."""
_USUAL_FACTOR = 4.0
"""Coasts scatter by more or less than the usual by this factor, one standard deviation of its logarithm (common
practice, no source)."""
_MOST_SUBSETS = 3000
_BEST = 40
"""Pairs of candidate and scatter that are polished beside the best at every scatter."""
_TURNS, _STILL = 20, 1e-2
"""Most turns of polishing; it ends when no gauge moves by this part of its scatter."""
_DEGENERATE = 1e9
"""Condition number from which gauges at one place make no line."""


@dataclass(frozen=True, kw_only=True)
class Scatter:
    """How gauges scatter about a line; all in the unit of the fitted values."""

    floor: float
    """Smallest scatter of sound gauges to believe in; they may scatter up to 16 times as much, beyond which they are
    called special."""
    below: float
    """Mean departure of gauges in special places that lie below the line."""
    above: float
    """The same above it."""
    reach: float
    """Widest departure of a wrong gauge, either way."""
    usual: float
    """Scatter of sound gauges along a usual coast."""
    usual_freedom: int = 0
    """Gauges' worth of belief in it: 0 lets a coast's own gauges speak alone."""

    def scales(self) -> Float:
        """Scatters of sound gauges that are tried, evenly in the logarithm, shape (s,)."""
        return np.asarray(self.floor * 2.0 ** np.arange(0.0, 4.5, 0.5))

    def log_prior(self) -> Float:
        """Log of how likely each of them is beforehand, but for a constant, shape (s,)."""
        return np.asarray(-0.5 * (np.log(self.scales() / self.usual) / math.log(_USUAL_FACTOR)) ** 2)

    def log_other(self, residual: Float) -> Float:
        """Log density of a gauge that is not sound, its share of gauges included."""
        sides = np.where(residual < 0, -residual / self.below, residual / self.above)
        special = _SHARES[1] / (self.below + self.above) * np.exp(-sides)
        return np.asarray(np.log(special + _SHARES[2] / (2.0 * self.reach)))


@dataclass(frozen=True, eq=False, kw_only=True)
class Prior:
    """What is known of the coefficients before the gauges speak, arrays of shape (p,)."""

    mean: Float
    """Means."""
    sd: Float
    """Standard deviations, wide unless theory says more."""


def agreeing(
    design: Float, values: Float, sd: Float, scatter: Scatter, prior: Prior
) -> tuple[NDArray[np.bool_], float]:
    """Find the gauges that agree on one line.

    Parameters
    ----------
    design : ndarray, shape (n, p)
        Rows of gauges.
    values, sd : ndarray, shape (n,)
        Observations and their own standard deviations.
    scatter : Scatter
        How gauges depart from the line.
    prior : Prior
        What is known of the coefficients.

    Returns
    -------
    used : ndarray of bool, shape (n,)
        Gauges better explained as sound than otherwise under the most likely line and scatter.
    lead : float
        Lead in log evidence over the best line of other gauges: one that shares with these no more than any two
        lines may, as many as there are coefficients. Infinite where no such line was found.
    """
    variances = sd**2 + scatter.scales()[:, None] ** 2
    candidates = _candidates(design, values, prior)
    residual = values - candidates @ design.T
    likely = _log_likelihood(residual, variances, scatter)

    def climbed(pairs: NDArray[np.int64]) -> tuple[Float, NDArray[np.bool_]]:
        rows, scales = np.unique(pairs, axis=0).T
        evidence, share = _polished(design, values, variances[scales], candidates[rows], scatter, prior)
        return evidence + scatter.log_prior()[scales], share > 0.5

    # The best line at every scatter, and the best of all pairs of line and scatter.
    at_every = np.column_stack([np.argmax(likely, axis=0), np.arange(likely.shape[1])])
    evidence, sound = climbed(np.vstack([at_every, _leading(likely, _BEST)]))
    used = sound[np.argmax(evidence)]
    # Rivals are sought among lines that rest on other gauges to begin with: the best line's neighbours outnumber them.
    starts = _others(_share(residual[:, None, :], variances, scatter) > 0.5, used, design.shape[1])
    if not starts.any():
        return used, float("inf")
    rival, rests_on = climbed(_leading(np.where(starts, likely, -np.inf), min(_BEST, int(starts.sum()))))
    rival = rival[_others(rests_on, used, design.shape[1])]
    return used, float(evidence.max() - rival.max(initial=-np.inf))


def _leading(likely: Float, number: int) -> NDArray[np.int64]:
    """Most likely pairs of line and scatter, shape (number, 2)."""
    leading = np.argsort(-likely, axis=None, kind="stable")[:number]
    return np.column_stack(np.unravel_index(leading, likely.shape))


def _others(sound: NDArray[np.bool_], used: NDArray[np.bool_], width: int) -> NDArray[np.bool_]:
    """Which sets of sound gauges (..., n) are another agreement than the one used, shape (...).

    A line needs a gauge more than it has coefficients before anything agrees on it.
    """
    return np.asarray(((sound & used).sum(axis=-1) <= width) & (sound.sum(axis=-1) > width))


def _candidates(design: Float, values: Float, prior: Prior) -> Float:
    """Coefficients of the lines through as many gauges as coefficients, shape (c, p)."""
    count, width = design.shape
    if math.comb(count, width) <= _MOST_SUBSETS:
        subsets = np.array(list(itertools.combinations(range(count), width)))
    else:  # a fixed seed: the same gauges give the same verdict
        random = np.random.default_rng(0)
        subsets = np.argsort(random.random((_MOST_SUBSETS, count)), axis=1)[:, :width]
    scaled = design * prior.sd
    sound = subsets[np.linalg.cond(scaled[subsets]) < _DEGENERATE]
    lines = np.linalg.solve(design[sound], values[sound][..., None])[..., 0]
    # A column that no gauge supports (none offshore) leaves no subset: the plain fit under the prior starts there.
    plain = _posterior(design, values, np.ones((1, count)), prior)[0]
    return np.vstack([lines, plain])


def _log_likelihood(residual: Float, variances: Float, scatter: Scatter) -> Float:
    """Of candidates (c, n) at each scatter (s, n): shape (c, s)."""
    sound = _log_sound(residual[:, None, :], variances)
    return np.asarray(np.logaddexp(sound, scatter.log_other(residual)[:, None, :]).sum(axis=-1))


def _log_sound(residual: Float, variance: Float) -> Float:
    return np.asarray(math.log(_SHARES[0]) - 0.5 * (residual**2 / variance + np.log(2 * np.pi * variance)))


def _polished(
    design: Float, values: Float, variance: Float, lines: Float, scatter: Scatter, prior: Prior
) -> tuple[Float, Float]:
    """Climb from lines (b, p) to the likeliest near them (expectation and maximisation), each at its variance (b, n).

    Gives the evidence of each, shape (b,), and how likely each gauge is to be sound, shape (b, n). The evidence
    integrates the likelihood over the coefficients (Laplace's method), so that a small scatter found by passing
    exactly through a few gauges is not taken for agreement.
    """
    for _ in range(_TURNS):
        share = _share(values - lines @ design.T, variance, scatter)
        updated, precision = _posterior(design, values, share / variance, prior)
        moved = float(np.max(np.abs((updated - lines) @ design.T) / np.sqrt(variance)))
        lines = updated
        if moved < _STILL:
            break
    residual = values - lines @ design.T
    likelihood = np.logaddexp(_log_sound(residual, variance), scatter.log_other(residual)).sum(axis=-1)
    pull = np.sum(((lines - prior.mean) / prior.sd) ** 2, axis=-1)
    volume = np.linalg.slogdet(precision * np.outer(prior.sd, prior.sd))[1]
    return np.asarray(likelihood - 0.5 * (pull + volume)), _share(residual, variance, scatter)


def _share(residual: Float, variance: Float, scatter: Scatter) -> Float:
    lead = _log_sound(residual, variance) - scatter.log_other(residual)
    return np.asarray(1.0 / (1.0 + np.exp(-np.clip(lead, -700.0, 700.0))))


def _posterior(design: Float, values: Float, weights: Float, prior: Prior) -> tuple[Float, Float]:
    """Least squares under the prior at weights (b, n): coefficients (b, p) and their precisions (b, p, p)."""
    precision: Float = (design.T * weights[:, None, :]) @ design + np.diag(prior.sd**-2.0)
    right = (weights * values) @ design + prior.mean / prior.sd**2
    lines = np.linalg.solve(precision, right[..., None])[..., 0]
    return np.asarray(lines, dtype=np.float64), precision
