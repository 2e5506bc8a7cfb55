"""A gauge record: heights in UTC and metres, their flags, and where every row went."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from tidekit.astronomy.timescales import hours_from_datetime64
from tidekit.records.ledger import RowLedger
from tidekit.records.station import Station

FLAG_GOOD, FLAG_NOT_EVALUATED, FLAG_SUSPECT, FLAG_FAIL, FLAG_MISSING = 1, 2, 3, 4, 9
"""Quality flags of IOC Manuals and Guides 54, volume 3 (UNESCO, 2013)."""


@dataclass(frozen=True)
class SourceFile:
    """An input file and its fingerprint."""

    path: str
    """The path as given."""
    sha256: str
    """SHA-256 of its bytes."""


@dataclass(frozen=True, eq=False, kw_only=True)
class GaugeRecord:
    """One gauge's record. Sorted by time, no time twice."""

    station: Station
    """Where it was recorded."""
    heights: pd.Series
    """Height of the water level, float64, indexed by UTC (tz-aware); NaN where the value is missing. [m]"""
    flags: pd.Series
    """Quality flag of each height (int8, the same index)."""
    ledger: RowLedger
    """What became of every row of the files."""
    sources: tuple[SourceFile, ...] = ()
    """The files it came from."""
    layout_name: str = ""
    """One line on the layout it was read with, for people and the audit trail."""

    @cached_property
    def usable(self) -> NDArray[np.bool_]:
        """Which samples enter an analysis: finite, and flagged good, not evaluated or suspect."""
        finite = np.isfinite(self.heights.to_numpy(dtype=np.float64))
        return np.asarray(finite & (self.flags.to_numpy() < FLAG_FAIL), dtype=np.bool_)

    @cached_property
    def times_h(self) -> NDArray[np.float64]:
        """Times of the usable samples, shape (n,). [UTC hours since 2000-01-01 00:00]"""
        index = self.heights.index[self.usable]
        return hours_from_datetime64(index.tz_localize(None).to_numpy())  # type: ignore[attr-defined]

    @cached_property
    def heights_m(self) -> NDArray[np.float64]:
        """Heights of the usable samples, shape (n,). [m]"""
        return self.heights.to_numpy(dtype=np.float64)[self.usable]

    @cached_property
    def step_h(self) -> float:
        """Sampling step: the commonest difference between times; NaN with fewer than two samples. [h]"""
        if len(self.times_h) < 2:
            return float("nan")
        steps, counts = np.unique(np.round(np.diff(self.times_h), 6), return_counts=True)
        return float(steps[np.argmax(counts)])
