"""Faults of single gauges, read from how they depart from the wave at the others."""

from __future__ import annotations

import numpy as np
import scipy.stats
from numpy.typing import NDArray

from tidekit.network.delays import CLEAR_LEAD, wrapped_deg
from tidekit.network.fingerprints import Fingerprint
from tidekit.quality.findings import Finding, Severity
from tidekit.records.network import AuditSettings

Float = NDArray[np.float64]

ERROR_LEVEL, WARNING_LEVEL = 0.001, 0.01
"""Two-sided probabilities of a deviation so large in a sound gauge, below which it is an error or a warning."""
_ZONE_FROM_H = 0.4
"""Clock errors from here on, near what zones differ by, are time zones."""
_ZONE_STEPS_H = (0.25, 0.5, 1.0)
"""Zones differ by hours, some by half or quarter hours (tz database, 2024)."""
_ZONE_SLACK_H = 0.03
"""How near is near, where the clock is measured better than that."""
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
    scatter = float(np.sqrt(np.mean(left**2)))
    if scatter > max(_SCATTER_DEG, 4.0 * float(np.sqrt(np.mean(p.phase_sd_deg**2)))):
        worst = int(np.argmax(np.abs(p.phase_residual_deg)))
        evidence = f"phase lags depart by {shown} from the other gauges' wave, and no clock error explains it"
        value, sd = float(p.phase_residual_deg[worst]), float(p.phase_sd_deg[worst])
        return [_finding(p.gauge, "phase_outlier", value, sd, "warning", evidence)]
    return _inversion(p, shown) + _clock(p, shown, settings)


def _inversion(p: Fingerprint, shown: str) -> list[Finding]:
    if not p.inverted:
        return []
    sure = p.inverted_lead >= CLEAR_LEAD
    evidence = f"phase lags depart by {shown}: every constituent is turned by about 180 degrees"
    if not sure:
        evidence += ", which so few constituents hardly tell from a clock error of hours"
    return [_finding(p.gauge, "inverted", 1.0, float("nan"), "error" if sure else "warning", evidence)]


def _clock(p: Fingerprint, shown: str, settings: AuditSettings) -> list[Finding]:
    delay, sd = p.clock.delay_h, p.clock_sd_h
    severity = _severity(delay / sd, p.clock_freedom, abs(delay) * 60.0 / settings.clock_error_min)
    if severity is None:
        return []
    late = "later" if delay > 0 else "earlier"
    evidence = f"phase lags depart by {shown}: in proportion to speed, as a clock error does"
    if min(p.clock.lead, p.inverted_lead) < CLEAR_LEAD:
        severity = "warning"
        evidence += " (other explanations, whole periods apart or upside down, are nearly as good)"
    zone, vague = _zone_h(delay, sd), _hours_vaguely(delay, sd)
    if zone is not None or vague:
        size = f"{abs(zone):g} h" if zone is not None else f"about {abs(delay):.1f} h"
        evidence += f"; recorded times are {size} {late} than the tide's: check the time zone"
        if vague:
            evidence += " (too few gauges agree to tell which)"
        return [_finding(p.gauge, "time_zone", delay, sd, severity, evidence)]
    evidence += f"; recorded times are {60 * abs(delay):.1f} min {late} than the tide's"
    if delay > 0:
        evidence += "; a bay or a strait delays the tide alike: if the gauge stands in one, mark it open_coast = false"
    return [_finding(p.gauge, "clock_offset", 60.0 * delay, 60.0 * sd, severity, evidence)]


def _zone_h(delay_h: float, sd_h: float) -> float | None:
    """Difference of zones that a clock error is; None where it is none, or the error is too vague to tell."""
    if abs(delay_h) < _ZONE_FROM_H:
        return None
    slack = max(2.5 * sd_h, _ZONE_SLACK_H)
    for step in _ZONE_STEPS_H:
        nearest = step * round(delay_h / step)
        # A step that the slack fills would take any clock error for a zone.
        if 3.0 * slack < step and abs(delay_h - nearest) < slack:
            return nearest
    return None


def _hours_vaguely(delay_h: float, sd_h: float) -> bool:
    """Whether a clock is wrong by an hour or more, too vaguely to tell zones apart: clocks alone rarely are."""
    slack = 2.5 * sd_h
    return 3.0 * slack >= max(_ZONE_STEPS_H) and abs(delay_h) - slack >= 1.0


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
    if abs(np.log(unit) - p.log_gain) < np.clip(3.0 * p.log_gain_sd, _UNIT_SLACK, 2.0 * _UNIT_SLACK):
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
