"""Run an audit: each gauge by itself, then the network, then what both say."""

from __future__ import annotations

import os
import platform
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from datetime import UTC, datetime

import numpy as np
import pandas as pd
import scipy
import statsmodels

import tidekit
from tidekit.audit.result import Audit, GaugeAudit
from tidekit.constituents.constants_table import read_constants
from tidekit.datums.observed import observed_datums
from tidekit.datums.predicted import predicted_datums
from tidekit.datums.table import DatumTable
from tidekit.errors import AnalysisError, InputError, UnfitRecordError
from tidekit.files import sha256_of
from tidekit.harmonic.analysis import analyse_record
from tidekit.network.gauges import GaugeTide
from tidekit.network.measure import NetworkMeasure, measure_network
from tidekit.quality.findings import Finding, by_gravity
from tidekit.quality.record_findings import coverage_finding, record_findings
from tidekit.records.network import AuditSettings, GaugeEntry, Network
from tidekit.records.record import GaugeRecord, SourceFile
from tidekit.records.source import open_gauge

Progress = Callable[[str], None]

_MOST_AT_ONCE = 4
"""Gauges audited at the same time, by threads: matrix products leave the interpreter free. More would only
crowd the linear algebra's own threads and the memory."""


def run_audit(network: Network, *, progress: Progress = lambda _: None) -> Audit:
    """Audit a network.

    Parameters
    ----------
    network : Network
        Coast, gauges and settings.
    progress : callable
        Told in a few words what is being done.

    Returns
    -------
    Audit
        Constants, datums, wave and findings.

    Raises
    ------
    InputError
        If an export, a layout or a table of constants cannot be read, or no gauge can be analysed.
    """
    started = datetime.now(UTC).isoformat(timespec="seconds")
    gauges = _audit_gauges(network, progress)
    if all(gauge.constants is None for gauge in gauges):
        evidence = "; ".join(f"{gauge.station.id}: {gauge.findings[0].evidence}" for gauge in gauges)
        message = f"no gauge of this network can be analysed ({evidence})"
        raise InputError(message, path=network.path)
    progress("the wave along the coast")
    tides = [GaugeTide(station=g.station, constants=g.constants) for g in gauges if g.constants is not None]
    measure = measure_network(tides, network.coast, network.settings)
    progress("the records beside one another")
    fits = {g.station.id: g.fit for g in gauges if g.fit is not None}
    records = {g.station.id: g.record for g in gauges if g.record is not None and g.fit is not None}
    own = [finding for gauge in gauges for finding in gauge.findings]
    findings = by_gravity([*own, *measure.findings, *record_findings(fits, records, network.settings)])
    return Audit(
        network=network,
        gauges=tuple(gauges),
        measure=measure,
        findings=findings,
        inputs=_inputs(network, gauges),
        versions=versions(),
        started_utc=started,
    )


def _audit_gauges(network: Network, progress: Progress) -> list[GaugeAudit]:
    """Audit the gauges, a few at a time, in the order of the file; the first that cannot be read ends it."""
    total, done = len(network.gauges), []
    progress(f"gauges: 0 of {total}")
    with ThreadPoolExecutor(min(_MOST_AT_ONCE, os.cpu_count() or 1)) as pool:
        for gauge in pool.map(lambda entry: audit_gauge(entry, network.settings), network.gauges):
            done.append(gauge)
            progress(f"gauges: {len(done)} of {total}, {gauge.station.label} done")
    return done


def measure_gauges(network: Network) -> NetworkMeasure:
    """Measure the wave of a network without the rest of an audit; gauges that cannot be analysed are left out.

    Raises
    ------
    InputError
        If an export, a layout or a table of constants cannot be read, or no gauge can be analysed.
    """
    tides, reasons = [], []
    for entry in network.gauges:
        try:
            tides.append(_gauge_tide(entry, network.settings))
        except UnfitRecordError as error:
            reasons.append(f"{entry.station.id}: {error}")
    if not tides:
        message = f"no gauge of this network can be analysed ({'; '.join(reasons)})"
        raise InputError(message, path=network.path)
    return measure_network(tides, network.coast, network.settings)


def _gauge_tide(entry: GaugeEntry, settings: AuditSettings) -> GaugeTide:
    if entry.constants_path is not None:
        constants = read_constants(entry.constants_path, gauge=entry.station.id, any_single=True)
        return GaugeTide(station=entry.station, constants=constants)
    fit = analyse_record(open_gauge(entry), constituents=settings.constituents, nodal=settings.nodal)
    return GaugeTide(station=entry.station, constants=fit.constants)


def audit_gauge(entry: GaugeEntry, settings: AuditSettings) -> GaugeAudit:
    """Audit one gauge by itself: record, constants, datums.

    Raises
    ------
    InputError
        If its files cannot be read. A record that can be read but not analysed is a `coverage` finding.
    """
    if entry.constants_path is not None:
        constants = read_constants(entry.constants_path, gauge=entry.station.id, any_single=True)
        tables, findings = _datums(entry.station.id, None, lambda: predicted_datums(constants, gauge=entry.station.id))
        return GaugeAudit(
            entry=entry,
            station=entry.station,
            record=None,
            fit=None,
            constants=constants,
            datums=tables,
            findings=findings,
        )
    record = open_gauge(entry)
    gauge = record.station.id
    try:
        fit = analyse_record(record, constituents=settings.constituents, nodal=settings.nodal)
    except UnfitRecordError as error:
        finding = coverage_finding(gauge, 0.0, "error", f"the record cannot be analysed: {error}")
        return GaugeAudit(
            entry=entry, station=record.station, record=record, fit=None, constants=None, datums=(), findings=(finding,)
        )
    tables, findings = _datums(gauge, record, lambda: predicted_datums(fit.constants, gauge=gauge))
    return GaugeAudit(
        entry=entry,
        station=record.station,
        record=record,
        fit=fit,
        constants=fit.constants,
        datums=tables,
        findings=findings,
    )


def _datums(
    gauge: str, record: GaugeRecord | None, predicted: Callable[[], DatumTable]
) -> tuple[tuple[DatumTable, ...], tuple[Finding, ...]]:
    """Make the datum tables that can be made; a note says why another cannot."""
    makers = [predicted] if record is None else [lambda: observed_datums(record), predicted]
    tables, notes = [], []
    for make in makers:
        try:
            tables.append(make())
        except AnalysisError as error:
            notes.append(coverage_finding(gauge, float("nan"), "note", f"a table of datums is missing: {error}"))
    return tuple(tables), tuple(notes)


def _inputs(network: Network, gauges: list[GaugeAudit]) -> tuple[SourceFile, ...]:
    paths = [network.path]
    for gauge in gauges:
        paths += [path for path in (gauge.entry.layout, gauge.entry.constants_path) if path is not None]
    plain = tuple(SourceFile(str(path), sha256_of(path)) for path in dict.fromkeys(paths))
    return (*plain, *(source for gauge in gauges if gauge.record is not None for source in gauge.record.sources))


def versions() -> dict[str, str]:
    """Versions of tidekit and of what it computes with."""
    return {
        "tidekit": tidekit.__version__,
        "python": platform.python_version(),
        "numpy": np.__version__,
        "scipy": scipy.__version__,
        "pandas": pd.__version__,
        "statsmodels": statsmodels.__version__,
    }
