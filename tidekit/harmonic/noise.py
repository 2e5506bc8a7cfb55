"""Noise under each parameter, from the spectrum of the residual.

The residual of a tide gauge is red, with cusps round the tidal bands, so one variance for all frequencies gives
error bars that are too small where tides are and too large elsewhere. A least-squares coefficient errs by the
noise's own Fourier coefficient at its frequency, so the residual's periodogram beside that frequency, not tapered,
tells its variance: it leaks and sees the gaps as the coefficient does. At the frequency itself the fit has taken
the noise out along with the tide; what it has taken is known, and made good.

References
----------
.. [1] Munk, W. H. and Cartwright, D. E., "Tidal spectroscopy and prediction", Phil. Trans. R. Soc. A 259 (1966)
   533-581: cusps of the noise at tidal lines.
.. [2] Percival, D. B. and Walden, A. T., "Spectral Analysis for Physical Applications", Cambridge University Press
   (1993), chapter 6: the periodogram and its leakage.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from tidekit.harmonic.columns import HOURS_PER_YEAR, Float

NEAR_BINS = 12
"""Independent ordinates looked at on either side of a speed; the nearest weigh most, to follow the cusps."""
LOW_BINS = 24
"""Ordinates above zero from which the slope of the red end is found."""
_LOWEST_PER_YEAR = 1.0
"""The red end is taken to level off below a cycle a year: the seasons are fitted or are the record's own. [1/year]"""
_STEEPEST = 2.0
"""Slope of the red end beyond which it is not believed: that of a random walk."""
_COARSEST_H = 0.5
"""Samples are gathered to no longer than this before the transform: M10 then has 5 of them to a cycle. [h]"""
_EULER = 0.5772156649
"""Mean of the logarithm of an ordinate is the logarithm of its mean less this."""
_CHUNK = 1 << 17


@dataclass(frozen=True, eq=False, kw_only=True)
class ResidualSpectrum:
    """Periodogram of a residual, as the variance that white noise of that density has."""

    density: Float
    """Ordinates from zero frequency on. [m^2]"""
    bin_deg_per_h: float
    """From one ordinate to the next. [degrees per hour]"""
    width: float
    """Ordinates from one independent one to the next: above 1 where zeros were appended."""
    gather_h: float
    """Length of the cells over which samples were added up. [h]"""
    span_h: float
    """Length of the record. [h]"""

    @classmethod
    def of(cls, residual: Float, t_h: Float, step_h: float) -> ResidualSpectrum:
        """Transform what a fit leaves at sorted times."""
        gather = max(int(_COARSEST_H / step_h + 1e-6), 1)
        grid = _gathered(residual, t_h, gather * step_h)
        # A length without large prime factors; the zeros only refine the ordinates.
        length = _fast_length(len(grid))
        wave = np.fft.rfft(grid, length)
        return cls(
            density=(wave.real**2 + wave.imag**2) / len(residual),
            bin_deg_per_h=360.0 / (length * gather * step_h),
            width=length / len(grid),
            gather_h=gather * step_h,
            span_h=len(grid) * gather * step_h,
        )

    def beside(self, speeds_deg_per_h: Float, lines_deg_per_h: Float) -> tuple[Float, Float]:
        """Density of the noise at speeds.

        Parameters
        ----------
        speeds_deg_per_h : ndarray, shape (k,)
            Where. [degrees per hour]
        lines_deg_per_h : ndarray, shape (l,)
            Sorted speeds of all that was fitted, 0 for the mean level. [degrees per hour]

        Returns
        -------
        variance : ndarray, shape (k,)
            [m^2]
        freedom : ndarray, shape (k,)
            Degrees of freedom that it is known to.
        """
        reach = np.arange(-NEAR_BINS, NEAR_BINS + 1) * self.width
        places = (speeds_deg_per_h / self.bin_deg_per_h)[:, None] + reach
        inside = (places > 0.5 * self.width) & (places < len(self.density) - 1)
        bins = np.clip(np.rint(places), 0, len(self.density) - 1).astype(np.int64)
        left = self._left(bins, lines_deg_per_h) * inside
        weight = inside / (1.0 + np.abs(reach / self.width))
        total = np.sum(weight * left, axis=1)
        mean = np.sum(weight * self.density[bins], axis=1) / np.maximum(total, 1e-300)
        freedom = 2.0 * total**2 / np.maximum(np.sum(weight**2 * left, axis=1), 1e-300)
        # A sum over a cell answers a wave of this speed by its sinc.
        return mean / np.sinc(speeds_deg_per_h * self.gather_h / 360.0) ** 2, np.maximum(freedom, 1.0)

    def red_end(self, lines_deg_per_h: Float) -> tuple[float, float]:
        """Density of the noise under the mean level and under a trend, from the slope of the red end.

        Parameters
        ----------
        lines_deg_per_h : ndarray, shape (l,)
            Sorted speeds of all that was fitted. [degrees per hour]

        Returns
        -------
        mean, trend : float
            [m^2]
        """
        level, slope = self._slope(lines_deg_per_h)
        cycles = np.geomspace(1e-3, 1e3, 1201)
        floor = min(self.span_h / HOURS_PER_YEAR * _LOWEST_PER_YEAR, 0.5)
        density = level * np.maximum(cycles, floor) ** -slope
        # Squared transforms of a constant and of a ramp over one record, each of unit area over all cycles.
        box = np.sinc(cycles)
        ramp = np.sqrt(12.0) * (np.cos(np.pi * cycles) - box) / (2.0 * np.pi * cycles)
        return tuple(2.0 * float(np.trapezoid(kernel**2 * density, cycles)) for kernel in (box, ramp))  # type: ignore[return-value]

    def _slope(self, lines_deg_per_h: Float) -> tuple[float, float]:
        """Density at one cycle a record and the power of frequency by which it falls, by logarithms."""
        cycles = np.arange(1, LOW_BINS + 1, dtype=np.float64)
        bins = np.rint(cycles * self.width).astype(np.int64)
        left = self._left(bins, lines_deg_per_h)
        used = (left > 0.2) & (bins < len(self.density) - 1)
        if np.count_nonzero(used) < 4:
            return float(self.density[1:].mean()), 0.0
        x, y = np.log(cycles[used]), np.log(self.density[bins[used]] / left[used] + 1e-300) + _EULER
        slope = float(np.clip(-np.polyfit(x, y, 1)[0], 0.0, _STEEPEST))
        return float(np.exp(np.mean(y + slope * x))), slope

    def _left(self, bins: NDArray[np.int64], lines_deg_per_h: Float) -> Float:
        """Part of the noise's power that a fit of lines leaves at ordinates."""
        lines = lines_deg_per_h / self.bin_deg_per_h
        near = 40.0 * self.width
        first = np.searchsorted(lines, bins - near)
        count = np.searchsorted(lines, bins + near) - first
        left = np.ones(bins.shape)
        for step in range(int(count.max(initial=0))):
            line = lines[np.minimum(first + step, len(lines) - 1)]
            left -= (step < count) * np.sinc((bins - line) / self.width) ** 2
        return np.maximum(left, 0.0)


def _gathered(residual: Float, t_h: Float, step_h: float) -> Float:
    """Sums of the residual over the cells of a grid."""
    cells = int((t_h[-1] - t_h[0]) / step_h + 0.5) + 1
    grid = np.zeros(cells)
    for begin in range(0, len(t_h), _CHUNK):
        place = ((t_h[begin : begin + _CHUNK] - t_h[0]) / step_h + 0.25).astype(np.int64)
        sums = np.bincount(place - place[0], weights=residual[begin : begin + _CHUNK])
        grid[place[0] : place[0] + len(sums)] += sums
    return grid


def _fast_length(count: int) -> int:
    """Smallest length of at least `count` that is a power of two times 1, 3, 5, 9 or 15."""
    return min(m << max(int(np.ceil(np.log2(count / m))), 0) for m in (1, 3, 5, 9, 15))
