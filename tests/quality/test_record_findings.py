"""Findings of single records: coverage, stuck sensors; and what a finding is."""

import numpy as np
import pandas as pd
import pytest

from tidekit.quality.findings import Finding, by_gravity, findings_frame
from tidekit.quality.record_findings import coverage_findings, flat_findings
from tidekit.records.ledger import RowLedger
from tidekit.records.network import AuditSettings
from tidekit.records.record import GaugeRecord
from tidekit.records.station import Station


def record(hours: np.ndarray, heights: np.ndarray) -> GaugeRecord:
    index = pd.Timestamp("2021-01-01", tz="UTC") + pd.to_timedelta(hours, unit="h")
    series = pd.Series(heights, index=index)
    return GaugeRecord(
        station=Station(id="a"),
        heights=series,
        flags=pd.Series(np.full(len(hours), 2, dtype=np.int8), index=index),
        ledger=RowLedger(rows=len(hours), kept=len(hours)),
    )


def tide(hours: np.ndarray) -> np.ndarray:
    return np.round(np.cos(0.5058 * hours), 3)


def test_a_whole_record_has_no_findings() -> None:
    hours = np.arange(24.0 * 60)
    assert coverage_findings("a", record(hours, tide(hours)), AuditSettings()) == []
    assert flat_findings("a", record(hours, tide(hours))) == []


def test_a_short_record_and_a_thin_one_are_found() -> None:
    hours = np.arange(24.0 * 20)
    (short,) = coverage_findings("a", record(hours, tide(hours)), AuditSettings())
    assert "20.0 days" in short.evidence
    hours = np.arange(24.0 * 60)[np.random.default_rng(1).random(24 * 60) < 0.7]
    (thin,) = coverage_findings("a", record(hours, tide(hours)), AuditSettings())
    assert thin.value == pytest.approx(0.7, abs=0.05)  # the share drawn, 1440 samples
    assert thin.severity == "warning"


def test_a_stuck_sensor_is_found_and_a_gap_is_not_one() -> None:
    hours = np.arange(24.0 * 60)
    heights = tide(hours)
    heights[500:509] = heights[500]
    (stuck,) = flat_findings("a", record(hours, heights))
    assert stuck.value == 8.0
    assert "2021-01-21 20:00" in stuck.evidence
    hours, heights = np.delete(hours, np.s_[501:509]), np.delete(heights, np.s_[501:509])
    assert flat_findings("a", record(hours, heights)) == []


def finding(**changes: object) -> Finding:
    plain = {"gauge": "a", "kind": "gain", "value": 1.2, "value_sd": 0.1, "severity": "warning", "evidence": "e"}
    return Finding(**(plain | changes))  # type: ignore[arg-type]


def test_the_gravest_comes_first() -> None:
    order = by_gravity([finding(), finding(severity="note"), finding(gauge="b", severity="error")])
    assert [f.severity for f in order] == ["error", "warning", "note"]


def test_the_table_has_the_contracts_columns() -> None:
    frame = findings_frame([finding(kind="clock_offset")])
    assert list(frame.columns) == ["gauge", "kind", "value", "value_sd", "unit", "severity", "evidence"]
    assert frame["unit"][0] == "min"
    assert list(findings_frame([]).columns) == list(frame.columns)


def test_an_unknown_kind_is_refused() -> None:
    with pytest.raises(ValueError, match="unknown kind of finding 'odd'"):
        finding(kind="odd")
