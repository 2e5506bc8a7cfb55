"""The path for any times: explicit rows, a chunk at a time, with the same slow factors by blocks."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from tidekit.harmonic.columns import Columns, Complex, Float
from tidekit.harmonic.grid import ROWS_AT_ONCE, gram_of


@dataclass(frozen=True, eq=False)
class ScatteredBasis:
    """The columns at scattered times."""

    turn_rad_per_h: Float
    """Steady turning of each column, shape (k,). [radians per hour]"""
    start: Complex
    """Their factors at the start of each block, shape (b, k)."""
    change: Complex
    """What the factors gain over it."""
    block: NDArray[np.int64]
    """Block of each sample, shape (n,)."""
    since_h: Float
    """Time of each sample since its block's start, shape (n,). [h]"""
    part: Float
    """The same as a part of the block, shape (n,)."""

    @classmethod
    def of(cls, columns: Columns, t_h: Float) -> ScatteredBasis:
        """Set up for sorted times."""
        edges = columns.edges_h(float(t_h[0]), float(t_h[-1]))
        block = np.clip(np.searchsorted(edges, t_h, side="right") - 1, 0, len(edges) - 2)
        since = t_h - edges[block]
        start, change = columns.chords(edges)
        return cls(columns.turn_rad_per_h, start, change, block, since, since / np.diff(edges)[block])

    def _rows(self) -> Iterator[tuple[slice, Complex]]:
        for begin in range(0, len(self.block), ROWS_AT_ONCE):
            some = slice(begin, begin + ROWS_AT_ONCE)
            row = np.exp(1j * np.outer(self.since_h[some], self.turn_rad_per_h))
            row *= self.start[self.block[some]] + self.part[some, None] * self.change[self.block[some]]
            yield some, row

    def gram(self) -> Float:
        """See `Basis.gram`."""
        return np.asarray(sum(gram_of(rows) for _, rows in self._rows()))

    def project(self, series: Float) -> Complex:
        """See `Basis.project`."""
        return np.asarray(sum(series[some] @ rows for some, rows in self._rows()))

    def evaluate(self, phasors: Complex) -> Float:
        """See `Basis.evaluate`."""
        return np.concatenate([(rows @ phasors).real for _, rows in self._rows()])
