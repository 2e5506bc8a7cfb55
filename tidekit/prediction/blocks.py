"""The tide as slow phasors over blocks of days: one matrix product for grids, derivatives of any order.

Within a block of days the factor f exp(i(V + u)) of a constituent turns at its own speed but for a part that
changes over years. So in a block that begins at t_0, with tau = t - t_0::

    height(t) = mean + Re sum_k (first_k + slope_k tau) exp(i omega_k tau)

where `first` is exact at the block's start and `slope` makes it exact at its end.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import ArrayLike, NDArray

from tidekit.astronomy.timescales import datetime64_from_hours, hours_from_datetime64
from tidekit.constituents.catalogue import speeds_deg_per_h
from tidekit.constituents.constants import HarmonicConstants, NodalConvention
from tidekit.constituents.modulation import arguments_rad, carriers, nodal_factors

_Array = NDArray[np.float64]

BLOCK_H = 240.0
"""Longest block. A side line at twice the Moon's perigee, the fastest modulation there is, strays from its
chord by (240 h x 1.6e-4 rad/h)^2 / 8 = 2e-4 of itself: micrometres where there is one. [h]"""

_POINTS_AT_ONCE = 8192
"""Scattered times taken together: bounds the memory to some 10 MB for 70 constituents."""


@dataclass(frozen=True, eq=False, kw_only=True)
class PhasorBlocks:
    """Slow phasors of k constituents over b blocks; each block holds from its start to its end."""

    names: tuple[str, ...]
    """The constituents, those without amplitude left out."""

    start_h: _Array
    """Starts of the blocks, increasing, shape (b,). [UTC hours since 2000-01-01 00:00]"""
    end_h: _Array
    """Where each block stops being used: the next one's start, shape (b,). [hours, likewise]"""
    omega: _Array
    """Speeds, shape (k,). [radians per hour]"""
    first: NDArray[np.complex128]
    """f exp(i(V + u)) H exp(-iG) at each start, shape (b, k). [m]"""
    slope: NDArray[np.complex128]
    """Its slow change, the turning at `omega` taken out, shape (b, k). [m/h]"""

    def _coefficients(self, order: int) -> tuple[NDArray[np.complex128], NDArray[np.complex128]]:
        """Constant and linear part of the coefficients of the `order`-th derivative, each (b, k)."""
        turn = (1j * self.omega) ** order
        constant = turn * self.first
        if order:
            constant = constant + order * (1j * self.omega) ** (order - 1) * self.slope
        return constant, turn * self.slope

    def on_grid(self, tau_h: NDArray[np.float64], *, order: int = 0) -> _Array:
        """Tide, or a derivative of it, at the same times after every block's start.

        Parameters
        ----------
        tau_h : ndarray, shape (m,)
            Times after the start. [h]
        order : int
            Which derivative; 0 is the tide itself, without the mean level.

        Returns
        -------
        ndarray, shape (b, m)
            [m/h^order]
        """
        constant, linear = self._coefficients(order)
        angle = np.outer(self.omega, tau_h)
        cosine, sine = np.cos(angle), np.sin(angle)
        rows = np.hstack([constant.real, -constant.imag, linear.real, -linear.imag])
        return np.asarray(rows @ np.vstack([cosine, sine, cosine * tau_h, sine * tau_h]))

    def at(self, block: NDArray[np.intp], tau_h: _Array, *, order: int = 0) -> _Array:
        """Tide, or a derivative of it, at scattered times.

        Parameters
        ----------
        block : ndarray of int, shape (n,)
            Block of each time.
        tau_h : ndarray, shape (n,)
            Times after the start of their block. [h]
        order : int
            Which derivative; 0 is the tide itself, without the mean level.

        Returns
        -------
        ndarray, shape (n,)
            [m/h^order]
        """
        constant, linear = self._coefficients(order)
        result = np.empty(len(tau_h))
        for begin in range(0, len(tau_h), _POINTS_AT_ONCE):
            part = slice(begin, begin + _POINTS_AT_ONCE)
            tau = tau_h[part, np.newaxis]
            angle = tau * self.omega
            phasor = constant[block[part]] + linear[block[part]] * tau
            result[part] = np.sum(phasor.real * np.cos(angle) - phasor.imag * np.sin(angle), axis=1)
        return result

    def terms(self, t_h: _Array) -> NDArray[np.complex128]:
        """Each constituent's H f exp(i(V + u - G)) at times (n,), whose real part is its height, (n, k). [m]"""
        block, tau = self.locate(t_h)
        column = tau[:, np.newaxis]
        return np.asarray((self.first[block] + self.slope[block] * column) * np.exp(1j * column * self.omega))

    def locate(self, t_h: _Array) -> tuple[NDArray[np.intp], _Array]:
        """Block of each time, and the time after that block's start; both (n,)."""
        block = np.clip(np.searchsorted(self.start_h, t_h, side="right") - 1, 0, None)
        return block, t_h - self.start_h[block]


def phasor_blocks(
    constants: HarmonicConstants, start_h: ArrayLike, end_h: ArrayLike, *, year_at_h: float | None = None
) -> PhasorBlocks:
    """Make the slow phasors of blocks.

    Parameters
    ----------
    constants : HarmonicConstants
        Of k constituents; those of no amplitude are left out.
    start_h, end_h : array-like, shape (b,)
        Where each block starts and stops, at most `BLOCK_H` apart. [UTC hours since 2000-01-01 00:00]
    year_at_h : float, optional
        A time in the year whose factors all blocks take under the mid-year convention; each block's own
        middle by default. [hours, likewise]

    Returns
    -------
    PhasorBlocks
        Ready to evaluate.
    """
    start, end = np.asarray(start_h, dtype=np.float64), np.asarray(end_h, dtype=np.float64)
    present = np.flatnonzero(constants.amplitude_m > 0.0)
    names = [constants.names[index] for index in present]
    omega = np.deg2rad(speeds_deg_per_h(names))
    phasors = constants.phasors_m[present]
    if constants.nodal == "exact":
        first = carriers(names, start, nodal="exact")
        last = carriers(names, end, nodal="exact")
    else:
        year_at = 0.5 * (start + end) if year_at_h is None else np.array([year_at_h])
        held = nodal_factors(names, year_at, nodal=constants.nodal)
        first = held * np.exp(1j * arguments_rad(names, start))
        last = held * np.exp(1j * arguments_rad(names, end))
    length = (end - start)[:, np.newaxis]
    turned_back = last * np.exp(-1j * omega * length)
    return PhasorBlocks(
        names=tuple(names),
        start_h=start,
        end_h=end,
        omega=omega,
        first=first * phasors,
        slope=(turned_back - first) * phasors / length,
    )


def smooth_stretches(start_h: float, end_h: float, nodal: NodalConvention) -> _Array:
    """Bounds of the stretches in which the nodal factors change smoothly.

    Parameters
    ----------
    start_h, end_h : float
        The period. [UTC hours since 2000-01-01 00:00]
    nodal : {"exact", "mid_year"}
        The exact convention has no break; the mid-year one has one at each New Year (UTC).

    Returns
    -------
    ndarray, shape (number of stretches + 1,)
        Begins with `start_h` and ends with `end_h`. [hours, likewise]
    """
    if nodal == "exact":
        return np.array([start_h, end_h])
    first, last = datetime64_from_hours(np.array([start_h, end_h])).astype("datetime64[Y]")
    years = np.arange(first, last + 2).astype("datetime64[us]")
    turns = hours_from_datetime64(years)
    return np.concatenate([[start_h], turns[(turns > start_h) & (turns < end_h)], [end_h]])


def equal_blocks(constants: HarmonicConstants, start_h: float, end_h: float) -> PhasorBlocks:
    """Blocks that cover a period without a gap, all but the last of each stretch of the same length.

    Parameters
    ----------
    constants : HarmonicConstants
        What to predict from.
    start_h, end_h : float
        The period. [UTC hours since 2000-01-01 00:00]

    Returns
    -------
    PhasorBlocks
        The first starts at `start_h`, the last ends at `end_h`.
    """
    bounds = smooth_stretches(start_h, end_h, constants.nodal)
    starts = [np.arange(a, b, BLOCK_H) for a, b in pairwise(bounds)]
    start = np.concatenate(starts)
    return phasor_blocks(constants, start, np.append(start[1:], end_h))
