"""From the covariance of real parameters to errors of amplitudes and phase lags."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import scipy.stats

from tidekit.constituents.catalogue import resolve
from tidekit.constituents.resolution import RELATION_SD
from tidekit.harmonic.columns import Complex, Float
from tidekit.harmonic.noise import ResidualSpectrum
from tidekit.harmonic.plan import Plan

LEVEL = 0.95
"""Level at which an amplitude counts as distinguishable from zero."""


MODULATION = {0: 0.0, 1: 0.005, 2: 0.01}
"""Relative standard deviation, of either part of a phasor, by which weather and seasons vary a constituent within
the year, by species (common practice, no source)."""
MODULATION_SHALLOW = 0.1
"""The same for higher species, which shallow water makes (common practice, no source)."""
_MODULATION_MEMORY_H = 48.0 * 24.0
"""Its correlation time: a cusp that halves within a cycle a year or two. [h]"""
_SEEN_AFTER_H = 2.0 * 8766.0
"""Length of a record in whose spectrum half the cusp shows beside the line. [h]"""


def parameter_noise(plan: Plan, spectrum: ResidualSpectrum, regressors: int) -> tuple[Float, Float]:
    """Noise under each parameter of a plan, as a variance, and the freedom of that under each fitted constituent.

    Regressors are taken to act at low frequency, like the mean level.
    """
    speeds = plan.fitted_speeds_deg_per_h
    lines = np.concatenate([[0.0], np.sort(speeds)])
    variance, freedom = spectrum.beside(speeds, lines)
    mean, trend = spectrum.red_end(lines)
    return np.concatenate([[mean, trend][: plan.flat], variance, variance, [mean] * regressors]), freedom


def add_modulation(plan: Plan, covariance: Float, parameters: Float, span_h: float) -> None:
    """Add to a covariance, in place, the changes of the tide itself that a record is too short to show as noise.

    Parameters
    ----------
    plan : Plan
        What was fitted.
    covariance : ndarray, shape (p, p)
        Covariance of the parameters. [m^2]
    parameters : ndarray, shape (p,)
        Their values. [m]
    span_h : float
        Length of the record. [h]
    """
    memory = _MODULATION_MEMORY_H / span_h
    mean_keeps = 2.0 * memory * (1.0 - memory * (1.0 - np.exp(-1.0 / memory)))
    unseen = 1.0 / (1.0 + (span_h / _SEEN_AFTER_H) ** 2)
    relative = np.array([MODULATION.get(resolve(name).species, MODULATION_SHALLOW) for name in plan.fitted])
    real = plan.flat + np.arange(len(plan.fitted))
    imaginary = real + len(plan.fitted)
    noise = covariance[real, real] + covariance[imaginary, imaginary]
    power = np.maximum(parameters[real] ** 2 + parameters[imaginary] ** 2 - noise, 0.0)
    for part in (real, imaginary):
        covariance[part, part] += relative**2 * power * mean_keeps * unseen


@dataclass(frozen=True, eq=False, kw_only=True)
class PhasorErrors:
    """Errors of constituents' phasors, arrays of shape (k,) in the plan's order of names."""

    phasors_m: Complex
    """Phasors H exp(-iG). [m]"""
    radial_sd_m: Float
    """Standard deviation along the phasor: of the amplitude. [m]"""
    across_sd_m: Float
    """Standard deviation across it: of the phase lag times the amplitude. [m]"""
    freedom: Float
    """Degrees of freedom to which they are known."""

    @property
    def phase_known(self) -> np.ndarray[tuple[int], np.dtype[np.bool_]]:
        """Whether the amplitude stands out from zero: outside its own error ellipse."""
        bound = scipy.stats.f.ppf(LEVEL, 2, self.freedom) * (self.radial_sd_m**2 + self.across_sd_m**2)
        return np.asarray(np.abs(self.phasors_m) ** 2 > bound, dtype=np.bool_)

    @property
    def phase_sd_deg(self) -> Float:
        """Standard deviation of the phase lag, NaN where the amplitude does not stand out from zero. [degrees]"""
        with np.errstate(divide="ignore", invalid="ignore"):
            spread = np.rad2deg(self.across_sd_m / np.abs(self.phasors_m))
        return np.where(self.phase_known, spread, np.nan)


def phasor_errors(plan: Plan, parameters: Float, covariance: Float, freedom: Float) -> PhasorErrors:
    """Errors of all constituents of a plan, the inferred ones with that of their relation.

    Parameters
    ----------
    plan : Plan
        What was fitted, k constituents in all.
    parameters : ndarray, shape (p,)
        Fitted parameters. [m]
    covariance : ndarray, shape (p, p)
        Their covariance. [m^2]
    freedom : ndarray, shape (fitted,)
        Degrees of freedom of the noise at each fitted constituent.

    Returns
    -------
    PhasorErrors
    """
    count = len(plan.fitted)
    real = slice(plan.flat, plan.flat + count)
    imaginary = slice(real.stop, real.stop + count)
    main = (parameters[real] + 1j * parameters[imaginary])[plan.source]
    rr = np.diag(covariance[real, real])[plan.source]
    ii = np.diag(covariance[imaginary, imaginary])[plan.source]
    ri = np.diag(covariance[real, imaginary])[plan.source]
    # A companion's ellipse is its main's, turned and scaled with it, so both are seen along the main's phasor.
    direction = np.angle(main)
    c, s = np.cos(direction), np.sin(direction)
    gain = np.abs(plan.ratio) ** 2
    relation = np.where(plan.inferred, (RELATION_SD * np.abs(plan.ratio * main)) ** 2, 0.0)
    radial = gain * (c * c * rr + 2 * c * s * ri + s * s * ii) + relation
    across = gain * (s * s * rr - 2 * c * s * ri + c * c * ii) + relation
    return PhasorErrors(
        phasors_m=plan.ratio * main,
        radial_sd_m=np.sqrt(radial),
        across_sd_m=np.sqrt(across),
        freedom=freedom[plan.source],
    )
