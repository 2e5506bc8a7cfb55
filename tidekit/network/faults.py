"""Faults of single gauges, from the pattern they leave across constituents.

A wrong clock shifts every phase lag in proportion to the constituent's speed; a wrong unit or gain multiplies
every amplitude alike; a record upside down turns every phase by 180 degrees. Each gauge is judged against the wave
fitted to the other gauges, and its errors contain the scatter between those.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import scipy.stats
from numpy.typing import NDArray

from tidekit.network.delays import Delay, joint_delay, wrapped_deg
from tidekit.network.gauges import TideArrays
from tidekit.network.propagation import PropagationFit, fit_delays, fit_levels, level_design
from tidekit.network.robust_line import RobustFit
from tidekit.quality.findings import Finding, Severity
from tidekit.records.network import AuditSettings

Float = NDArray[np.float64]

ERROR_LEVEL, WARNING_LEVEL = 0.001, 0.01
"""Two-sided probabilities of a deviation so large in a sound gauge, below which it is an error or a warning."""
_LEAST_OTHERS = 4
"""Gauges that must agree before another can be accused."""
_ZONE_FROM_H = 0.4
"""Clock errors from here on, near a quarter of an hour, are time zones."""
_QUARTER_H = 0.25
_UNITS = {
    0.3048: "metres declared as feet",
    1 / 0.3048: "feet declared as metres",
    10.0: "decimetres declared as metres",
    100.0: "centimetres declared as metres",
    1000.0: "millimetres declared as metres",
    0.01: "metres declared as centimetres",
    0.001: "metres declared as millimetres",
}
_UNIT_SLACK = 0.1
"""A gain within this of a ratio of units, relatively, is that mistake: coasts change amplitudes by as much."""
_SCATTER_DEG = 10.0
"""Phase scatter about the best clock error above which a clock does not explain it."""


@dataclass(frozen=True, eq=False, kw_only=True)
class Fingerprint:
    """How one gauge departs from the wave at the others: what its faults are read from; arrays of shape (k,)."""

    gauge: str
    """Id of the gauge."""
    names: tuple[str, ...]
    """Constituents."""
    speeds_deg_per_h: Float
    """Their speeds. [degrees per hour]"""
    phase_residual_deg: Float
    """Phase lag less that expected from the other gauges. [degrees]"""
    phase_sd_deg: Float
    """Its standard deviation, the scatter between the others included. [degrees]"""
    amplitude_ratio: Float
    """Amplitude over that expected."""
    clock: Delay
    """Clock error that best explains the phases. [h]"""
    clock_sd_h: float
    """Its standard deviation, the scatter between the others included. [h]"""
    clock_freedom: int
    """Degrees of freedom of that."""
    inverted: bool
    """Whether the phases are explained far better by a record upside down."""
    log_gain: float
    """Logarithm of the mean amplitude ratio."""
    log_gain_sd: float
    """Its standard deviation."""
    log_gain_freedom: int
    """Degrees of freedom of that."""


def fingerprints(fit: PropagationFit) -> tuple[Fingerprint, ...]:
    """Measure each gauge against the wave at the others.

    Parameters
    ----------
    fit : PropagationFit
        Fit of the whole network.

    Returns
    -------
    tuple of Fingerprint
        Empty where too few gauges agree to judge another.
    """
    if fit.delay_fit is None:
        return ()
    prints = []
    for gauge in range(len(fit.tides.ids)):
        others = fit.tides.without(gauge)
        line = fit_delays(others, tuple(np.delete(np.array(fit.delays, dtype=object), gauge)))
        levels = fit_levels(others)
        if line.used.sum() >= _LEAST_OTHERS:
            prints.append(_fingerprint(fit.tides, gauge, others, line, levels))
    return tuple(prints)


def _fingerprint(tides: TideArrays, gauge: int, others: TideArrays, line: RobustFit, levels: RobustFit) -> Fingerprint:
    place = np.array([1.0, tides.along_km[gauge]])
    expected_h, line_sd_h = line.predict(place)
    # Each constituent's own lag at the reference: a robust mean over the agreeing gauges, the joint delay taken off.
    trusted = others.rows(np.flatnonzero(line.used))
    steady = trusted.lag_deg - np.outer(
        np.column_stack([np.ones(len(trusted.ids)), trusted.along_km]) @ line.coefficients, tides.speeds_deg_per_h
    )
    anchor = steady[0] + np.median(wrapped_deg(steady - steady[0]), axis=0)
    residual = wrapped_deg(tides.lag_deg[gauge] - anchor - expected_h * tides.speeds_deg_per_h)
    scatter = wrapped_deg(steady - anchor).std(axis=0, ddof=1)
    sd = np.hypot(tides.lag_sd_deg[gauge], scatter)
    upright = joint_delay(residual, sd, tides.speeds_deg_per_h)
    overturned = joint_delay(residual, sd, tides.speeds_deg_per_h, turn_deg=180.0)
    # Upside down and late by hours can look alike in one band: both bands, and the smaller delay, decide.
    inverted = overturned.fit > upright.fit + 0.1 or (
        overturned.fit > upright.fit - 0.02 and abs(overturned.delay_h) < 0.25 * abs(upright.delay_h)
    )
    clock = overturned if inverted else upright
    expected_log, gain_sd, log_ratio = _amplitudes(tides, gauge, others, levels)
    del expected_log
    return Fingerprint(
        gauge=tides.ids[gauge],
        names=tides.names,
        speeds_deg_per_h=tides.speeds_deg_per_h,
        phase_residual_deg=residual,
        phase_sd_deg=sd,
        amplitude_ratio=np.exp(log_ratio),
        clock=clock,
        clock_sd_h=float(np.hypot(line_sd_h, clock.delay_sd_h)),
        clock_freedom=line.freedom,
        inverted=inverted,
        log_gain=float(np.median(log_ratio)),
        log_gain_sd=gain_sd,
        log_gain_freedom=levels.freedom,
    )


def _amplitudes(tides: TideArrays, gauge: int, others: TideArrays, levels: RobustFit) -> tuple[float, float, Float]:
    """Expected level, its standard deviation, and log amplitude over expected of each constituent."""
    design = level_design(tides.along_km, tides.offshore_km)
    if design.shape[1] != len(levels.coefficients):  # the gauge alone made a distance vary
        design = np.column_stack([design[:, :1], np.zeros((len(design), len(levels.coefficients) - 1))])
    expected, sd = levels.predict(design[gauge])
    logs = np.log(others.amplitude_m[levels.used])
    steady = logs - (design[np.arange(len(design)) != gauge][levels.used] @ levels.coefficients)[:, None]
    anchor = np.median(steady, axis=0)
    own = float(np.sqrt(np.mean(tides.log_amplitude_sd[gauge] ** 2) / len(tides.names)))
    return expected, float(np.hypot(sd, own)), np.log(tides.amplitude_m[gauge]) - anchor - expected


def gauge_faults(prints: tuple[Fingerprint, ...], settings: AuditSettings) -> tuple[Finding, ...]:
    """Read the faults of gauges from their fingerprints.

    Parameters
    ----------
    prints : tuple of Fingerprint
        One a gauge.
    settings : AuditSettings
        Sizes from which a fault is an error.

    Returns
    -------
    tuple of Finding
        Clock, time zone, inversion, unit and gain; phases that no clock explains.
    """
    findings: list[Finding] = []
    for print_ in prints:
        findings += _phase_findings(print_, settings)
        findings += _amplitude_findings(print_, settings)
    return tuple(findings)


def _phase_findings(p: Fingerprint, settings: AuditSettings) -> list[Finding]:
    turn = 180.0 if p.inverted else 0.0
    left = wrapped_deg(p.phase_residual_deg - turn - p.speeds_deg_per_h * p.clock.delay_h)
    shown = _list(p.names, wrapped_deg(p.phase_residual_deg), "+.1f", " deg")
    found: list[Finding] = []
    scatter = float(np.sqrt(np.mean(left**2)))
    if scatter > max(_SCATTER_DEG, 4.0 * float(np.sqrt(np.mean(p.phase_sd_deg**2)))):
        worst = int(np.argmax(np.abs(p.phase_residual_deg)))
        evidence = f"phase lags depart by {shown} from the other gauges' wave, and no clock error explains it"
        value, sd = float(p.phase_residual_deg[worst]), float(p.phase_sd_deg[worst])
        return [_finding(p.gauge, "phase_outlier", value, sd, "warning", evidence)]
    if p.inverted:
        evidence = f"phase lags depart by {shown}: every constituent is turned by about 180 degrees"
        found.append(_finding(p.gauge, "inverted", 1.0, float("nan"), "error", evidence))
    delay, sd = p.clock.delay_h, p.clock_sd_h
    severity = _severity(delay / sd, p.clock_freedom, abs(delay) * 60.0 / settings.clock_error_min)
    if severity is None:
        return found
    # Counting the nearest quarter hour as a zone wants the clock to be measured that well.
    zone = abs(delay) >= _ZONE_FROM_H and abs(delay - _QUARTER_H * round(delay / _QUARTER_H)) < max(3.0 * sd, 0.03)
    late = "later" if delay > 0 else "earlier"
    pattern = f"phase lags depart by {shown}: in proportion to speed, as a clock error does"
    if zone:
        nearest = _QUARTER_H * round(delay / _QUARTER_H)
        evidence = f"{pattern}; recorded times are {abs(nearest):g} h {late} than the tide's: check the time zone"
        found.append(_finding(p.gauge, "time_zone", delay, sd, severity, evidence))
    else:
        evidence = f"{pattern}; recorded times are {60 * abs(delay):.1f} min {late} than the tide's"
        found.append(_finding(p.gauge, "clock_offset", 60.0 * delay, 60.0 * sd, severity, evidence))
    return found


def _amplitude_findings(p: Fingerprint, settings: AuditSettings) -> list[Finding]:
    gain = float(np.exp(p.log_gain))
    size = abs(p.log_gain) / np.log1p(settings.gain_error)
    severity = _severity(p.log_gain / p.log_gain_sd, p.log_gain_freedom, size)
    if severity is None:
        return []
    shown = _list(p.names, p.amplitude_ratio, ".3f", "")
    spread = float(np.std(np.log(p.amplitude_ratio)))
    sd = gain * p.log_gain_sd
    if spread > max(0.5 * abs(p.log_gain), 0.05):
        evidence = f"amplitude ratios to the other gauges' wave are {shown}, too unlike each other for one gain"
        return [_finding(p.gauge, "amplitude_outlier", gain, sd, "warning", evidence)]
    unit = min(_UNITS, key=lambda ratio: abs(np.log(ratio) - p.log_gain))
    if abs(np.log(unit) - p.log_gain) < max(_UNIT_SLACK, 3.0 * p.log_gain_sd):
        evidence = f"every amplitude is about {gain:.2f} times the others' ({shown}): {_UNITS[unit]} ({unit:.4g})"
        return [_finding(p.gauge, "unit_scale", gain, sd, severity, evidence)]
    evidence = f"every amplitude is about {gain:.3f} times what the other gauges' wave gives ({shown})"
    return [_finding(p.gauge, "gain", gain, sd, severity, evidence)]


def _severity(deviations: float, freedom: int, size: float) -> Severity | None:
    """How grave a deviation of so many standard deviations and of this part of the error threshold is."""
    probability = float(2.0 * scipy.stats.t.sf(abs(deviations), max(freedom, 1)))
    if size >= 1.0 and probability < ERROR_LEVEL:
        return "error"
    if size >= 0.5 and probability < WARNING_LEVEL:
        return "warning"
    return None


def _finding(gauge: str, kind: str, value: float, sd: float, severity: Severity, evidence: str) -> Finding:
    return Finding(gauge=gauge, kind=kind, value=value, value_sd=sd, severity=severity, evidence=evidence)


def _list(names: tuple[str, ...], values: Float, form: str, unit: str) -> str:
    return ", ".join(f"{name} {value:{form}}" for name, value in zip(names, values, strict=True)) + unit
