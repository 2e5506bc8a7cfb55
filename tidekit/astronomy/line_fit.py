"""Fit lines at known arguments to a slow function of time: windowed least squares in bounded memory."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from tidekit.astronomy.arguments import Doodson, slow_number
from tidekit.astronomy.longitudes import slow_longitudes_rad

STEP_DAYS = 1.5
CHUNK = 8192


@dataclass(frozen=True, eq=False)
class Samples:
    """Times of the fit, symmetric about J2000."""

    centuries: NDArray[np.float64]
    """Julian centuries TT since J2000.0, shape (n,)."""
    longitudes: NDArray[np.float64]
    """s, h, p, N' and p_s, shape (n, 5). [radians]"""
    window: NDArray[np.float64]
    """Hann window, of sum one."""

    def waves(self, lines: dict[Doodson, float], rows: slice) -> NDArray[np.complex128]:
        """Sum of ratio times ``exp(i slow argument)`` over lines that move as one."""
        total = np.zeros(len(self.centuries[rows]), dtype=np.complex128)
        for number, ratio in lines.items():
            total += ratio * np.exp(1j * (self.longitudes[rows] @ slow_number(number)))
        return total


def sample_times(half_span_days: float) -> Samples:
    """Give the times, longitudes and window of a fit over twice `half_span_days`."""
    count = int(half_span_days / STEP_DAYS)
    centuries = np.arange(-count, count + 1, dtype=np.float64) * (STEP_DAYS / 36525.0)
    hann = np.hanning(2 * count + 3)[1:-1]
    window: NDArray[np.float64] = np.asarray(hann / hann.sum(), dtype=np.float64)
    return Samples(centuries, slow_longitudes_rad(centuries), window)


def strengths_at(residual: NDArray[np.complex128], samples: Samples, rates: NDArray[np.float64]) -> NDArray[np.float64]:
    """Amplitude of a windowed residual near each rate, from a transform padded four times. [m]"""
    size = 4 * 2 ** math.ceil(math.log2(len(residual)))
    spectrum = np.abs(np.fft.fft(residual * samples.window, size))
    bins = np.rint(rates * STEP_DAYS / (2 * np.pi) * size).astype(np.int64) % size
    return np.asarray(spectrum[bins])


def fit(
    values: NDArray[np.complex128], samples: Samples, groups: list[dict[Doodson, float]], drifting: list[bool]
) -> tuple[NDArray[np.complex128], NDArray[np.complex128], NDArray[np.complex128]]:
    """Windowed least squares of line groups: coefficients, their rates a century, and what remains."""
    real = not groups or next(iter(groups[0]))[0] == 0
    drift_of = np.flatnonzero(drifting)
    width = (len(groups) + len(drift_of)) * (2 if real else 1)
    normal, right = np.zeros((width, width), dtype=np.complex128), np.zeros(width, dtype=np.complex128)

    def design(rows: slice) -> NDArray[np.complex128]:
        columns = np.stack([samples.waves(group, rows) for group in groups], axis=1)
        columns = np.hstack([columns, columns[:, drift_of] * samples.centuries[rows, None]])
        return np.hstack([columns, columns.conj()]) if real else columns

    chunks = [slice(start, start + CHUNK) for start in range(0, len(values), CHUNK)]
    for rows in chunks:
        matrix = design(rows)
        weighted = matrix.conj().T * samples.window[rows]
        normal += weighted @ matrix
        right += weighted @ values[rows]
    # A constant is its own conjugate: the smallest-norm solution shares it between the two columns.
    solution = np.linalg.lstsq(normal, right, rcond=1e-12)[0]
    residual = np.concatenate([values[rows] - design(rows) @ solution for rows in chunks])
    rates = np.zeros(len(groups), dtype=np.complex128)
    rates[drift_of] = solution[len(groups) : len(groups) + len(drift_of)]
    scale = 2.0 if real else 1.0
    return np.asarray(scale * solution[: len(groups)]), np.asarray(scale * rates), residual
