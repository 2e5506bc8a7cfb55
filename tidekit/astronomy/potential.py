"""The tide-generating potential as a table of lines.

The table is derived by `tidekit.astronomy.derive`, not typed; see its header for the conventions.
"""

from __future__ import annotations

import csv
from dataclasses import dataclass
from functools import cache
from importlib.resources import files

import numpy as np
from numpy.typing import NDArray

from tidekit.errors import TidekitError
from tidekit.frozen import freeze_arrays

COLUMNS = ("degree", "tau", "s", "h", "p", "n_prime", "p_s", "amplitude_m", "drift_m_per_century")


@dataclass(frozen=True, eq=False, kw_only=True)
class PotentialLines:
    """Lines of the potential, arrays of length n in the order of the table.

    A line is amplitude times the cosine of its argument where degree plus species is even, the sine where it is
    odd; the factor (-1)^species of the spherical harmonics stays in the amplitude and in the latitude function.
    """

    degree: NDArray[np.int64]
    """Degree of the spherical harmonic."""
    doodson: NDArray[np.int64]
    """Multiples of tau, s, h, p, N' and p_s, shape (n, 6)."""
    amplitude_m: NDArray[np.float64]
    """Amplitude at the epoch, Cartwright and Tayler's normalisation. [m]"""
    drift_m_per_century: NDArray[np.float64]
    """Its rate. [m per Julian century]"""
    epoch_centuries: float
    """Epoch of the amplitudes. [Julian centuries since J2000.0]"""

    def __post_init__(self) -> None:
        freeze_arrays(self)


def amplitude_m(lines: PotentialLines, centuries: float) -> NDArray[np.float64]:
    """Amplitudes at a time, shape (n,). [m; the time in Julian centuries TT since J2000.0]"""
    return lines.amplitude_m + (centuries - lines.epoch_centuries) * lines.drift_m_per_century


@cache
def potential_lines() -> PotentialLines:
    """Read the committed table.

    Returns
    -------
    PotentialLines
        Read-only arrays.

    Raises
    ------
    TidekitError
        If the table has other columns than `COLUMNS`.
    """
    text = files("tidekit.astronomy").joinpath("tables/potential_lines.csv").read_text(encoding="utf-8")
    lines = text.splitlines()
    comments = [line for line in lines if line.startswith("#")]
    rows = list(csv.DictReader(line for line in lines if not line.startswith("#")))
    if tuple(rows[0]) != COLUMNS:
        message = f"potential_lines.csv has columns {', '.join(rows[0])}; wanted {', '.join(COLUMNS)}"
        raise TidekitError(message)
    epoch = next(line for line in comments if line.startswith("# epoch_centuries:"))
    numbers = np.array([[int(row[column]) for column in COLUMNS[:7]] for row in rows])
    heights = np.array([[float(row[column]) for column in COLUMNS[7:]] for row in rows])
    return PotentialLines(
        degree=numbers[:, 0],
        doodson=numbers[:, 1:],
        amplitude_m=heights[:, 0],
        drift_m_per_century=heights[:, 1],
        epoch_centuries=float(epoch.split(":")[1]),
    )
