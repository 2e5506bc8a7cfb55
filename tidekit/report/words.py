"""Words of the report: what a verdict and a finding mean, and what to do."""

from __future__ import annotations

import math

from tidekit.quality.findings import Finding
from tidekit.records.station import Station

VERDICTS = {
    "consistent": "The tide along this coast is a boundary wave",
    "inconsistent": "The tide along this coast is not the boundary wave that its depth would carry",
    "undetermined": "This network cannot decide whether its tide is a boundary wave",
}

KINDS = {
    "clock_offset": "clock",
    "clock_drift": "clock drift",
    "time_zone": "time zone",
    "unit_scale": "unit of height",
    "inverted": "upside down",
    "gain": "gain",
    "datum_step": "datum step",
    "datum_drift": "datum drift",
    "sensor_flat": "sensor stuck",
    "attenuated": "tide attenuated",
    "phase_outlier": "phases out of line",
    "amplitude_outlier": "amplitudes out of line",
    "coverage": "coverage",
}

ADVICE = {
    "clock_offset": "Compare the logger's clock with a time signal; if it confirms, shift the recorded times back.",
    "clock_drift": "Compare the logger's clock with a time signal at both ends of the record.",
    "time_zone": "Find out in which zone the logger wrote, declare it in the network file, and run again.",
    "unit_scale": "Find out in which unit the logger wrote, declare it in the network file, and run again.",
    "inverted": "A pressure or distance sensor may be wired or scaled the wrong way; turn the heights round.",
    "gain": "Check the sensor's calibration against a staff through a whole tide.",
    "datum_step": "Look in the log for work on the gauge at that date; level to the benchmarks before mending heights.",
    "datum_drift": "Level the gauge to its benchmarks and repeat the check.",
    "sensor_flat": "Check the well, the intake and the sensor; leave the spell out of any analysis.",
    "attenuated": "Check the well and its intake for silt or growth.",
    "phase_outlier": "Check the record for mixed clocks; a gauge in a bay or strait wants open_coast = false.",
    "amplitude_outlier": "A gauge in a bay or strait wants open_coast = false.",
    "coverage": "Find the missing rows or the rest of the record.",
}

_RATIOS = ("unit_scale", "gain", "amplitude_outlier", "attenuated")
_UNSIZED = ("inverted",)


def size_in_words(finding: Finding) -> str:
    """Size of a finding with its standard deviation and unit, no more digits than that gives; empty where it has none.

    Examples
    --------
    >>> late = Finding(gauge="a", kind="clock_offset", value=11.118, value_sd=0.784, severity="error", evidence="")
    >>> size_in_words(late)
    '+11.12 ± 0.78 min'
    >>> thin = Finding(gauge="a", kind="coverage", value=0.71, value_sd=math.nan, severity="note", evidence="")
    >>> size_in_words(thin)
    '71 %'
    """
    value, sd = finding.value, finding.value_sd
    if finding.kind in _UNSIZED or not math.isfinite(value):
        return ""
    if finding.kind == "coverage":
        return f"{100 * value:.0f} %"
    sign = "" if finding.kind in _RATIOS else "+"
    if not math.isfinite(sd) or sd <= 0.0:
        return f"{value:{sign}.3g} {finding.unit}".rstrip()
    decimals = max(1 - math.floor(math.log10(sd)), 0)
    return f"{value:{sign}.{decimals}f} ± {sd:.{decimals}f} {finding.unit}".rstrip()


def in_full(station: Station) -> str:
    """Name and id: two gauges may share a name, none an id."""
    return station.id if station.label == station.id else f"{station.label} ({station.id})"
