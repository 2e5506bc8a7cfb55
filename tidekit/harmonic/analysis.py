"""Harmonic analysis by least squares: from times and heights to constants with honest errors."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np
from numpy.typing import ArrayLike, NDArray

from tidekit.constituents.constants import HarmonicConstants, NodalConvention
from tidekit.constituents.resolution import Companion
from tidekit.errors import AnalysisError, UnfitRecordError
from tidekit.harmonic.basis import Basis, basis_for
from tidekit.harmonic.noise import ResidualSpectrum
from tidekit.harmonic.normal import Inverse, Model
from tidekit.harmonic.plan import Plan
from tidekit.harmonic.results import HarmonicFit, close_pairs
from tidekit.harmonic.uncertainty import add_modulation, parameter_noise, phasor_errors
from tidekit.records.record import GaugeRecord

Float = NDArray[np.float64]


def analyse(
    t_h: ArrayLike,
    height_m: ArrayLike,
    *,
    constituents: Sequence[str] | None = None,
    infer: Sequence[Companion] | None = None,
    trend: bool = False,
    regressors: Mapping[str, ArrayLike] | None = None,
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
    regressors : mapping of str to array-like of shape (n,), optional
        Further series to fit, by name; see `tidekit.harmonic.regressors`.
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
        If the times or heights cannot be analysed, the record is too short, or what is asked for cannot be told
        apart.
    ConstituentError
        If a name is unknown.

    References
    ----------
    .. [1] Foreman, M. G. G. and Henry, R. F., "The harmonic analysis of tidal model time series", Adv. Water
       Resources 12 (1989) 109-120: least squares with modulation in the basis.
    """
    times, heights = checked(t_h, height_m)
    step_h = middle_step_h(times)
    span_h = float(times[-1] - times[0]) + step_h
    plan = Plan.of(constituents, infer, span_h=span_h, step_h=step_h, trend=trend, nodal=nodal)
    reference_h = 0.5 * float(times[0] + times[-1])
    basis = basis_for(plan.columns(reference_h), times)
    return fit(
        plan,
        basis,
        times,
        heights,
        reference_h=reference_h,
        step_h=step_h,
        regressors=regressors or {},
        vertical_reference=vertical_reference,
    )


def fit(
    plan: Plan,
    basis: Basis,
    times: Float,
    heights: Float,
    *,
    reference_h: float,
    step_h: float,
    regressors: Mapping[str, ArrayLike],
    vertical_reference: str | None,
) -> HarmonicFit:
    """Fit a plan to checked times and heights on their basis; see `analyse`."""
    names = (*plan.parameter_names, *regressors)
    if len(times) <= len(names):
        message = f"{len(times)} samples for {len(names)} parameters; ask for fewer constituents or a longer record"
        raise AnalysisError(message)
    model = Model(basis, plan.mixing, regressor_columns(regressors, len(times)))
    inverse = Inverse.of(model.normal_matrix(), names)
    parameters = inverse.solve(model.project(heights))
    residual = heights - model.evaluate(parameters)
    spectrum = ResidualSpectrum.of(residual, times, step_h)
    variance, freedom = parameter_noise(plan, spectrum, len(regressors))
    scale = np.sqrt(variance)
    covariance = inverse.inverse * np.outer(scale, scale)
    add_modulation(plan, covariance, parameters, float(times[-1] - times[0]))
    white = inverse.inverse * (float(residual @ residual) / (len(times) - len(names)))
    errors = phasor_errors(plan, parameters, covariance, freedom)
    constants = HarmonicConstants(
        names=plan.names,
        amplitude_m=np.abs(errors.phasors_m),
        phase_lag_deg=np.mod(-np.rad2deg(np.angle(errors.phasors_m)), 360.0),
        amplitude_sd_m=errors.radial_sd_m,
        phase_lag_sd_deg=errors.phase_sd_deg,
        basis=tuple("inferred" if inferred else "fitted" for inferred in plan.inferred),
        mean_level_m=float(parameters[0]),
        mean_level_sd_m=float(np.sqrt(covariance[0, 0])),
        nodal=plan.nodal,
        vertical_reference=vertical_reference,
    )
    return HarmonicFit(
        plan=plan,
        constants=constants,
        white_amplitude_sd_m=phasor_errors(plan, parameters, white, freedom).radial_sd_m,
        t_h=times,
        residual_m=residual,
        reference_h=reference_h,
        parameter_names=names,
        parameters=parameters,
        covariance=covariance,
        design_correlation=inverse.scaled,
        close_pairs=close_pairs(plan, inverse.inverse, float(times[-1] - times[0]) + step_h),
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
    UnfitRecordError
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
        raise UnfitRecordError(str(error), path=record.sources[0].path if record.sources else None) from error


def checked(t_h: ArrayLike, height_m: ArrayLike) -> tuple[Float, Float]:
    """Times and heights as arrays.

    Raises
    ------
    AnalysisError
        If they are not two equal rows of finite numbers in order of time, or the height never changes.
    """
    times, heights = np.asarray(t_h, dtype=np.float64), np.asarray(height_m, dtype=np.float64)
    problem = None
    if times.ndim != 1 or times.shape != heights.shape:
        problem = f"times of shape {times.shape} and heights of shape {heights.shape}; wanted two equal rows"
    elif len(times) < 3:
        problem = f"{len(times)} samples, too short for any constituent; a day of hourly heights is the least"
    elif not (np.isfinite(times).all() and np.isfinite(heights).all()):
        problem = "times or heights are not finite; leave missing samples out"
    elif not np.all(times[1:] > times[:-1]):
        problem = "times are not in order or stand twice; sort them and keep one height each"
    elif heights.min() == heights.max():
        problem = f"the height is {heights[0]:g} m throughout; a constant record has no tide to fit"
    if problem:
        raise AnalysisError(problem)
    return times, heights


def middle_step_h(times: Float) -> float:
    """Median step between sorted times, from some thousand of them. [h]"""
    some = np.linspace(0, len(times) - 2, min(len(times) - 1, 4096)).astype(np.int64)
    return float(np.median(times[some + 1] - times[some]))


def regressor_columns(regressors: Mapping[str, ArrayLike], count: int) -> Float:
    """Regressors side by side, shape (count, q).

    Raises
    ------
    AnalysisError
        If one has another shape or is not finite.
    """
    columns = np.empty((count, len(regressors)))
    for index, (name, values) in enumerate(regressors.items()):
        series = np.asarray(values, dtype=np.float64)
        if series.shape != (count,) or not np.isfinite(series).all():
            message = f"regressor {name} has shape {series.shape} or values not finite; wanted {count} finite numbers"
            raise AnalysisError(message)
        columns[:, index] = series
    return columns
