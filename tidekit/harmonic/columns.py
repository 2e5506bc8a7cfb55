"""The complex columns that are fitted: each a steady turning times a slow factor.

A constituent's column is ``c_k(t) = f exp(i(V + u))``. Within a block of days it is a steady turning
``exp(i omega_k (t - t_b))`` times a factor that changes over years, which is taken linear over the block. The mean
level and a trend are such columns too: they do not turn, and a trend is linear exactly.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from tidekit.constituents.modulation import year_start_h

Float = NDArray[np.float64]
Complex = NDArray[np.complex128]

SHORTEST_BLOCK_H, LONGEST_BLOCK_H = 240.0, 480.0
"""Blocks of records of half a year and of 20 years. M1 and L2, modulated fastest, stray by 4e-5 of themselves from a
chord over 240 h, and by 1e-6 on its average; M2 by 1e-7. What is left repeats with the block and so averages out of
longer records. The coefficients' error by block length is in tests/harmonic/test_grid.py."""
HOURS_PER_YEAR = 8765.82
"""A tropical year. [hours]"""


def block_h(span_h: float) -> float:
    """Longest block for a record of some length: some 365 of them in ten to twenty years, 16 in a month. [hours]"""
    return float(np.clip(span_h / 365.0, min(span_h / 16.0, SHORTEST_BLOCK_H), LONGEST_BLOCK_H))


@dataclass(frozen=True, eq=False)
class Columns:
    """Columns to fit, k of them."""

    turn_rad_per_h: Float
    """Steady turning of each, shape (k,). [radians per hour]"""
    at: Callable[[Float], Complex]
    """The columns at times, from shape (n,) to (n, k)."""
    yearly_jumps: bool = False
    """Whether the slow factors jump at each New Year (UTC), as they do under the mid-year convention."""

    def edges_h(self, start_h: float, end_h: float) -> Float:
        """Block edges from a start past an end, none further apart than `block_h`, and one at each jump."""
        count = int((end_h - start_h) // block_h(end_h - start_h)) + 1
        edges = np.linspace(start_h, max(end_h, start_h + 1.0), count + 1)
        if not self.yearly_jumps:
            return edges
        jumps = np.unique(year_start_h(edges, years_on=1))
        return np.unique(np.concatenate([edges, jumps[jumps < edges[-1]]]))

    def chords(self, edges_h: Float) -> tuple[Complex, Complex]:
        """Factors linear in each block between edges, each shape (b, k).

        Parameters
        ----------
        edges_h : ndarray, shape (b + 1,)
            Block edges, evenly spaced unless there are jumps. [UTC hours since 2000-01-01 00:00]

        Returns
        -------
        start, change : ndarray of complex
            A column is ``exp(i turn (t - t_b)) (start + w change)``, w from 0 to 1 over the block.
        """
        if self.yearly_jumps:
            # Just inside the block on both sides, as a jump belongs to the next one.
            start, end = self.at(edges_h[:-1]), self.at(edges_h[1:] - 1e-6)
            return start, end * np.exp(-1j * np.outer(np.diff(edges_h), self.turn_rad_per_h)) - start
        turned = np.exp(1j * np.outer(edges_h - edges_h[0], self.turn_rad_per_h))
        slow = self.at(edges_h) / turned
        if len(slow) > 2:
            # A chord lies off its arc by h^2/12 times the second derivative on average. Moving the edges by
            # that much leaves an error of average zero, which no slow coefficient feels.
            bend = np.diff(slow, 2, axis=0) / 12.0
            slow = slow - np.concatenate([bend[:1], bend, bend[-1:]])
        return slow[:-1] * turned[:-1], np.diff(slow, axis=0) * turned[:-1]
