"""The fast path: columns on a regular grid with gaps.

Time on the grid is a block, a window in it and an offset in the window. With the slow factors linear over a block,
a row of the design is ``U[m] * V[b]`` folded: ``V[b]`` holds start and change of every column's factor in block b,
``U[m]`` the turning and the turning times w at place m of a block. So a projection is one matrix product with U and
a sum with V; an evaluation is the same backwards; and the Gram matrix of the full grid is the elementwise product
of those of U and V. Missing samples are taken off by their explicit rows, or a block by the rows it has, whichever
are fewer.

A long record at short steps has a second level: over a window of some hours every column lies in a space of a
dozen dimensions, so a window's samples enter through a dozen coordinates.

Complex arrays are viewed as real ones with real and imaginary parts side by side, so that all products are real.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import cached_property
from itertools import chain

import numpy as np
from numpy.typing import NDArray

from tidekit.harmonic.columns import Columns, Complex, Float, block_h

Mask = NDArray[np.bool_]

WINDOW_H = 3.0
"""Window of the second level. At the speed of M10 it needs 14 coordinates; a longer one leaves more of them to
gaps' explicit rows, a shorter one saves less."""
_WINDOW_ACCURACY = 1e-10
"""Singular values of a window's columns below this part of the largest are left out."""
ROWS_AT_ONCE = 1024
"""Explicit rows at a time, which stay in cache: 1 MB for 70 columns."""
_SAMPLES_AT_ONCE = 1 << 19
"""Grid places at a time, which bounds memory to some MB."""


def gram_of(rows: Complex) -> Float:
    """Real Gram matrix of complex rows (n, k), shape (2k, 2k), real and imaginary parts in turn."""
    real = rows.view(np.float64)
    return np.asarray(real.T @ real)


def hermitian_and_symmetric(gram: Float) -> tuple[Complex, Complex]:
    """Sums of ``conj(c_j) c_k`` and of ``c_j c_k`` from a Gram matrix of `gram_of`."""
    rr, ii, ri = gram[::2, ::2], gram[1::2, 1::2], gram[::2, 1::2]
    return rr + ii + 1j * (ri - ri.T), rr - ii + 1j * (ri + ri.T)


@dataclass(frozen=True, eq=False)
class GridTables:
    """What all records on one grid share: U, V and the window's coordinates."""

    window: Float
    """Orthonormal coordinates of a window's samples, shape (w, r); (1, 1) without a second level."""
    places: Complex
    """U: turning, and turning times w, of each column at each window and coordinate, shape (m r, 2k)."""
    blocks: Complex
    """V: start and change of each column's factor in each block, shape (b, 2k)."""
    turning: tuple[Complex, Complex]
    """Turning of each column over the windows of a block (m, k) and over a window's offsets (w, k)."""

    @classmethod
    def of(cls, columns: Columns, start_h: float, step_h: float, count: int) -> GridTables:
        """Set up the tables of `count` places from a start."""
        turn = columns.turn_rad_per_h
        width = _window_width(step_h, count)
        windows = -(-count // width)
        blocks = max(-(-windows * width * step_h // block_h(count * step_h)), 1.0)
        in_block = int(-(-windows // blocks))
        blocks = -(-windows // in_block)
        edges = start_h + np.arange(blocks + 1, dtype=np.float64) * (in_block * width * step_h)
        over_window = np.exp(1j * np.outer(np.arange(width) * step_h, turn))
        over_block = np.exp(1j * np.outer(np.arange(in_block) * (width * step_h), turn))
        ramp = np.arange(width)[:, None] / (in_block * width)
        window = _window_coordinates(over_window, ramp)
        level, rise = window.T @ over_window, window.T @ (ramp * over_window)
        w = (np.arange(in_block) / in_block)[:, None, None]
        first = over_block[:, None, :] * level
        second = over_block[:, None, :] * (w * level + rise)
        places = np.concatenate([first, second], axis=2).reshape(-1, 2 * len(turn))
        return cls(window, places, np.hstack(columns.chords(edges)), (over_block, over_window))

    @property
    def shape(self) -> tuple[int, int, int]:
        """Blocks, windows in a block, samples in a window."""
        return len(self.blocks), len(self.turning[0]), len(self.window)

    @property
    def count(self) -> int:
        """Places of the grid."""
        blocks, windows, width = self.shape
        return blocks * windows * width

    @cached_property
    def places_gram(self) -> tuple[Complex, Complex]:
        """Gram matrices of U."""
        return hermitian_and_symmetric(gram_of(self.places))

    def stretches(self) -> Iterator[slice]:
        """Blocks in stretches of bounded size."""
        blocks, windows, width = self.shape
        some = max(_SAMPLES_AT_ONCE // (windows * width), 1)
        yield from (slice(begin, min(begin + some, blocks)) for begin in range(0, blocks, some))

    def project(self, grid: Float, blocks: slice) -> Complex:
        """Sums of ``c y`` over some blocks of a gridded series, shape (2k,): start and change not yet folded."""
        coordinates = grid.reshape(-1, self.shape[2]) @ self.window if self.shape[2] > 1 else grid
        sums = (coordinates.reshape(-1, len(self.places)) @ self.places.view(np.float64)).view(np.complex128)
        return np.asarray(np.sum(sums * self.blocks[blocks], axis=0))

    def evaluate(self, phasors: Complex, blocks: slice) -> Float:
        """``Re sum c P`` at all places of some blocks."""
        strength = (self.blocks[blocks] * np.concatenate([phasors, phasors])).conj()
        coordinates = strength.view(np.float64) @ self.places.view(np.float64).T
        if self.shape[2] > 1:
            coordinates = coordinates.reshape(-1, self.window.shape[1]) @ self.window.T
        return np.asarray(coordinates.ravel())

    def rows(self, places: NDArray[np.int64]) -> Iterator[Complex]:
        """Explicit rows at some places, a chunk at a time; each chunk overwrites the one before."""
        k = self.blocks.shape[1] // 2
        _, windows, width = self.shape
        start, change = np.ascontiguousarray(self.blocks[:, :k]), np.ascontiguousarray(self.blocks[:, k:])
        # Reusing two buffers halves the time, as fresh memory of this size comes from the system page by page.
        buffers = np.empty((2, min(ROWS_AT_ONCE, len(places)), k), dtype=np.complex128)
        for begin in range(0, len(places), ROWS_AT_ONCE):
            block, inside = np.divmod(places[begin : begin + ROWS_AT_ONCE], windows * width)
            row, other = buffers[:, : len(block)]
            np.take(change, block, axis=0, out=row, mode="clip")
            row *= (inside / (windows * width))[:, None]
            row += np.take(start, block, axis=0, out=other, mode="clip")
            for table, index in zip(self.turning, np.divmod(inside, width), strict=True):
                if len(table) > 1:
                    row *= np.take(table, index, axis=0, out=other, mode="clip")
            yield row

    def window_rows(self, windows: NDArray[np.int64]) -> Iterator[Complex]:
        """Rows of whole windows, one each coordinate, a chunk at a time."""
        k = self.blocks.shape[1] // 2
        table = self.places.reshape(self.shape[1], self.window.shape[1], -1)
        some = max(ROWS_AT_ONCE // self.window.shape[1], 1)
        for begin in range(0, len(windows), some):
            block, inside = np.divmod(windows[begin : begin + some], self.shape[1])
            both = table[inside] * self.blocks[block][:, None, :]
            yield (both[..., :k] + both[..., k:]).reshape(-1, k)


@dataclass(frozen=True, eq=False)
class GridBasis:
    """The columns at one record's samples: the tables of a grid, and which places the record has."""

    tables: GridTables
    """Tables, which other records may share."""
    present: Mask
    """Which places have a sample, shape (places of the grid,)."""

    def gram(self) -> Float:
        """See `Basis.gram`."""
        tables = self.tables
        blocks, windows, width = tables.shape
        present = self.present.reshape(blocks, windows, width)
        whole = np.count_nonzero(present.reshape(blocks, -1), axis=1) * 2 > windows * width
        v = hermitian_and_symmetric(gram_of(np.ascontiguousarray(tables.blocks[whole])))
        hermitian, symmetric = (_fold(a * b) for a, b in zip(tables.places_gram, v, strict=True))
        total = _interleaved(hermitian, symmetric)
        differs = present != whole[:, None, None]
        entire = differs.all(axis=2) & (width > 1)
        differs &= ~entire[:, :, None]
        for sign, chosen in ((-1.0, whole), (1.0, ~whole)):
            odd = np.flatnonzero(differs & chosen[:, None, None])
            full = np.flatnonzero(entire & chosen[:, None])
            for rows in chain(tables.rows(odd), tables.window_rows(full)):
                total += sign * gram_of(rows)
        return total

    def project(self, series: Float) -> Complex:
        """See `Basis.project`. Missing samples are zeros of the grid."""
        total = np.zeros(self.tables.blocks.shape[1], dtype=np.complex128)
        for blocks, present, samples in self._stretches():
            grid = np.zeros(len(present))
            grid[present] = series[samples]
            total += self.tables.project(grid, blocks)
        return np.asarray(total.reshape(2, -1).sum(axis=0))

    def evaluate(self, phasors: Complex) -> Float:
        """See `Basis.evaluate`."""
        result = np.empty(np.count_nonzero(self.present))
        for blocks, present, samples in self._stretches():
            result[samples] = self.tables.evaluate(phasors, blocks)[present]
        return result

    def _stretches(self) -> Iterator[tuple[slice, Mask, slice]]:
        """Blocks, which of their places have a sample, and where those samples stand in the record."""
        in_block = self.tables.count // len(self.tables.blocks)
        sample = 0
        for blocks in self.tables.stretches():
            present = self.present[blocks.start * in_block : blocks.stop * in_block]
            count = int(np.count_nonzero(present))
            yield blocks, present, slice(sample, sample + count)
            sample += count


def _fold(matrix: Complex) -> Complex:
    """Add the four quarters of a (2k, 2k) matrix: start and change make one column."""
    k = len(matrix) // 2
    return matrix[:k, :k] + matrix[:k, k:] + matrix[k:, :k] + matrix[k:, k:]


def _interleaved(hermitian: Complex, symmetric: Complex) -> Float:
    """The reverse of `hermitian_and_symmetric`."""
    gram = np.empty((2 * len(hermitian), 2 * len(hermitian)))
    gram[::2, ::2] = 0.5 * (hermitian + symmetric).real
    gram[1::2, 1::2] = 0.5 * (hermitian - symmetric).real
    gram[::2, 1::2] = 0.5 * (hermitian + symmetric).imag
    gram[1::2, ::2] = gram[::2, 1::2].T
    return gram


def _window_width(step_h: float, count: int) -> int:
    """Samples in a window; 1 where a second level would not pay."""
    width = int(WINDOW_H / step_h + 0.5)
    return width if width >= 30 and count >= 10 * width else 1


def _window_coordinates(over_window: Complex, ramp: Float) -> Float:
    if len(over_window) == 1:
        return np.ones((1, 1))
    # Ramp times turning too, which the linear factors need; it is small, so it is scaled up to count.
    spread = np.hstack([over_window, ramp / ramp[-1] * over_window]).view(np.float64)
    vectors, values, _ = np.linalg.svd(spread, full_matrices=False)
    return np.ascontiguousarray(vectors[:, values > _WINDOW_ACCURACY * values[0]])
