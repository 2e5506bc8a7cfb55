"""Harmonic analysis by least squares: from times and heights to constants with honest errors."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise

import numpy as np
import scipy.stats
from numpy.typing import ArrayLike, NDArray

from tidekit.constituents.catalogue import resolve, resolve_names, speeds_deg_per_h
from tidekit.constituents.constants import HarmonicConstants, NodalConvention
from tidekit.constituents.resolution import (
    CALENDAR_YEAR_TOLERANCE,
    RELATION_SD,
    Companion,
    equilibrium_companions,
    resolvable,
    synodic_period_h,
)
from tidekit.errors import AnalysisError, RecordError
from tidekit.harmonic.basis import Complex, basis_for
from tidekit.harmonic.noise import NOISE_FREEDOM, noise_variance
from tidekit.harmonic.normal import Factor, Model
from tidekit.harmonic.results import HOURS_PER_YEAR, HarmonicFit
from tidekit.records.record import GaugeRecord

Float = NDArray[np.float64]


def analyse(
    t_h: ArrayLike,
    height_m: ArrayLike,
    *,
    constituents: Sequence[str] | None = None,
    infer: Sequence[Companion] | None = None,
    trend: bool = False,
    nodal: NodalConvention = "exact",
    vertical_reference: str | None = None,
) -> HarmonicFit:
    """Fit mean level, optional trend and constituents to a record.

    Parameters
    ----------
    t_h : array-like, shape (n,)
        Sorted times, gaps as they come. [UTC hours since 2000-01-01 00:00]
    height_m : array-like, shape (n,)
        Heights. [m]
    constituents : sequence of str, optional
        What to fit; by default all that a record of this length can tell apart.
    infer : sequence of Companion, optional
        Constituents tied to fitted ones inside the fit. By default, when `constituents` is not given either, the
        close companions that the record cannot part, by the ratios of the equilibrium tide.
    trend : bool
        Fit a linear trend.
    nodal : {"exact", "mid_year"}
        Nodal convention.
    vertical_reference : str, optional
        What the heights are above, for the constants.

    Returns
    -------
    HarmonicFit
        Constants, errors, residual.

    Raises
    ------
    AnalysisError
        If the times or heights cannot be analysed, the record is too short, or constituents asked for cannot be
        told apart.
    ConstituentError
        If a name is unknown.

    References
    ----------
    .. [1] Foreman, M. G. G. and Henry, R. F., "The harmonic analysis of tidal model time series", Adv. Water
       Resources 12 (1989) 109-120: least squares with modulation in the basis.
    """
    times, heights = _checked(t_h, height_m)
    step_h = float(np.median(np.diff(times)))
    span_h = float(times[-1] - times[0]) + step_h
    if constituents is None:
        fitted = resolvable(span_h, step_h=step_h)
        companions = tuple(equilibrium_companions(fitted, span_h) if infer is None else infer)
    else:
        fitted, companions = resolve_names(constituents), tuple(infer or ())
    names, tie = _tie(fitted, companions)
    _check_count(len(times), 1 + trend + 2 * len(fitted))
    years = (times - times.mean()) / HOURS_PER_YEAR
    regressors = np.stack([np.ones_like(times), years][: 1 + trend], axis=1)
    model = Model(basis_for(names, times, nodal=nodal), tie, regressors)
    close = _close_pairs(fitted, span_h)
    factor = Factor.of(model.normal_matrix(), close)
    parameters = factor.solve(model.project(heights))
    residual = heights - model.evaluate(parameters)
    speeds = np.concatenate([np.zeros(1 + trend), np.tile(speeds_deg_per_h(fitted), 2)])
    variance = noise_variance(residual, times, speeds)
    white = factor.inverse()
    free = len(times) - len(parameters)
    covariance = white * np.sqrt(np.outer(variance, variance))
    fitted_white = white * float(np.sum(residual**2)) / free
    return HarmonicFit(
        constants=_constants(
            names, tie, parameters, covariance, len(fitted), companions, nodal=nodal, reference=vertical_reference
        ),
        white_amplitude_sd_m=_errors(tie, parameters, fitted_white, len(fitted), companions)[1],
        t_h=times,
        residual_m=residual,
        trend_m_per_year=float(parameters[1]) if trend else 0.0,
        trend_sd_m_per_year=float(np.sqrt(covariance[1, 1])) if trend else float("nan"),
        reference_h=float(times.mean()),
        parameter_names=(
            *("mean", "trend")[: 1 + trend],
            *(f"{name} re" for name in fitted),
            *(f"{name} im" for name in fitted),
        ),
        covariance=covariance,
        condition_number=factor.condition_number,
        close_pairs=close,
        step_h=step_h,
    )


def analyse_record(
    record: GaugeRecord,
    *,
    constituents: Sequence[str] | None = None,
    infer: Sequence[Companion] | None = None,
    trend: bool = False,
    nodal: NodalConvention = "exact",
) -> HarmonicFit:
    """Analyse the usable samples of a gauge record; see `analyse`.

    Raises
    ------
    RecordError
        If the record cannot be analysed; names its first file.
    """
    try:
        return analyse(
            record.times_h,
            record.heights_m,
            constituents=constituents,
            infer=infer,
            trend=trend,
            nodal=nodal,
            vertical_reference=record.station.vertical_reference,
        )
    except AnalysisError as error:
        path = record.sources[0].path if record.sources else None
        raise RecordError(str(error), path=path) from error


def _checked(t_h: ArrayLike, height_m: ArrayLike) -> tuple[Float, Float]:
    times, heights = np.asarray(t_h, dtype=np.float64), np.asarray(height_m, dtype=np.float64)
    problem = None
    if times.ndim != 1 or times.shape != heights.shape:
        problem = f"times of shape {times.shape} and heights of shape {heights.shape}; wanted two equal rows"
    elif len(times) < 3:
        problem = f"{len(times)} samples, too short for any constituent; a day of hourly heights is the least"
    elif not (np.isfinite(times).all() and np.isfinite(heights).all()):
        problem = "times or heights are not finite; leave missing samples out"
    elif np.any(np.diff(times) <= 0):
        problem = "times are not in order or stand twice; sort them and keep one height each"
    elif np.ptp(heights) == 0.0:
        problem = f"the height is {heights[0]:g} m throughout; a constant record has no tide to fit"
    if problem:
        raise AnalysisError(problem)
    return times, heights


def _check_count(samples: int, parameters: int) -> None:
    if samples <= parameters:
        message = f"{samples} samples for {parameters} parameters; ask for fewer constituents or a longer record"
        raise AnalysisError(message)


def _tie(fitted: Sequence[str], companions: Sequence[Companion]) -> tuple[tuple[str, ...], Complex]:
    """All constituents, and the matrix from the fitted phasors to all of them."""
    inferred = resolve_names(companion.name for companion in companions)
    clash = sorted(set(inferred) & set(fitted))
    orphans = [companion.name for companion in companions if companion.from_name not in fitted]
    if clash or orphans:
        message = (
            f"{', '.join(clash)} both fitted and inferred; choose one"
            if clash
            else f"{', '.join(orphans)} inferred from constituents that are not fitted; fit those too"
        )
        raise AnalysisError(message)
    tie = np.zeros((len(fitted) + len(companions), len(fitted)), dtype=np.complex128)
    tie[: len(fitted)] = np.eye(len(fitted))
    for row, companion in enumerate(companions, len(fitted)):
        tie[row, list(fitted).index(companion.from_name)] = companion.ratio_to_main
    return (*fitted, *inferred), tie


def _close_pairs(fitted: Sequence[str], span_h: float) -> tuple[tuple[str, str, float], ...]:
    """Neighbours in speed with less than one cycle of relative phase in the record."""
    ordered = sorted(fitted, key=lambda name: resolve(name).speed_deg_per_h)
    pairs = [(a, b, span_h / synodic_period_h(a, b)) for a, b in pairwise(ordered)]
    return tuple(pair for pair in pairs if pair[2] < CALENDAR_YEAR_TOLERANCE)


def _errors(
    tie: Complex, parameters: Float, covariance: Float, fitted: int, companions: Sequence[Companion]
) -> tuple[Complex, Float, Float]:
    """Phasors of all constituents, and the standard deviations of amplitude [m] and phase lag [degrees]."""
    first = len(parameters) - 2 * fitted
    real, imaginary = slice(first, first + fitted), slice(first + fitted, None)
    phasors = tie @ (parameters[real] + 1j * parameters[imaginary])
    amplitude = np.abs(phasors)
    # Turn each constituent's error ellipse to point along its phasor: radial is amplitude, across is phase.
    source = np.argmax(np.abs(tie), axis=1)
    gain = np.abs(tie[np.arange(len(tie)), source])
    direction = np.angle(phasors / tie[np.arange(len(tie)), source])
    c, s = np.cos(direction), np.sin(direction)
    rr = np.diag(covariance[real, real])[source]
    ii = np.diag(covariance[imaginary, imaginary])[source]
    ri = np.diag(covariance[real, imaginary])[source]
    radial = gain**2 * (c * c * rr + 2 * c * s * ri + s * s * ii)
    across = gain**2 * (s * s * rr - 2 * c * s * ri + c * c * ii)
    inferred = np.arange(len(tie)) >= fitted
    relation = np.where(inferred, (RELATION_SD * amplitude) ** 2, 0.0)
    radial, across = radial + relation, across + relation
    # An amplitude inside its own 95 % error ellipse has no phase to speak of.
    bound = scipy.stats.f.ppf(0.95, 2, NOISE_FREEDOM) * (radial + across)
    with np.errstate(divide="ignore", invalid="ignore"):
        phase_sd = np.where(amplitude**2 > bound, np.rad2deg(np.sqrt(across) / amplitude), np.nan)
    return phasors, np.sqrt(radial), phase_sd


def _constants(
    names: tuple[str, ...],
    tie: Complex,
    parameters: Float,
    covariance: Float,
    fitted: int,
    companions: Sequence[Companion],
    *,
    nodal: NodalConvention,
    reference: str | None,
) -> HarmonicConstants:
    phasors, amplitude_sd, phase_sd = _errors(tie, parameters, covariance, fitted, companions)
    table = HarmonicConstants(
        names=names,
        amplitude_m=np.abs(phasors),
        phase_lag_deg=np.mod(-np.rad2deg(np.angle(phasors)), 360.0),
        amplitude_sd_m=amplitude_sd,
        phase_lag_sd_deg=phase_sd,
        basis=("fitted",) * fitted + ("inferred",) * len(companions),
        mean_level_m=float(parameters[0]),
        mean_level_sd_m=float(np.sqrt(covariance[0, 0])),
        nodal=nodal,
        vertical_reference=reference,
    )
    return table.select(sorted(names, key=lambda name: resolve(name).speed_deg_per_h))
