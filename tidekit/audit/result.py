"""What an audit of a network gives."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import pandas as pd

from tidekit.constituents.constants import HarmonicConstants
from tidekit.constituents.constants_table import constants_frame
from tidekit.datums.table import COLUMNS as DATUM_COLUMNS
from tidekit.datums.table import DatumTable
from tidekit.harmonic.results import HarmonicFit
from tidekit.network.measure import NetworkMeasure
from tidekit.quality.findings import SEVERITIES, Finding, Severity, findings_frame
from tidekit.records.network import GaugeEntry, Network
from tidekit.records.record import GaugeRecord, SourceFile
from tidekit.records.station import Station


@dataclass(frozen=True, eq=False, kw_only=True)
class GaugeAudit:
    """One gauge: from its export to its datums."""

    entry: GaugeEntry
    """Its table in the network file."""
    station: Station
    """Place, with the vertical reference that the export states."""
    record: GaugeRecord | None
    """Record; None for a gauge given by its constants."""
    fit: HarmonicFit | None
    """Analysis; None for such a gauge, or a record that cannot be analysed."""
    constants: HarmonicConstants | None
    """Constants, fitted or given; None for a record that cannot be analysed."""
    datums: tuple[DatumTable, ...]
    """Observed and predicted datums, where each could be made."""
    findings: tuple[Finding, ...]
    """What kept a part from being made."""


@dataclass(frozen=True, eq=False, kw_only=True)
class Audit:
    """An audit of a network."""

    network: Network
    """The network as its file says."""
    gauges: tuple[GaugeAudit, ...]
    """Gauges in the order of the file."""
    measure: NetworkMeasure
    """The wave and what breaks it."""
    findings: tuple[Finding, ...]
    """All findings, the gravest first."""
    inputs: tuple[SourceFile, ...]
    """Every file read, with its fingerprint."""
    versions: Mapping[str, str]
    """Versions of tidekit and of what it computes with."""
    started_utc: str
    """When the run began, ISO 8601."""

    @property
    def verdict(self) -> str:
        """The wave verdict in a word."""
        return self.measure.propagation.verdict.word

    def worst_at_least(self, severity: Severity) -> bool:
        """Whether any finding is as grave as this or graver."""
        return any(SEVERITIES.index(f.severity) >= SEVERITIES.index(severity) for f in self.findings)

    def errors_of(self, gauge: str) -> tuple[str, ...]:
        """Kinds of the findings of severity `error` at a gauge: what its constants and datums carry."""
        return tuple(dict.fromkeys(f.kind for f in self.findings if f.gauge == gauge and f.severity == "error"))

    def constants_table(self) -> pd.DataFrame:
        """Rows of `constants.csv`; its last column says what is wrong with the gauge that they come from."""
        frames = [constants_frame(g.constants, g.station.id) for g in self.gauges if g.constants is not None]
        return self._with_errors(pd.concat(frames, ignore_index=True))

    def datums_table(self) -> pd.DataFrame:
        """Rows of `datums.csv`; its last column says what is wrong with the gauge that they come from."""
        frames = [table.to_frame() for gauge in self.gauges for table in gauge.datums]
        if not frames:
            return pd.DataFrame(columns=[*DATUM_COLUMNS, "gauge_errors"])
        return self._with_errors(pd.concat(frames, ignore_index=True))

    def _with_errors(self, frame: pd.DataFrame) -> pd.DataFrame:
        return frame.assign(gauge_errors=[" ".join(self.errors_of(gauge)) for gauge in frame["gauge"]])

    def findings_table(self) -> pd.DataFrame:
        """Rows of `findings.csv`."""
        return findings_frame(self.findings)
