"""High and low waters: where the derivative of the predicted height crosses zero."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from tidekit.astronomy.timescales import datetime64_from_hours
from tidekit.constituents.constants import HarmonicConstants
from tidekit.errors import AnalysisError
from tidekit.frozen import freeze_arrays
from tidekit.prediction.blocks import PhasorBlocks, equal_blocks

_Array = NDArray[np.float64]
_Indices = NDArray[np.intp]
_Mask = NDArray[np.bool_]

SAMPLES_A_CYCLE = 12
"""Samples of the rate in a cycle of the fastest constituent. Two or three crossings between two samples are found
all the same, unless the rate's second derivative turns there twice."""
TIME_TOLERANCE_H = 1e-6
"""Turning points are refined until a step is below this: 4 ms. [h]"""
_STEPS_MOST = 60
"""Bisection alone narrows any bracket here to `TIME_TOLERANCE_H` in fewer."""


@dataclass(frozen=True, eq=False, kw_only=True)
class TurningPoints:
    """High and low waters in order of time; all arrays have shape (n,)."""

    t_h: _Array
    """Times. [UTC hours since 2000-01-01 00:00]"""
    height_m: _Array
    """Heights above the constants' or the record's vertical reference. [m]"""
    is_high: NDArray[np.bool_]
    """True at a high water, False at a low water."""

    def __post_init__(self) -> None:
        freeze_arrays(self)

    def __len__(self) -> int:
        return len(self.t_h)

    def where(self, chosen: NDArray[np.bool_] | _Indices) -> TurningPoints:
        """Give some of them, by mask or by place."""
        return TurningPoints(t_h=self.t_h[chosen], height_m=self.height_m[chosen], is_high=self.is_high[chosen])

    def to_frame(self) -> pd.DataFrame:
        """One row a turning point: `time` (UTC), `height_m` and `kind` (`high` or `low`)."""
        return pd.DataFrame(
            {
                "time": pd.DatetimeIndex(datetime64_from_hours(self.t_h)).tz_localize("UTC"),
                "height_m": self.height_m,
                "kind": np.where(self.is_high, "high", "low"),
            }
        )


def turning_points(constants: HarmonicConstants, start_h: float, end_h: float) -> TurningPoints:
    """Find every high and low water of the predicted tide.

    Parameters
    ----------
    constants : HarmonicConstants
        What to predict from, under its own nodal convention.
    start_h, end_h : float
        The period; its ends are no turning points. [UTC hours since 2000-01-01 00:00]

    Returns
    -------
    TurningPoints
        Highs and lows by turns, times to some milliseconds. A tide without amplitude has none.

    Raises
    ------
    AnalysisError
        If the period does not end after its start.

    Notes
    -----
    The rate is sampled `SAMPLES_A_CYCLE` times in a cycle of the fastest constituent. A change of sign brackets a
    root. Where the rate or its derivative heads for zero from both ends of an interval, the rate's own turning
    points split it first, so that a double water that is just being born is not missed. Newton's method then runs
    on all brackets at once and bisects wherever a step would leave one. Where two blocks meet with rates of
    opposite signs (as they may at New Year under the mid-year convention, whose height has a step of millimetres
    there) the turn lies at the seam.
    """
    check_period(start_h, end_h)
    if not np.any(constants.amplitude_m > 0.0):
        return TurningPoints(t_h=np.empty(0), height_m=np.empty(0), is_high=np.empty(0, dtype=np.bool_))
    blocks = equal_blocks(constants, start_h, end_h)
    block, tau, falling = _turns_inside(blocks)
    seam_block, seam_falling = _turns_at_seams(blocks)
    block = np.concatenate([block, seam_block])
    tau = np.concatenate([tau, np.zeros(len(seam_block))])
    falling = np.concatenate([falling, seam_falling])
    height = constants.mean_level_m + blocks.at(block, tau)
    order = np.argsort(blocks.start_h[block] + tau, kind="stable")
    return TurningPoints(t_h=(blocks.start_h[block] + tau)[order], height_m=height[order], is_high=falling[order])


def check_period(start_h: float, end_h: float) -> None:
    """Refuse a period that does not end after its start.

    Raises
    ------
    AnalysisError
        If it does not.
    """
    if not (np.isfinite(start_h) and np.isfinite(end_h) and end_h > start_h):
        message = f"the period runs from {start_h} to {end_h} h; it must end after its start"
        raise AnalysisError(message)


def _turns_inside(blocks: PhasorBlocks) -> tuple[_Indices, _Array, _Mask]:
    """Block, time after its start, and whether the rate falls through zero, of each turn inside a block."""
    fastest_cycle_h = 2 * np.pi / blocks.omega.max()
    length = float(np.max(blocks.end_h - blocks.start_h))
    tau = np.linspace(0.0, length, 1 + int(np.ceil(length * SAMPLES_A_CYCLE / fastest_cycle_h)))
    rate = blocks.on_grid(tau, order=1)
    block, column, split = _splits(blocks, tau, rate)
    plain = (rate[:, :-1] >= 0.0) != (rate[:, 1:] >= 0.0)
    plain[block, column] = False
    found = [_plain_brackets(plain, tau, rate), _split_brackets(blocks, tau, block, column, split)]
    block, low, high, falling = (np.concatenate(parts) for parts in zip(*found, strict=True))
    root = _crossings(blocks, block, low, high, falling, order=1)
    inside = root < (blocks.end_h - blocks.start_h)[block]
    return block[inside], root[inside], falling[inside]


def _splits(blocks: PhasorBlocks, tau: _Array, rate: _Array) -> tuple[_Indices, _Indices, _Array]:
    """Times that part the crossings of the rate where more than one may lie between two samples.

    They are the rate's own turning points: one where the rate heads for zero at two samples of one sign, two
    where its derivative does.
    """
    change, jerk = blocks.on_grid(tau, order=2), blocks.on_grid(tau, order=3)
    block, column, down = _heading_for_zero(rate, change)
    single = _crossings(blocks, block, tau[column], tau[column + 1], ~down, order=2)
    block_2, column_2, down_2 = _heading_for_zero(change, jerk)
    low, high = tau[column_2], tau[column_2 + 1]
    turn = _crossings(blocks, block_2, low, high, ~down_2, order=3)
    beyond = (blocks.at(block_2, turn, order=2) < 0.0) == down_2
    block_2, column_2, down_2 = block_2[beyond], column_2[beyond], down_2[beyond]
    earlier = _crossings(blocks, block_2, low[beyond], turn[beyond], down_2, order=2)
    later = _crossings(blocks, block_2, turn[beyond], high[beyond], ~down_2, order=2)
    return (
        np.concatenate([block, block_2, block_2]),
        np.concatenate([column, column_2, column_2]),
        np.concatenate([single, earlier, later]),
    )


def _heading_for_zero(value: _Array, slope: _Array) -> tuple[_Indices, _Indices, _Mask]:
    """Block and column of the intervals of one sign that head for zero from both ends, and whether downward."""
    above, down = value >= 0.0, slope < 0.0
    one_sign = above[:, :-1] == above[:, 1:]
    heading = (above[:, :-1] == down[:, :-1]) & (above[:, 1:] != down[:, 1:])
    block, column = np.nonzero(one_sign & heading)
    return block, column, above[block, column]


def _plain_brackets(changes: _Mask, tau: _Array, rate: _Array) -> tuple[_Indices, _Array, _Array, _Mask]:
    block, column = np.nonzero(changes)
    return block, tau[column], tau[column + 1], rate[block, column] >= 0.0


def _split_brackets(
    blocks: PhasorBlocks, tau: _Array, block: _Indices, column: _Indices, split: _Array
) -> tuple[_Indices, _Array, _Array, _Mask]:
    """Brackets between the ends of the given intervals and their splits."""
    interval, first = np.unique(block * len(tau) + column, return_index=True)
    ends = np.concatenate([tau[column[first]], tau[column[first] + 1]])
    key = np.concatenate([block * len(tau) + column, interval, interval])
    time = np.concatenate([split, ends])
    order = np.lexsort((time, key))
    key, time = key[order], time[order]
    above = blocks.at(key // len(tau), time, order=1) >= 0.0
    place = np.flatnonzero((key[:-1] == key[1:]) & (above[:-1] != above[1:]))
    return key[place] // len(tau), time[place], time[place + 1], above[place]


def _turns_at_seams(blocks: PhasorBlocks) -> tuple[_Indices, _Mask]:
    """Blocks at whose start the rate jumps through zero, and whether it falls."""
    later = np.arange(1, len(blocks.start_h))
    before = blocks.at(later - 1, (blocks.end_h - blocks.start_h)[:-1], order=1) >= 0.0
    after = blocks.at(later, np.zeros(len(later)), order=1) >= 0.0
    return later[before != after], before[before != after]


def _crossings(
    blocks: PhasorBlocks,
    block: _Indices,
    low: _Array,
    high: _Array,
    falling: _Mask,
    *,
    order: int,
) -> _Array:
    """Root of the `order`-th derivative in each bracket, times after the start of its block, shape (n,)."""

    def value_and_slope(which: _Indices, tau: _Array) -> tuple[_Array, _Array]:
        down = np.where(falling[which], -1.0, 1.0)
        value = blocks.at(block[which], tau, order=order)
        return down * value, down * blocks.at(block[which], tau, order=order + 1)

    return safeguarded_newton(value_and_slope, low, high)


def safeguarded_newton(
    value_and_slope: Callable[[_Indices, _Array], tuple[_Array, _Array]], low: _Array, high: _Array
) -> _Array:
    """Solve many equations at once, each for its root in a bracket, across which its function rises.

    Parameters
    ----------
    value_and_slope : callable
        Takes the places (m,) of equations and trial roots (m,); gives values and derivatives, each (m,).
    low, high : ndarray, shape (n,)
        Brackets.

    Returns
    -------
    ndarray, shape (n,)
        Roots, to `TIME_TOLERANCE_H`.
    """
    low, high = low.copy(), high.copy()
    root = 0.5 * (low + high)
    active = np.arange(len(root))
    for _ in range(_STEPS_MOST):
        if len(active) == 0:
            break
        here = root[active]
        value, slope = value_and_slope(active, here)
        low[active] = np.where(value < 0.0, here, low[active])
        high[active] = np.where(value < 0.0, high[active], here)
        step = np.divide(value, slope, out=np.full_like(value, np.inf), where=slope > 0.0)
        trial = here - step
        inside = (trial >= low[active]) & (trial <= high[active])
        trial = np.where(inside, trial, 0.5 * (low[active] + high[active]))
        root[active] = trial
        active = active[np.abs(trial - here) > TIME_TOLERANCE_H]
    return root
