"""Predicted heights at times, and their first and second derivatives."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import ArrayLike, NDArray

from tidekit.astronomy.timescales import datetime64_from_hours
from tidekit.constituents.constants import HarmonicConstants, NodalConvention
from tidekit.errors import AnalysisError
from tidekit.prediction.blocks import BLOCK_H, equal_blocks, phasor_blocks

_Array = NDArray[np.float64]

_GRID_TOLERANCE_H = 1e-6
"""A time this near a grid is on it: 4 ms, in which no tide rises a tenth of a millimetre. [h]"""
_GRID_WORTH = 4
"""A grid is worth predicting whole when the times asked are at least one in this many of it."""
_SAMPLES_A_BLOCK = 4096
"""Bounds the memory of the grid's cosines and sines to 10 MB for 70 constituents."""
_BLOCKS_AT_ONCE = 256


def predict_heights(constants: HarmonicConstants, t_h: ArrayLike, *, nodal: NodalConvention | None = None) -> _Array:
    """Predict the height of the tide.

    Parameters
    ----------
    constants : HarmonicConstants
        Of k constituents.
    t_h : array-like, shape (n,)
        Times, in any order; a regular grid, with or without holes, is fastest.
        [UTC hours since 2000-01-01 00:00]
    nodal : {"exact", "mid_year"}, optional
        Nodal convention; the constants' own by default.

    Returns
    -------
    ndarray, shape (n,)
        Heights above the constants' vertical reference, the mean level included. [m]

    Raises
    ------
    AnalysisError
        If a time is not finite.
    """
    return constants.mean_level_m + _derivative(constants, t_h, nodal, order=0)


def rate_m_per_h(constants: HarmonicConstants, t_h: ArrayLike, *, nodal: NodalConvention | None = None) -> _Array:
    """Predict the rate of rise of the tide.

    Parameters
    ----------
    constants : HarmonicConstants
        Of k constituents.
    t_h : array-like, shape (n,)
        Times. [UTC hours since 2000-01-01 00:00]
    nodal : {"exact", "mid_year"}, optional
        Nodal convention; the constants' own by default.

    Returns
    -------
    ndarray, shape (n,)
        First derivative of the height, positive on the flood. [m/h]

    Raises
    ------
    AnalysisError
        If a time is not finite.
    """
    return _derivative(constants, t_h, nodal, order=1)


def acceleration_m_per_h2(
    constants: HarmonicConstants, t_h: ArrayLike, *, nodal: NodalConvention | None = None
) -> _Array:
    """Predict the second derivative of the height of the tide, negative about high water.

    Parameters
    ----------
    constants : HarmonicConstants
        Of k constituents.
    t_h : array-like, shape (n,)
        Times. [UTC hours since 2000-01-01 00:00]
    nodal : {"exact", "mid_year"}, optional
        Nodal convention; the constants' own by default.

    Returns
    -------
    ndarray, shape (n,)
        [m/h^2]

    Raises
    ------
    AnalysisError
        If a time is not finite.
    """
    return _derivative(constants, t_h, nodal, order=2)


def _derivative(constants: HarmonicConstants, t_h: ArrayLike, nodal: NodalConvention | None, *, order: int) -> _Array:
    times = np.asarray(t_h, dtype=np.float64).ravel()
    if not np.all(np.isfinite(times)):
        message = f"{np.sum(~np.isfinite(times))} of {times.size} times are not finite; leave them out"
        raise AnalysisError(message)
    used = constants if nodal is None else replace(constants, nodal=nodal)
    if times.size == 0 or not np.any(used.amplitude_m > 0.0):
        return np.zeros(times.size)
    result = np.empty(times.size)
    for stretch in _smooth_parts(times, used.nodal):
        result[stretch] = _in_stretch(used, times[stretch], order)
    return result


def _smooth_parts(times: _Array, nodal: NodalConvention) -> list[NDArray[np.intp] | slice]:
    """Group times within which the nodal factors are smooth: all of them, or those of one year (UTC)."""
    if nodal == "exact":
        return [slice(None)]
    years = datetime64_from_hours(times).astype("datetime64[Y]")
    return [np.flatnonzero(years == year) for year in np.unique(years)]


def _in_stretch(constants: HarmonicConstants, times: _Array, order: int) -> _Array:
    grid = _grid_of(times)
    if grid is None:
        first = float(times.min())
        blocks = equal_blocks(constants, first, max(float(times.max()), first + 1.0))
        return blocks.at(*blocks.locate(times), order=order)
    step, place = grid
    return _on_grid(constants, float(times.min()), step, int(place.max()) + 1, order)[place]


def _grid_of(times: _Array) -> tuple[float, NDArray[np.intp]] | None:
    """Step of the grid that the times lie on and the place of each; None where there is no such grid."""
    steps = np.diff(np.sort(times))
    steps = steps[steps > _GRID_TOLERANCE_H]
    if len(steps) < 2:
        return None
    start, span = float(times.min()), float(np.ptp(times))
    intervals = round(span / float(steps.min()))
    if intervals + 1 > _GRID_WORTH * len(times):
        return None
    step = span / intervals
    place = np.rint((times - start) / step).astype(np.intp)
    if np.max(np.abs(start + place * step - times)) > _GRID_TOLERANCE_H:
        return None
    return step, place


def _on_grid(constants: HarmonicConstants, start: float, step: float, count: int, order: int) -> _Array:
    width = int(np.clip(BLOCK_H / step, 1, _SAMPLES_A_BLOCK))
    tau = step * np.arange(width, dtype=np.float64)
    starts = start + step * width * np.arange(-(-count // width))
    parts = []
    for begin in range(0, len(starts), _BLOCKS_AT_ONCE):
        some = starts[begin : begin + _BLOCKS_AT_ONCE]
        blocks = phasor_blocks(constants, some, some + step * width, year_at_h=start)
        parts.append(blocks.on_grid(tau, order=order).ravel())
    return np.concatenate(parts)[:count]
