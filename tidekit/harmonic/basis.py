"""The columns at the samples of a record, as three verbs; never held whole.

Where the times lie on a regular grid the fast path of `tidekit.harmonic.grid` does the work, else explicit rows.
"""

from __future__ import annotations

from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from tidekit.harmonic.columns import Columns, Complex, Float
from tidekit.harmonic.grid import GridBasis, GridTables
from tidekit.harmonic.scattered import ScatteredBasis

_GRID_TOLERANCE_H = 3e-6
"""How far a time may be off the grid: 10 ms, in which M2 turns by 1e-6 radians. [h]"""
_SPARSE = 8
"""A grid with fewer than one sample in this many places is worked through by rows."""
_CHUNK = 1 << 17
"""Times looked at together, which bounds memory."""


class Basis(Protocol):
    """Complex columns c at the samples of a record; k columns, n samples."""

    def gram(self) -> Float:
        """Sums of products of their real and imaginary parts, which stand in turn; shape (2k, 2k)."""

    def project(self, series: Float) -> Complex:
        """Sums of ``c y`` over the samples, for a series of shape (n,); shape (k,)."""

    def evaluate(self, phasors: Complex) -> Float:
        """``Re sum c P`` at the samples, shape (n,)."""


def basis_for(columns: Columns, t_h: Float) -> Basis:
    """Choose the basis for the times of a record.

    Parameters
    ----------
    columns : Columns
        What to fit.
    t_h : ndarray, shape (n,)
        Sorted times. [UTC hours since 2000-01-01 00:00]

    Returns
    -------
    Basis
        The fast one where the times lie on a regular grid and the slow factors do not jump.
    """
    step_h = None if columns.yearly_jumps or len(t_h) < 32 else grid_step_h(t_h)
    if step_h is not None:
        count = round(float(t_h[-1] - t_h[0]) / step_h) + 1
        tables = GridTables.of(columns, float(t_h[0]), step_h, count)
        present = grid_places(t_h, step_h, tables.count)
        if present is not None:
            return GridBasis(tables, present)
    return ScatteredBasis.of(columns, t_h)


def grid_step_h(t_h: Float) -> float | None:
    """Step of the grid that sorted times may lie on; None where that would be too sparse. [h]"""
    span = float(t_h[-1] - t_h[0])
    some = np.linspace(0, len(t_h) - 2, min(len(t_h) - 1, 4096)).astype(np.int64)
    # A middle step carries rounding; the whole span is a whole number of steps and gives it to full precision.
    steps = round(span / float(np.median(t_h[some + 1] - t_h[some])))
    return span / steps if 0 < steps < _SPARSE * len(t_h) else None


def grid_places(t_h: Float, step_h: float, count: int) -> NDArray[np.bool_] | None:
    """Which of `count` places from the first time have a sample; None where a time is off the grid or twice on it."""
    present = np.zeros(count, dtype=np.bool_)
    for begin in range(0, len(t_h), _CHUNK):
        exact = (t_h[begin : begin + _CHUNK] - t_h[0]) / step_h
        nearest = np.rint(exact)
        exact -= nearest
        if max(exact.max(), -exact.min()) * step_h > _GRID_TOLERANCE_H:
            return None
        present[nearest.astype(np.int64)] = True
    return present if np.count_nonzero(present) == len(t_h) else None
