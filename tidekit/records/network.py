"""What a network file says: the coast, its gauges, and the choices of an audit."""

from __future__ import annotations

from dataclasses import dataclass, field
from pathlib import Path
from typing import Literal

from tidekit.constituents.constants import NodalConvention
from tidekit.records.station import Station

Side = Literal["left", "right"]


@dataclass(frozen=True, kw_only=True)
class CoastSpec:
    """The coast that the gauges stand along."""

    side: Side
    """Where the land lies when looking along increasing `along_coast_km`."""
    depth_m: float | None = None
    """One depth for the whole coast. [m]"""
    depth_along_coast: tuple[tuple[float, float], ...] = ()
    """Depths at positions along the coast. [(km, m)]"""
    depth_cross_shore: tuple[tuple[float, float], ...] = ()
    """Depths at distances offshore. [(km, m)]"""
    line: tuple[tuple[float, float], ...] = ()
    """Points of the coast line, in order of increasing `along_coast_km`. [(latitude, longitude), degrees]"""


@dataclass(frozen=True, kw_only=True)
class GaugeEntry:
    """One gauge of a network: its place and where its data is."""

    station: Station
    """Place and name."""
    files: tuple[Path, ...] = ()
    """Export files, in order of name; empty where the gauge is given by its constants."""
    constants_path: Path | None = None
    """Table of constants given instead of an export."""
    layout: Path | None = None
    """Declared layout of the export."""
    column: str | None = None
    """Which column holds the heights."""
    time_zone: str | None = None
    """Declared time zone."""
    unit: str | None = None
    """Declared unit."""


@dataclass(frozen=True, kw_only=True)
class AuditSettings:
    """Thresholds and choices of an audit: the keys of `[audit]`."""

    constituents: tuple[str, ...] | None = None
    """Constituents to fit at every gauge; by default what each record can tell apart."""
    nodal: NodalConvention = "exact"
    """Nodal convention."""
    confidence: float = 0.95
    """Level of intervals."""
    fail_on: Literal["note", "warning", "error"] = "error"
    """Mildest finding that makes the exit code 1."""
    minimum_days: float = 29.0
    """Record length below which coverage is a finding. [days]"""
    clock_error_min: float = 5.0
    """Clock offset from which a finding is an error. [minutes]"""
    step_error_m: float = 0.03
    """Datum step from which a finding is an error. [m]"""
    gain_error: float = 0.1
    """Relative error of heights from which a finding is an error."""


@dataclass(frozen=True, kw_only=True)
class Network:
    """A network of gauges along one coast."""

    path: Path
    """The network file."""
    name: str
    """Its name."""
    coast: CoastSpec
    """The coast."""
    gauges: tuple[GaugeEntry, ...]
    """The gauges, in the order of the file."""
    settings: AuditSettings = field(default_factory=AuditSettings)
    """Choices of an audit."""
