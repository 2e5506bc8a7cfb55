"""Harmonic constants: a table of amplitudes and phase lags together with its conventions."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, fields
from typing import Literal

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from tidekit.constituents.catalogue import speeds_deg_per_h
from tidekit.errors import ConstituentError
from tidekit.frozen import freeze_arrays

NodalConvention = Literal["exact", "mid_year"]
"""How nodal modulation was applied: exactly in time, or held at its mid-year value."""


@dataclass(frozen=True, eq=False, kw_only=True)
class HarmonicConstants:
    """Amplitude and Greenwich phase lag of each constituent of one gauge; all arrays have shape (k,)."""

    names: tuple[str, ...]
    """Constituents, by the catalogue's names."""
    amplitude_m: NDArray[np.float64]
    """Amplitudes H. [m]"""
    phase_lag_deg: NDArray[np.float64]
    """Greenwich phase lags G for UTC, 0 to 360: height H f cos(V + u - G). [degrees]"""
    amplitude_sd_m: NDArray[np.float64]
    """Standard deviation of each amplitude; NaN where unknown. [m]"""
    phase_lag_sd_deg: NDArray[np.float64]
    """Standard deviation of each phase lag; NaN where unknown. [degrees]"""
    basis: tuple[str, ...]
    """`fitted`, `inferred` or `published` for each."""
    mean_level_m: float = 0.0
    """Mean water level above the vertical reference. [m]"""
    mean_level_sd_m: float = float("nan")
    """Its standard deviation. [m]"""
    nodal: NodalConvention = "exact"
    """Nodal convention the constants were made with."""
    vertical_reference: str | None = None
    """What the mean level is measured from."""

    def __post_init__(self) -> None:
        freeze_arrays(self)
        count = len(self.names)
        for field in fields(self):
            value = getattr(self, field.name)
            if isinstance(value, (np.ndarray, tuple)) and len(value) != count:
                message = f"{field.name} has {len(value)} entries for {count} constituents"
                raise ConstituentError(message)

    @property
    def phasors_m(self) -> NDArray[np.complex128]:
        """H exp(-i G) of each constituent, shape (k,): height is Re(f exp(i(V + u)) times it). [m]"""
        return np.asarray(self.amplitude_m * np.exp(-1j * np.deg2rad(self.phase_lag_deg)))

    def select(self, names: Sequence[str]) -> HarmonicConstants:
        """Give the constants of some constituents only, in the order asked.

        Parameters
        ----------
        names : sequence of str
            Constituents of this table.

        Returns
        -------
        HarmonicConstants
            The same conventions, fewer rows.

        Raises
        ------
        ConstituentError
            If one is not in the table.
        """
        absent = [name for name in names if name not in self.names]
        if absent:
            message = f"no constants of {', '.join(absent)}; there are {', '.join(self.names)}"
            raise ConstituentError(message)
        rows = [self.names.index(name) for name in names]
        return HarmonicConstants(
            names=tuple(names),
            amplitude_m=self.amplitude_m[rows],
            phase_lag_deg=self.phase_lag_deg[rows],
            amplitude_sd_m=self.amplitude_sd_m[rows],
            phase_lag_sd_deg=self.phase_lag_sd_deg[rows],
            basis=tuple(self.basis[row] for row in rows),
            mean_level_m=self.mean_level_m,
            mean_level_sd_m=self.mean_level_sd_m,
            nodal=self.nodal,
            vertical_reference=self.vertical_reference,
        )

    def to_frame(self) -> pd.DataFrame:
        """One row a constituent, with the columns of `constants.csv` after `gauge`."""
        return pd.DataFrame(
            {
                "constituent": list(self.names),
                "speed_deg_per_h": speeds_deg_per_h(self.names),
                "amplitude_m": self.amplitude_m,
                "amplitude_sd_m": self.amplitude_sd_m,
                "phase_lag_deg": self.phase_lag_deg,
                "phase_lag_sd_deg": self.phase_lag_sd_deg,
                "basis": list(self.basis),
            }
        )
