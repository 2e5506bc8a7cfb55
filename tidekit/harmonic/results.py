"""What a harmonic analysis gives: constants with their errors, the residual, and how the fit was made."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from itertools import pairwise

import numpy as np
import pandas as pd
from numpy.typing import ArrayLike, NDArray

from tidekit.astronomy.timescales import datetime64_from_hours
from tidekit.constituents.catalogue import speeds_deg_per_h
from tidekit.constituents.constants import HarmonicConstants
from tidekit.constituents.resolution import CALENDAR_YEAR_TOLERANCE
from tidekit.harmonic.basis import basis_for
from tidekit.harmonic.plan import Plan

Float = NDArray[np.float64]

_CORRELATED = 0.5
"""Correlation between estimates of two constituents from which they count as poorly separated."""


@dataclass(frozen=True)
class ClosePair:
    """Two fitted constituents that a record parts poorly."""

    first: str
    """The slower one."""
    second: str
    """The faster one."""
    cycles: float
    """Cycles of relative phase that the record has."""
    correlation: float
    """Greatest correlation between their estimates' parts."""

    def __str__(self) -> str:
        return (
            f"{self.first} and {self.second} are hard to part: {self.cycles:.2f} cycles of relative phase, "
            f"correlation {self.correlation:.2f}."
        )


def close_pairs(plan: Plan, inverse: Float, span_h: float) -> tuple[ClosePair, ...]:
    """Find fitted constituents that a record of this length, with its gaps, parts poorly.

    Parameters
    ----------
    plan : Plan
        What was fitted.
    inverse : ndarray, shape (p, p)
        Inverse of the normal matrix.
    span_h : float
        Length of the record. [hours]

    Returns
    -------
    tuple of ClosePair
        Neighbours in speed with less than one cycle of relative phase, and pairs with correlated estimates.
    """
    count = len(plan.fitted)
    part = inverse[plan.flat : plan.flat + 2 * count, plan.flat : plan.flat + 2 * count]
    scale = np.sqrt(np.diag(part))
    size = np.abs(part / np.outer(scale, scale)).reshape(2, count, 2, count).max(axis=(0, 2))
    order = np.argsort(plan.fitted_speeds_deg_per_h)
    apart = np.diff(plan.fitted_speeds_deg_per_h[order]) * span_h / 360.0
    near = {
        (int(a), int(b))
        for (a, b), cycles in zip(pairwise(order), apart, strict=True)
        if cycles < CALENDAR_YEAR_TOLERANCE
    }
    far = {
        (int(a), int(b))
        for a, b in np.argwhere(size > _CORRELATED)
        if plan.fitted_speeds_deg_per_h[a] < plan.fitted_speeds_deg_per_h[b]
    }
    return tuple(
        ClosePair(
            plan.fitted[a],
            plan.fitted[b],
            float((plan.fitted_speeds_deg_per_h[b] - plan.fitted_speeds_deg_per_h[a]) * span_h / 360.0),
            float(size[a, b]),
        )
        for a, b in sorted(near | far)
    )


@dataclass(frozen=True, eq=False, kw_only=True)
class HarmonicFit:
    """A least-squares harmonic analysis of one record of n samples."""

    plan: Plan
    """What was asked for."""
    constants: HarmonicConstants
    """Constants of the fitted and the inferred constituents."""
    white_amplitude_sd_m: Float
    """Amplitude errors had the noise been white, for comparison, shape (k,). [m]"""
    t_h: Float
    """Times of the samples, shape (n,). [UTC hours since 2000-01-01 00:00]"""
    residual_m: Float
    """Observed less fitted, shape (n,). [m]"""
    reference_h: float
    """Time at which the mean level holds where there is a trend. [UTC hours since 2000-01-01 00:00]"""
    parameter_names: tuple[str, ...]
    """Names of the p real parameters: ``mean``, ``trend``, ``M2 re`` ..., ``M2 im`` ..., regressors."""
    parameters: Float
    """Their values, shape (p,). [m; trend per year; regressors per their unit]"""
    covariance: Float
    """Covariance of the parameters with the residual's own colour, shape (p, p). [m^2; trend per year]"""
    design_correlation: Float
    """Correlations between the columns of the design, shape (p, p)."""
    close_pairs: tuple[ClosePair, ...]
    """Fitted constituents that the record parts poorly."""
    step_h: float
    """Commonest step between samples. [h]"""

    @cached_property
    def condition_number(self) -> float:
        """Condition number of the design with columns scaled to length one; near 1 is well separated."""
        lowest, highest = np.linalg.eigvalsh(self.design_correlation)[[0, -1]]
        return float(np.sqrt(highest / lowest))

    @property
    def trend_m_per_year(self) -> float:
        """Trend, 0 where none was asked for. [m per year]"""
        return float(self.parameters[1]) if self.plan.trend else 0.0

    @property
    def trend_sd_m_per_year(self) -> float:
        """Its standard deviation, NaN where none was asked for. [m per year]"""
        return float(np.sqrt(self.covariance[1, 1])) if self.plan.trend else float("nan")

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
        """Fitted tide, mean level and trend at sorted times; regressors are left out.

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
        own = self.plan.mixing.shape[1]
        basis = basis_for(self.plan.columns(self.reference_h), times)
        return basis.evaluate((self.plan.mixing @ self.parameters[:own]).view(np.complex128).conj())

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
        if self.plan.minor:
            lines.append(
                f"{len(self.plan.minor)} groups of minor lines follow fitted constituents by equilibrium ratios."
            )
        lines += [str(pair) for pair in self.close_pairs]
        return "\n".join(lines)
