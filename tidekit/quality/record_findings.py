"""Findings that a gauge's own record gives, beside its neighbours' where they help."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from tidekit.astronomy.timescales import datetime64_from_hours
from tidekit.harmonic.results import HarmonicFit
from tidekit.quality.daily import against_neighbours, daily_levels
from tidekit.quality.findings import Finding, Severity
from tidekit.quality.jumps import find_jumps
from tidekit.quality.slips import daily_lateness, find_drift, find_slips
from tidekit.quality.steps import CRITICAL_T, Step, find_steps
from tidekit.records.network import AuditSettings
from tidekit.records.record import GaugeRecord

_LEAST_COVERAGE = 0.8
"""Part of the span that a record should cover (common practice, no source)."""
_SLOW_DEVIATIONS = 8.0
"""Deviations of the monthly wandering from which a step is an error rather than a warning."""
_FLAT_HOURS = 6.0
"""A sea level that stays the same to the last digit for so long is a stuck sensor (common practice, no source)."""


def record_findings(
    fits: Mapping[str, HarmonicFit], records: Mapping[str, GaugeRecord], settings: AuditSettings
) -> tuple[Finding, ...]:
    """Look for datum steps, slips and drifts of the clock, stuck sensors and thin coverage.

    Parameters
    ----------
    fits, records : mapping of gauge id
        Analyses and records of the same gauges.
    settings : AuditSettings
        Thresholds.

    Returns
    -------
    tuple of Finding
        Unsorted.
    """
    findings: list[Finding] = []
    for gauge, record in records.items():
        findings += coverage_findings(gauge, record, settings)
        findings += flat_findings(gauge, record)
    for gauge, fit in fits.items():
        findings += clock_findings(gauge, fit, settings)
    return (*findings, *step_findings(fits, settings))


def step_findings(fits: Mapping[str, HarmonicFit], settings: AuditSettings) -> tuple[Finding, ...]:
    """Datum steps of each gauge, the weather that its neighbours share taken off."""
    if not fits:
        return ()
    levels = daily_levels([fit.t_h for fit in fits.values()], [fit.residual_m for fit in fits.values()])
    findings = []
    alone = len(fits) == 1
    for row, (gauge, fit) in enumerate(fits.items()):
        steps = find_steps(levels.days, against_neighbours(levels, row))
        if alone and not steps:
            steps = find_jumps(fit.t_h, fit.residual_m, levels.days, levels.level_m[row])
        findings += [_step_finding(gauge, step, settings, alone=alone) for step in steps]
    return tuple(findings)


def _step_finding(gauge: str, step: Step, settings: AuditSettings, *, alone: bool) -> Finding:
    date = _date(step.day)
    against = "alone, no neighbour to compare with" if alone else "less what the neighbours share"
    # Seasons, rivers and currents move neighbours apart for months: a step must stand out of that too.
    spread = max(CRITICAL_T * step.sd_m, _SLOW_DEVIATIONS * step.slow_sd_m, settings.step_error_m)
    sure = abs(step.size_m) > spread
    return Finding(
        gauge=gauge,
        kind="datum_step",
        value=step.size_m,
        value_sd=step.sd_m,
        severity="error" if sure and not alone else "warning",
        evidence=(
            f"the non-tidal residual ({against}) stands {100 * abs(step.size_m):.1f} cm "
            f"{'higher' if step.size_m > 0 else 'lower'} from {date} on: check staff and benchmark readings about then"
        ),
    )


def clock_findings(gauge: str, fit: HarmonicFit, settings: AuditSettings) -> list[Finding]:
    """Jumps and drifts of the clock inside a record; warnings, since a change of the tide itself looks alike."""
    lateness = daily_lateness(fit)
    findings = []
    slips = [slip for slip in find_slips(lateness) if abs(slip.size_min) >= settings.clock_error_min]
    for slip in slips:
        evidence = (
            f"from {_date(slip.day)} on the record's tide comes {abs(slip.size_min):.1f} min "
            f"{'later' if slip.size_min > 0 else 'earlier'} than before: a slip of the clock, or a change of the tide"
        )
        findings.append(_clock(gauge, "clock_offset", slip.size_min, slip.sd_min, evidence))
    drift = None if slips else find_drift(lateness)
    if drift is not None and abs(drift.rate_min_per_day) * fit.span_days >= settings.clock_error_min:
        evidence = (
            f"the record's tide comes later by {drift.rate_min_per_day * fit.span_days:+.1f} min over its "
            f"{fit.span_days:.0f} days: a drift of the clock, or a slow change of the tide"
        )
        findings.append(_clock(gauge, "clock_drift", drift.rate_min_per_day, drift.sd_min_per_day, evidence))
    return findings


def _clock(gauge: str, kind: str, value: float, sd: float, evidence: str) -> Finding:
    return Finding(gauge=gauge, kind=kind, value=value, value_sd=sd, severity="warning", evidence=evidence)


def _date(day: int) -> str:
    return str(datetime64_from_hours(np.array([24.0 * day]))[0])[:10]


def coverage_findings(gauge: str, record: GaugeRecord, settings: AuditSettings) -> list[Finding]:
    """A record too short for a sound analysis, or with too many gaps."""
    times = record.times_h
    if len(times) < 2:
        evidence = f"{len(times)} usable samples: nothing to analyse"
        return [coverage_finding(gauge, 0.0, "error", evidence)]
    days = (times[-1] - times[0] + record.step_h) / 24.0
    share = float(min(len(times) * record.step_h / (24.0 * days), 1.0))
    if days < settings.minimum_days:
        evidence = f"the record spans {days:.1f} days; {settings.minimum_days:g} are wanted for an audit"
        return [coverage_finding(gauge, share, "warning", evidence)]
    if share < _LEAST_COVERAGE:
        evidence = (
            f"{100 * share:.0f} % of the samples of {days:.0f} days are there; {100 * _LEAST_COVERAGE:.0f} % are wanted"
        )
        return [coverage_finding(gauge, share, "warning", evidence)]
    return []


def coverage_finding(gauge: str, share: float, severity: Severity, evidence: str) -> Finding:
    """A `coverage` finding: the share of samples that are there, NaN where it is not about samples."""
    return Finding(
        gauge=gauge, kind="coverage", value=share, value_sd=float("nan"), severity=severity, evidence=evidence
    )


def flat_findings(gauge: str, record: GaugeRecord) -> list[Finding]:
    """Longest spell in which the height does not change in its last digit."""
    times, heights = record.times_h, record.heights_m
    if len(times) < 3:
        return []
    moved = np.flatnonzero(np.diff(heights) != 0.0)
    edges = np.concatenate([[-1], moved, [len(heights) - 1]])
    spells = times[edges[1:]] - times[edges[:-1] + 1]
    longest = int(np.argmax(spells))
    hours = float(spells[longest])
    # A spell must hold samples throughout: two equal heights across a gap are no stuck sensor.
    full = edges[longest + 1] - edges[longest] >= 0.5 * hours / record.step_h
    if hours < _FLAT_HOURS or not full:
        return []
    start = str(datetime64_from_hours(times[[edges[longest] + 1]])[0])[:16].replace("T", " ")
    stuck_m = heights[edges[longest] + 1]
    evidence = f"the height stays at {stuck_m:.3f} m for {hours:.1f} h from {start} UTC: stuck sensor or well"
    return [
        Finding(
            gauge=gauge, kind="sensor_flat", value=hours, value_sd=float("nan"), severity="warning", evidence=evidence
        )
    ]
