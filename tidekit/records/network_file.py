"""Read a network file: TOML, every key known, every fault named with its line."""

from __future__ import annotations

import glob
import re
from dataclasses import fields
from pathlib import Path
from typing import Any, cast, get_args

from tidekit.constituents.catalogue import resolve_names
from tidekit.constituents.constants import NodalConvention
from tidekit.errors import AnalysisError, ConstituentError, RecordError
from tidekit.records.coast_line import coast_position
from tidekit.records.network import AuditSettings, CoastSpec, GaugeEntry, Network, Side
from tidekit.records.network_keys import KeyedTable, read_keys
from tidekit.records.station import Station
from tidekit.records.units import unit_named
from tidekit.records.zones import zone_named

_SAME_PLACE_KM = 0.01
_ON_THE_LINE_KM = 20.0
"""A drawn coast is coarse: a gauge nearer than this stands on it."""
_COAST_KEYS = ("side", "depth_m", "depth_along_coast", "depth_cross_shore", "line")
_GAUGE_KEYS = (
    "id name latitude longitude file constants layout column time_zone unit vertical_reference "
    "along_coast_km offshore_km open_coast"
)
_SETTINGS = tuple(field.name for field in fields(AuditSettings))
_TABLES = ("network", "coast", "audit", "gauge")
_LIMITS = {"confidence": (0.5, 0.999), "minimum_days": (1.0, 40000.0)}
"""Limits of settings; others are positive."""
_CHOICES = {"nodal": get_args(NodalConvention), "fail_on": ("note", "warning", "error")}


def read_network(path: str | Path) -> Network:
    """Read a network file.

    Parameters
    ----------
    path : path-like
        The TOML file; paths in it are relative to it or absolute.

    Returns
    -------
    Network
        Coast, gauges in the order of the file, settings. A gauge without `along_coast_km` takes it, and without
        `offshore_km` that too, from the coast's line where there is one.

    Raises
    ------
    NetworkFileError
        If the file is missing or not TOML, a key is unknown or impossible, a named file is missing, or two gauges
        share an id or a place; names file, line and key.
    """
    file = read_keys(Path(path))
    for name in file.tables:
        if name not in _TABLES:
            message = f"unknown table; wanted one of {', '.join(_TABLES)}"
            raise file.view(name, {}).fail("", message)
    about = file.table("network").only(("name",))
    coast_table = file.table("coast").only(_COAST_KEYS)
    settings_table = file.table("audit").only(_SETTINGS)
    entries = file.tables.get("gauge", [])
    if not isinstance(entries, list) or not entries:
        message = "no gauges; wanted at least one [[gauge]] table"
        raise file.view("gauge", {}).fail("", message)
    tables = [file.view(f"gauge {n}", entry).only(_GAUGE_KEYS.split()) for n, entry in enumerate(entries, 1)]
    coast = _coast(coast_table)
    gauges = tuple(_gauge(table, coast, coast_table) for table in tables)
    _refuse_twins(gauges, tables)
    name = about.text("name") or file.path.stem
    return Network(path=file.path, name=name, coast=coast, gauges=gauges, settings=_settings(settings_table))


def _coast(table: KeyedTable) -> CoastSpec:
    side = table.choice("side", get_args(Side), ": where the land lies looking along increasing along_coast_km")
    if side is None:
        message = 'is missing; wanted "left" or "right": where the land lies looking along increasing along_coast_km'
        raise table.fail("side", message)
    depths = [key for key in ("depth_m", "depth_along_coast", "depth_cross_shore") if key in table.values]
    if len(depths) > 1:
        message = f"given beside {depths[0]}; keep one of them"
        raise table.fail(depths[1], message)
    deep = "pairs [km, m] with a positive depth"
    degrees = "pairs [latitude, longitude] in degrees"
    return CoastSpec(
        side=cast(Side, side),
        depth_m=table.number("depth_m", 0.1, 12000.0, "m"),
        depth_along_coast=table.pairs("depth_along_coast", lambda _, m: m > 0, deep),
        depth_cross_shore=table.pairs("depth_cross_shore", lambda km, m: km >= 0 and m > 0, deep),
        line=table.pairs("line", lambda a, b: abs(a) <= 90 and -180 <= b <= 360, degrees, ordered=False),
    )


def _gauge(table: KeyedTable, coast: CoastSpec, coast_table: KeyedTable) -> GaugeEntry:
    gauge = table.text("id")
    if gauge is None or not re.fullmatch(r"[A-Za-z0-9_.-]+", gauge):
        message = f"is {'missing' if gauge is None else repr(gauge)}; wanted letters, digits, _ . and - only"
        raise table.fail("id", message)
    if ("file" in table.values) == ("constants" in table.values):
        message = "wanted either `file` (exports) or `constants` (a table), and one of the two"
        raise table.fail("id", message)
    _check_declared(table)
    latitude, longitude = _coordinates(table)
    along, offshore = _place(table, coast, coast_table)
    return GaugeEntry(
        station=Station(
            id=gauge,
            name=table.text("name") or "",
            latitude_deg=latitude,
            longitude_deg=longitude,
            vertical_reference=table.text("vertical_reference"),
            open_coast=table.truth("open_coast") is not False,
            along_coast_km=along,
            offshore_km=offshore,
        ),
        files=_files(table),
        constants_path=table.file("constants"),
        layout=table.file("layout"),
        column=table.text("column"),
        time_zone=table.text("time_zone"),
        unit=table.text("unit"),
    )


def _check_declared(table: KeyedTable) -> None:
    for key, check in (("time_zone", zone_named), ("unit", unit_named)):
        declared = table.text(key)
        try:
            if declared is not None:
                check(declared)
        except RecordError as error:
            raise table.fail(key, str(error)) from error


def _coordinates(table: KeyedTable) -> tuple[float | None, float | None]:
    return (
        table.number("latitude", -90.0, 90.0, "degrees, north positive"),
        table.number("longitude", -180.0, 360.0, "degrees, east positive"),
    )


def _place(table: KeyedTable, coast: CoastSpec, coast_table: KeyedTable) -> tuple[float | None, float | None]:
    """Position along the coast and offshore, as given or from the coast's line. [km]"""
    along = table.number("along_coast_km", -50000.0, 50000.0, "km")
    offshore = table.number("offshore_km", 0.0, 20000.0, "km")
    latitude, longitude = _coordinates(table)
    if along is None and coast.line and latitude is not None and longitude is not None:
        try:
            along, nearest = coast_position(coast.line, latitude, longitude)
        except AnalysisError as error:
            raise coast_table.fail("line", str(error)) from error
        if offshore is None:
            offshore = nearest if nearest > _ON_THE_LINE_KM else 0.0
    return along, offshore


def _files(table: KeyedTable) -> tuple[Path, ...]:
    value = table.values.get("file")
    if value is None:
        return ()
    patterns = value if isinstance(value, list) else [value]
    if not patterns or not all(isinstance(pattern, str) and pattern for pattern in patterns):
        message = f"is {value!r}; wanted a path, a list of paths, or a glob"
        raise table.fail("file", message)
    found: list[Path] = []
    for pattern in patterns:
        whole = str(table.path.parent / pattern)
        matches = [whole] if Path(whole).is_file() else sorted(glob.glob(whole))
        if not matches:
            message = f"no file {pattern!r} (looked in {table.path.parent}); check the path"
            raise table.fail("file", message)
        found += [Path(match) for match in matches if Path(match) not in found]
    return tuple(found)


def _refuse_twins(gauges: tuple[GaugeEntry, ...], tables: list[KeyedTable]) -> None:
    """Raise if two gauges share an id or a place."""
    for number, (gauge, table) in enumerate(zip(gauges, tables, strict=True)):
        for earlier in gauges[:number]:
            a, b = gauge.station, earlier.station
            if a.id == b.id:
                message = f"id {a.id!r} stands twice; ids are unique in a network"
                raise table.fail("id", message)
            if _same_place(a, b):
                message = f"{a.id!r} stands at the same place as {b.id!r}; mend the place or leave one out"
                raise table.fail("latitude" if a.latitude_deg is not None else "along_coast_km", message)


def _same_place(a: Station, b: Station) -> bool:
    """Whether two gauges stand at one place: by their coordinates where both give them, else along the coast."""
    coordinates = (a.latitude_deg, a.longitude_deg), (b.latitude_deg, b.longitude_deg)
    if None not in (*coordinates[0], *coordinates[1]):
        return coordinates[0] == coordinates[1]
    if a.along_coast_km is None or b.along_coast_km is None:
        return False
    across = abs((a.offshore_km or 0.0) - (b.offshore_km or 0.0))
    return abs(a.along_coast_km - b.along_coast_km) < _SAME_PLACE_KM and across < _SAME_PLACE_KM


def _settings(table: KeyedTable) -> AuditSettings:
    values: dict[str, Any] = {key: table.choice(key, allowed) for key, allowed in _CHOICES.items()}
    for key in _SETTINGS:
        if key not in (*_CHOICES, "constituents"):
            values[key] = table.number(key, *_LIMITS.get(key, (1e-6, 1e6)))
    if "constituents" in table.values:
        try:
            values["constituents"] = resolve_names([str(name) for name in table.items("constituents")])
        except ConstituentError as error:
            raise table.fail("constituents", str(error)) from error
    return AuditSettings(**{key: value for key, value in values.items() if value is not None})
