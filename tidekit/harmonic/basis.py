"""The analyser's basis: carriers of constituents at the times of a record, never held whole.

A basis has three verbs, all on complex columns ``c_k(t) = f exp(i(V + u))``:

- `gram` gives the sums of products ``conj(c_j) c_k`` and ``c_j c_k`` over the samples,
- `project` gives the sums ``conj(c_k) y`` for series y (a right-hand side),
- `evaluate` gives ``Re sum c_k P_k`` at the samples (heights from phasors).

On a regular grid the nodal factors are taken linear between block edges, so that a row of block b at offset m is
``(1 - w_m) E[m,k] Z[b,k] + w_m E[m,k] Z[b+1,k]``. All three verbs are then products of small matrices, and the
Gram matrix of a full grid is the elementwise product of the offsets' and the blocks' Gram matrices. Samples that
are missing are taken off by their explicit rows.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from tidekit.constituents.catalogue import speeds_deg_per_h
from tidekit.constituents.constants import NodalConvention
from tidekit.constituents.modulation import carriers

BLOCK_H = 240.0
"""Block length. L2, the fastest modulated, turns twice in 8.85 years: linear over ten days errs by 5e-5 of it."""
CHUNK = 16384
"""Explicit rows at a time, which bounds memory."""
_GRID_TOLERANCE = 1e-4
"""Part of a step by which a time may be off the grid: 0.4 s on hourly data, 0.002 degrees of M2."""

Float = NDArray[np.float64]
Complex = NDArray[np.complex128]


class Basis(Protocol):
    """Carriers at the samples of a record; k columns, n samples."""

    @property
    def size(self) -> int:
        """Number of samples n."""

    def gram(self) -> tuple[Complex, Complex]:
        """Sums over the samples of ``conj(c_j) c_k`` and of ``c_j c_k``, each shape (k, k)."""

    def project(self, series: Float) -> Complex:
        """Sums over the samples of ``conj(c_k) y_q`` for series of shape (n, q); shape (k, q)."""

    def evaluate(self, phasors: Complex) -> Float:
        """``Re sum c_k P_k`` at the samples, shape (n,)."""


def basis_for(names: Sequence[str], t_h: Float, *, nodal: NodalConvention) -> Basis:
    """Choose the basis for the times of a record.

    Parameters
    ----------
    names : sequence of str, length k
        Constituents.
    t_h : ndarray, shape (n,)
        Sorted times. [UTC hours since 2000-01-01 00:00]
    nodal : {"exact", "mid_year"}
        Nodal convention.

    Returns
    -------
    Basis
        Of blocks where the times lie on a regular grid and the modulation is smooth, else of explicit rows.
    """
    step_h = grid_step_h(t_h)
    # Mid-year factors jump at New Year, which lines between block edges cannot follow.
    if nodal == "exact" and step_h is not None and len(t_h) > 4 * len(names):
        return GridBasis.of(names, t_h, step_h)
    return RowBasis(tuple(names), t_h, nodal)


def grid_step_h(t_h: Float) -> float | None:
    """Step of the regular grid that sorted times lie on, gaps allowed; None where they lie on none. [h]"""
    if len(t_h) < 3:
        return None
    differences = np.diff(t_h)
    step = float(np.median(differences))
    # The median carries rounding; the whole span is a whole number of steps and gives it to full precision.
    step = float((t_h[-1] - t_h[0]) / max(round((t_h[-1] - t_h[0]) / step), 1))
    index = (t_h - t_h[0]) / step
    off = np.abs(index - np.rint(index)).max()
    too_sparse = index[-1] > 4 * len(t_h)
    return None if off > _GRID_TOLERANCE or too_sparse else step


@dataclass(frozen=True, eq=False)
class RowBasis:
    """Carriers by explicit rows, a chunk at a time: any times, either nodal convention."""

    names: tuple[str, ...]
    t_h: Float
    nodal: NodalConvention

    @property
    def size(self) -> int:
        """Number of samples."""
        return len(self.t_h)

    def _chunks(self) -> Iterator[tuple[slice, Complex]]:
        for start in range(0, len(self.t_h), CHUNK):
            rows = slice(start, start + CHUNK)
            yield rows, carriers(self.names, self.t_h[rows], nodal=self.nodal)

    def gram(self) -> tuple[Complex, Complex]:
        """See `Basis.gram`."""
        return _sum_grams(matrix for _, matrix in self._chunks())

    def project(self, series: Float) -> Complex:
        """See `Basis.project`."""
        total = np.zeros((len(self.names), series.shape[1]), dtype=np.complex128)
        for rows, matrix in self._chunks():
            total += matrix.conj().T @ series[rows]
        return total

    def evaluate(self, phasors: Complex) -> Float:
        """See `Basis.evaluate`."""
        return np.concatenate([(matrix @ phasors).real for _, matrix in self._chunks()])


def _sum_grams(pieces: Iterator[Complex]) -> tuple[Complex, Complex]:
    hermitian = symmetric = np.zeros((0, 0), dtype=np.complex128)
    for matrix in pieces:
        real, imaginary = np.ascontiguousarray(matrix.real), np.ascontiguousarray(matrix.imag)
        rr, ii, ri = real.T @ real, imaginary.T @ imaginary, real.T @ imaginary
        h, s = rr + ii + 1j * (ri - ri.T), rr - ii + 1j * (ri + ri.T)
        hermitian, symmetric = (h, s) if hermitian.size == 0 else (hermitian + h, symmetric + s)
    return hermitian, symmetric


@dataclass(frozen=True, eq=False)
class GridBasis:
    """Carriers on a regular grid with gaps, by blocks."""

    offsets: Complex
    """``(1 - w) E`` beside ``w E``, shape (M, 2k): carriers of a block at its offsets, for either edge."""
    edges: Complex
    """Carriers at the block starts with the nodal factors of either edge, shape (B, 2k)."""
    index: NDArray[np.int64]
    """Place of each sample on the grid, shape (n,)."""

    @classmethod
    def of(cls, names: Sequence[str], t_h: Float, step_h: float) -> GridBasis:
        """Set up blocks for sorted times on a grid of `step_h`."""
        index = np.rint((t_h - t_h[0]) / step_h).astype(np.int64)
        points = int(index[-1]) + 1
        length = min(max(round(BLOCK_H / step_h), 1), points)
        count = -(-points // length)
        starts = t_h[0] + np.arange(count + 1) * (length * step_h)
        at_edge = carriers(names, starts)
        turn = np.deg2rad(speeds_deg_per_h(names)) * step_h
        # The factor at a block's end, brought back to its start by the constituent's steady turning.
        at_end = at_edge[1:] * np.exp(-1j * turn * length)
        wave = np.exp(1j * np.outer(np.arange(length), turn))
        weight = (np.arange(length) / length)[:, None]
        return cls(np.hstack([(1 - weight) * wave, weight * wave]), np.hstack([at_edge[:-1], at_end]), index)

    @property
    def size(self) -> int:
        """Number of samples."""
        return len(self.index)

    @property
    def _columns(self) -> int:
        return int(self.edges.shape[1]) // 2

    def _fold(self, matrix: Complex) -> Complex:
        """Add the four quarters of a (2k, 2k) matrix: both edges make one column."""
        k = self._columns
        return matrix[:k, :k] + matrix[:k, k:] + matrix[k:, :k] + matrix[k:, k:]

    def _rows(self, places: NDArray[np.int64]) -> Iterator[Complex]:
        """Explicit rows at grid places, a chunk at a time."""
        k, length = self._columns, len(self.offsets)
        for start in range(0, len(places), CHUNK):
            block, offset = np.divmod(places[start : start + CHUNK], length)
            both = self.offsets[offset] * self.edges[block]
            yield both[:, :k] + both[:, k:]

    def gram(self) -> tuple[Complex, Complex]:
        """See `Basis.gram`. Each block is taken whole less its missing rows, or by its rows: whichever are fewer."""
        length = len(self.offsets)
        present = np.zeros((len(self.edges), length), dtype=np.bool_)
        present.ravel()[self.index] = True
        whole = present.sum(axis=1) * 2 > length
        edges = self.edges[whole]
        hermitian = self._fold((self.offsets.conj().T @ self.offsets) * (edges.conj().T @ edges))
        symmetric = self._fold((self.offsets.T @ self.offsets) * (edges.T @ edges))
        missing = np.flatnonzero((~present & whole[:, None]).ravel())
        extra = np.flatnonzero((present & ~whole[:, None]).ravel())
        for places, sign in ((missing, -1.0), (extra, 1.0)):
            if len(places):
                h, s = _sum_grams(self._rows(places))
                hermitian, symmetric = hermitian + sign * h, symmetric + sign * s
        return hermitian, symmetric

    def project(self, series: Float) -> Complex:
        """See `Basis.project`. Missing samples are zeros of the grid."""
        k, length = self._columns, len(self.offsets)
        grid = np.zeros(len(self.edges) * length)
        table = np.hstack([self.offsets.real, self.offsets.imag])
        result = np.empty((k, series.shape[1]), dtype=np.complex128)
        for column in range(series.shape[1]):
            grid[self.index] = series[:, column]
            sums = grid.reshape(-1, length) @ table
            both = np.sum(self.edges.conj() * (sums[:, : 2 * k] - 1j * sums[:, 2 * k :]), axis=0)
            result[:, column] = both[:k] + both[k:]
        return result

    def evaluate(self, phasors: Complex) -> Float:
        """See `Basis.evaluate`."""
        strength = self.edges * np.concatenate([phasors, phasors])
        table = np.hstack([self.offsets.real, -self.offsets.imag])
        return np.asarray((np.hstack([strength.real, strength.imag]) @ table.T).ravel()[self.index])
