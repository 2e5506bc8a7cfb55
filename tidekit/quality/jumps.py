"""Datum steps of a gauge alone: a jump from one sample to the next that stays.

Without a neighbour the weather hides a step of two decimetres from daily means, but weather takes hours to raise a
level that a slipped staff raises at once. A jump far outside the changes between samples, of the same size over six
hours and not undone by the rest of the record, is taken for a step; in a bay a sharp squall can look alike.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from tidekit.quality.steps import Step, red_step

Float = NDArray[np.float64]

_SIDE_H = 6.0
"""Hours averaged on either side of a jump, to see that it is no spike."""
_JUMP_DEVIATIONS = 7.5
"""Robust standard deviations of the change between samples from which it is a jump."""
_AGREE_DEVIATIONS = 3.2
"""Standard deviations within which the six hours, and the rest of the record, must agree with the jump."""
_MOST_TRIED = 30


def find_jumps(t_h: Float, residual_m: Float, days: NDArray[np.int64], level_m: Float) -> tuple[Step, ...]:
    """Find a step by its suddenness.

    Parameters
    ----------
    t_h, residual_m : ndarray, shape (n,)
        Times [UTC hours since 2000-01-01 00:00] and non-tidal residual [m].
    days, level_m : ndarray, shape (d,)
        Days since 2000-01-01 and daily means of the same residual, NaN where missing [m].

    Returns
    -------
    tuple of Step
        The sharpest one, or none; its size and error are those of the jump.
    """
    step_h = float(np.median(np.diff(t_h)))
    sharp, wide = _jumps(t_h, residual_m, 1), _jumps(t_h, residual_m, max(round(_SIDE_H / step_h), 1))
    scale, wide_scale = (1.4826 * float(np.nanmedian(np.abs(jump))) for jump in (sharp, wide))
    for place in np.argsort(-np.nan_to_num(np.abs(sharp)))[:_MOST_TRIED]:
        size = float(sharp[place])
        if not abs(size) > _JUMP_DEVIATIONS * scale:
            break
        if not abs(wide[place] - size) < _AGREE_DEVIATIONS * np.hypot(scale, wide_scale):
            continue
        day = int(np.ceil(t_h[place] / 24.0))
        kept, sd = red_step(days, level_m, day)
        if abs(kept - size) < _AGREE_DEVIATIONS * sd:
            return (Step(day, size, scale),)
    return ()


def _jumps(t_h: Float, residual_m: Float, width: int) -> Float:
    """Mean of so many samples from each on less the mean of as many before it; NaN beside gaps and ends."""
    count, step_h = len(t_h), float(np.median(np.diff(t_h)))
    jump = np.full(count, np.nan)
    if count < 2 * width:
        return jump
    sums = np.concatenate([[0.0], np.cumsum(residual_m)])
    means = (sums[width:] - sums[:-width]) / width
    middle = np.arange(width, count - width + 1)
    whole = t_h[middle + width - 1] - t_h[middle - width] < (2 * width - 0.5) * step_h
    jump[middle] = np.where(whole, means[width:] - means[:-width], np.nan)
    return jump
