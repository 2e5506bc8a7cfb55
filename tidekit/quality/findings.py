"""A finding: what a gauge's record does wrong, how much, how sure, and by what evidence."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import Literal, get_args

import pandas as pd

Severity = Literal["note", "warning", "error"]
SEVERITIES: tuple[Severity, ...] = get_args(Severity)
"""From the mildest to the gravest."""

UNITS: dict[str, str] = {
    "clock_offset": "min",
    "clock_drift": "min/day",
    "time_zone": "h",
    "unit_scale": "",
    "inverted": "",
    "gain": "",
    "datum_step": "m",
    "datum_drift": "m/year",
    "sensor_flat": "h",
    "attenuated": "",
    "phase_outlier": "deg",
    "amplitude_outlier": "",
    "coverage": "",
}
"""Every kind of finding and the unit of its value."""


@dataclass(frozen=True, kw_only=True)
class Finding:
    """One thing wrong with one gauge's record, stated as recorded minus (or over) true."""

    gauge: str
    """Id of the gauge."""
    kind: str
    """One of the keys of `UNITS`."""
    value: float
    """Its size, in the kind's unit."""
    value_sd: float
    """Standard deviation of the size; NaN where it has none."""
    severity: Severity
    """How grave."""
    evidence: str
    """What was measured, in a sentence or two for people."""

    def __post_init__(self) -> None:
        if self.kind not in UNITS:
            message = f"unknown kind of finding {self.kind!r}; there are {', '.join(UNITS)}"
            raise ValueError(message)

    @property
    def unit(self) -> str:
        """Unit of `value`."""
        return UNITS[self.kind]


def by_gravity(findings: Iterable[Finding]) -> tuple[Finding, ...]:
    """Sort findings, the gravest first, then by gauge and kind."""
    return tuple(sorted(findings, key=lambda f: (-SEVERITIES.index(f.severity), f.gauge, f.kind)))


def findings_frame(findings: Iterable[Finding]) -> pd.DataFrame:
    """One row a finding, with the columns of `findings.csv`."""
    columns = ["gauge", "kind", "value", "value_sd", "unit", "severity", "evidence"]
    return pd.DataFrame([[getattr(f, c) for c in columns] for f in findings], columns=columns)
