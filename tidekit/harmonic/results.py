"""What a harmonic analysis gives: constants with their errors, the residual, and how the fit was made."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pandas as pd
from numpy.typing import ArrayLike, NDArray

from tidekit.astronomy.timescales import datetime64_from_hours
from tidekit.constituents.catalogue import speeds_deg_per_h
from tidekit.constituents.constants import HarmonicConstants
from tidekit.harmonic.basis import basis_for

Float = NDArray[np.float64]
HOURS_PER_YEAR = 8765.82
"""A tropical year. [hours]"""


@dataclass(frozen=True, eq=False, kw_only=True)
class HarmonicFit:
    """A least-squares harmonic analysis of one record of n samples."""

    constants: HarmonicConstants
    """Constants of the fitted and the inferred constituents."""
    white_amplitude_sd_m: Float
    """Amplitude errors had the noise been white, for comparison, shape (k,). [m]"""
    t_h: Float
    """Times of the samples, shape (n,). [UTC hours since 2000-01-01 00:00]"""
    residual_m: Float
    """Observed less fitted, shape (n,). [m]"""
    trend_m_per_year: float
    """Trend, 0 where none was asked for. [m per year]"""
    trend_sd_m_per_year: float
    """Its standard deviation, NaN where none was asked for. [m per year]"""
    reference_h: float
    """Time at which the mean level holds, when there is a trend. [UTC hours since 2000-01-01 00:00]"""
    parameter_names: tuple[str, ...]
    """Names of the p real parameters: ``mean``, ``trend``, then ``M2 re`` ... and ``M2 im`` ..."""
    covariance: Float
    """Covariance of the parameters with the residual's own colour, shape (p, p). [m^2; trend per year]"""
    condition_number: float
    """Condition number of the design matrix with scaled columns; near 1 is well separated."""
    close_pairs: tuple[tuple[str, str, float], ...]
    """Pairs of fitted constituents closer than the record can part, with the cycles of relative phase it has."""
    step_h: float
    """Commonest step between samples. [h]"""

    @property
    def span_days(self) -> float:
        """Length of the record, a step after its last sample. [days]"""
        return float(self.t_h[-1] - self.t_h[0] + self.step_h) / 24.0

    @property
    def residual_sd_m(self) -> float:
        """Root mean square of the residual, with the parameters' degrees of freedom taken off. [m]"""
        free = max(len(self.t_h) - len(self.parameter_names), 1)
        return float(np.sqrt(np.sum(self.residual_m**2) / free))

    @property
    def effective_samples(self) -> float:
        """Independent samples that would give the mean level its error."""
        return float((self.residual_sd_m / self.constants.mean_level_sd_m) ** 2)

    def predict(self, t_h: ArrayLike) -> Float:
        """Fitted model at sorted times, trend included.

        Parameters
        ----------
        t_h : array-like, shape (n,)
            Sorted times. [UTC hours since 2000-01-01 00:00]

        Returns
        -------
        ndarray, shape (n,)
            Heights above the record's vertical reference. [m]
        """
        times = np.asarray(t_h, dtype=np.float64)
        basis = basis_for(self.constants.names, times, nodal=self.constants.nodal)
        trend = self.trend_m_per_year * (times - self.reference_h) / HOURS_PER_YEAR
        return self.constants.mean_level_m + trend + basis.evaluate(self.constants.phasors_m)

    def to_frame(self) -> pd.DataFrame:
        """One row a constituent: the constants' columns, then the white-noise amplitude error."""
        return self.constants.to_frame().assign(white_amplitude_sd_m=self.white_amplitude_sd_m)

    def summary(self) -> str:
        """Text of the whole result, for people."""
        constants = self.constants
        start, end = (str(t)[:16].replace("T", " ") for t in datetime64_from_hours(self.t_h[[0, -1]]))
        width = 78
        head = [
            ("Samples", f"{len(self.t_h)}", "Span", f"{self.span_days:.1f} days"),
            ("From (UTC)", start, "To (UTC)", end),
            ("Constituents", f"{len(constants.names)}", "Inferred", f"{constants.basis.count('inferred')}"),
            ("Nodal modulation", constants.nodal, "Condition number", f"{self.condition_number:.2f}"),
            ("Residual sd", f"{self.residual_sd_m:.4f} m", "Effective samples", f"{self.effective_samples:.0f}"),
            (
                "Mean level",
                f"{constants.mean_level_m:.4f} m",
                "Mean level sd",
                f"{constants.mean_level_sd_m:.4f} m",
            ),
        ]
        if np.isfinite(self.trend_sd_m_per_year):
            trend, spread = 1e3 * self.trend_m_per_year, 1e3 * self.trend_sd_m_per_year
            head.append(("Trend", f"{trend:.2f} mm/year", "Trend sd", f"{spread:.2f} mm/year"))
        lines = ["Harmonic analysis by least squares".center(width), "=" * width]
        lines += [f"{a + ':':<19}{b:>18}    {c + ':':<19}{d:>18}" for a, b, c, d in head]
        lines += ["=" * width]
        lines += [
            f"{'':<9}{'speed':>13}{'amplitude':>12}{'sd':>9}{'phase lag':>12}{'sd':>9}  {'basis':<9}",
            f"{'':<9}{'deg/h':>13}{'m':>12}{'m':>9}{'deg UTC':>12}{'deg':>9}",
            "-" * width,
        ]
        speeds = speeds_deg_per_h(constants.names)
        for k, name in enumerate(constants.names):
            lag_sd = constants.phase_lag_sd_deg[k]
            lines.append(
                f"{name:<9}{speeds[k]:>13.7f}{constants.amplitude_m[k]:>12.4f}{constants.amplitude_sd_m[k]:>9.4f}"
                f"{constants.phase_lag_deg[k]:>12.2f}{f'{lag_sd:.2f}' if np.isfinite(lag_sd) else '-':>9}"
                f"  {constants.basis[k]:<9}"
            )
        lines += ["=" * width, "Standard deviations follow the residual's spectrum beside each constituent."]
        if any(not np.isfinite(s) for s in constants.phase_lag_sd_deg):
            lines.append("A phase lag without sd belongs to an amplitude that cannot be told from zero.")
        for first, second, cycles in self.close_pairs:
            lines.append(f"{first} and {second} are hard to part: {cycles:.2f} cycles of relative phase.")
        return "\n".join(lines)
