"""A table of datums: levels, their errors, how each was found."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from tidekit.errors import AnalysisError
from tidekit.frozen import freeze_arrays

RANGES = ("GT", "MN", "DHQ", "DLQ")
"""Rows of a table that are differences between levels, not levels: great diurnal range, mean range, and the
diurnal inequalities of high and of low water."""

COLUMNS = ("gauge", "datum", "height_m", "height_sd_m", "method")


@dataclass(frozen=True, eq=False, kw_only=True)
class DatumTable:
    """Datums of one gauge; all sequences have length n."""

    gauge: str
    """Id of the gauge."""
    names: tuple[str, ...]
    """Datums, by the abbreviations of the IHO and of NOS."""
    height_m: NDArray[np.float64]
    """Heights above the vertical reference (the `RANGES` are differences). [m]"""
    height_sd_m: NDArray[np.float64]
    """Standard deviation of each; NaN where unknown. [m]"""
    methods: tuple[str, ...]
    """How each was found, in a few words."""
    vertical_reference: str | None = None
    """What the heights are measured from."""
    first_time: pd.Timestamp | None = None
    """Start of the period the datums hold for. [UTC]"""
    last_time: pd.Timestamp | None = None
    """Its end. [UTC]"""
    details: Mapping[str, float | str] = field(default_factory=dict)
    """Figures beside the datums, such as the form number and the times of HAT and LAT."""
    notes: tuple[str, ...] = ()
    """What the user should know before relying on them."""

    def __post_init__(self) -> None:
        freeze_arrays(self)
        for name in ("height_m", "height_sd_m", "methods"):
            count = len(getattr(self, name))
            if count != len(self.names):
                message = f"{name} has {count} entries for {len(self.names)} datums"
                raise AnalysisError(message)

    def height(self, name: str) -> float:
        """Height of one datum. [m]

        Raises
        ------
        AnalysisError
            If it is not in the table.
        """
        return float(self.height_m[self._row(name)])

    def height_sd(self, name: str) -> float:
        """Standard deviation of the height of one datum. [m]

        Raises
        ------
        AnalysisError
            If it is not in the table.
        """
        return float(self.height_sd_m[self._row(name)])

    def _row(self, name: str) -> int:
        if name not in self.names:
            message = f"no datum {name}; there are {', '.join(self.names)}"
            raise AnalysisError(message)
        return self.names.index(name)

    def to_frame(self) -> pd.DataFrame:
        """One row a datum, with the columns of `datums.csv`."""
        return pd.DataFrame(
            {
                "gauge": self.gauge,
                "datum": list(self.names),
                "height_m": self.height_m,
                "height_sd_m": self.height_sd_m,
                "method": list(self.methods),
            },
            columns=list(COLUMNS),
        )
