"""Read a network file: TOML, every key known, every fault named with its line."""

from __future__ import annotations

import glob
import re
import tomllib
from collections.abc import Callable, Mapping
from dataclasses import fields
from itertools import pairwise
from pathlib import Path
from typing import Any, cast, get_args

from tidekit.constituents.catalogue import resolve_names
from tidekit.constituents.constants import NodalConvention
from tidekit.errors import AnalysisError, ConstituentError, NetworkFileError, RecordError
from tidekit.records.coast_line import coast_position
from tidekit.records.network import AuditSettings, CoastSpec, GaugeEntry, Network, Side
from tidekit.records.station import Station
from tidekit.records.units import unit_named
from tidekit.records.zones import zone_named

_SAME_PLACE_KM = 0.01
_GAUGE_KEYS = [
    "id",
    "name",
    "latitude",
    "longitude",
    "file",
    "constants",
    "layout",
    "column",
    "time_zone",
    "unit",
    "vertical_reference",
    "along_coast_km",
    "offshore_km",
    "open_coast",
]
_COAST_KEYS = ["side", "depth_m", "depth_along_coast", "depth_cross_shore", "line"]
_TABLES = {"network": ["name"], "coast": _COAST_KEYS, "audit": [field.name for field in fields(AuditSettings)]}


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
    return _Reader(Path(path)).read()


class _Reader:
    """One network file being read: it knows the line of each key, for errors."""

    def __init__(self, path: Path) -> None:
        self.path = path
        try:
            text = path.read_text(encoding="utf-8")
            self.table: dict[str, Any] = tomllib.loads(text)
        except (OSError, UnicodeDecodeError) as error:
            message = (
                f"cannot read this network file ({getattr(error, 'strerror', None) or 'not UTF-8'}); check the path"
            )
            raise NetworkFileError(message, path=path) from error
        except tomllib.TOMLDecodeError as error:
            found = re.search(r"line (\d+)", str(error))
            message = f"not TOML: {error}"
            raise NetworkFileError(message, path=path, line=int(found[1]) if found else None) from error
        self.lines = _key_lines(text)

    def fail(self, where: str, key: str, message: str) -> NetworkFileError:
        """Error at a key of a table such as ``coast`` or ``gauge 2``."""
        line = self.lines.get((where, key)) or self.lines.get((where, ""))
        return NetworkFileError(message, path=self.path, line=line, key=f"{where}.{key}" if key else where)

    def read(self) -> Network:
        """Check all tables and build the network."""
        for name in self.table:
            if name not in (*_TABLES, "gauge"):
                message = f"unknown table; wanted one of {', '.join([*_TABLES, 'gauge'])}"
                raise self.fail(name, "", message)
        tables = {name: self._known(name, self.table.get(name, {}), keys) for name, keys in _TABLES.items()}
        entries = self.table.get("gauge", [])
        if not isinstance(entries, list) or not entries:
            message = "no gauges; wanted at least one [[gauge]] table"
            raise NetworkFileError(message, path=self.path, key="gauge")
        coast = self._coast(tables["coast"])
        gauges = tuple(self._gauge(f"gauge {n}", entry, coast) for n, entry in enumerate(entries, 1))
        self._distinct(gauges)
        name = self._typed("network", tables["network"], "name", str) or self.path.stem
        return Network(path=self.path, name=name, coast=coast, gauges=gauges, settings=self._settings(tables["audit"]))

    def _known(self, where: str, table: object, keys: list[str]) -> Mapping[str, Any]:
        if not isinstance(table, dict):
            message = "is no table; write it as [table] or [[gauge]]"
            raise self.fail(where, "", message)
        for key in table:
            if key not in keys:
                message = f"unknown key; wanted one of {', '.join(keys)}"
                raise self.fail(where, key, message)
        return table

    def _typed(self, where: str, table: Mapping[str, Any], key: str, kind: type) -> Any:
        value = table.get(key)
        if value is None:
            return None
        sound = (
            isinstance(value, (int, float)) and not isinstance(value, bool)
            if kind is float
            else isinstance(value, kind)
        )
        if not sound or (kind is str and not value.strip()):
            word = {str: "a text", float: "a number", bool: "true or false", list: "a list"}[kind]
            message = f"is {value!r}; wanted {word}"
            raise self.fail(where, key, message)
        return float(value) if kind is float else value

    def _number(
        self, where: str, table: Mapping[str, Any], key: str, low: float, high: float, unit: str
    ) -> float | None:
        value = self._typed(where, table, key, float)
        if value is not None and not low <= value <= high:
            message = f"is {value:g}; wanted {low:g} to {high:g} {unit}".rstrip()
            raise self.fail(where, key, message)
        return cast(float | None, value)

    def _pairs(self, table: Mapping[str, Any], key: str, check: Callable[[float, float], bool], wanted: str) -> Any:
        pairs = self._typed("coast", table, key, list) or []
        for pair in pairs:
            numbers = isinstance(pair, list) and len(pair) == 2 and all(type(v) in (int, float) for v in pair)
            if not numbers or not check(float(pair[0]), float(pair[1])):
                message = f"holds {pair!r}; wanted {wanted}"
                raise self.fail("coast", key, message)
        values = tuple((float(a), float(b)) for a, b in pairs)
        if len(values) == 1:
            message = "has one entry; wanted two or more"
            raise self.fail("coast", key, message)
        if key != "line" and any(b[0] <= a[0] for a, b in pairwise(values)):
            message = "distances do not increase; put them in order"
            raise self.fail("coast", key, message)
        return values

    def _coast(self, table: Mapping[str, Any]) -> CoastSpec:
        side = self._typed("coast", table, "side", str)
        if side not in get_args(Side):
            message = (
                f'{_found(side)}; wanted "left" or "right": where the land lies looking along increasing along_coast_km'
            )
            raise self.fail("coast", "side", message)
        depths = [key for key in ("depth_m", "depth_along_coast", "depth_cross_shore") if key in table]
        if len(depths) > 1:
            message = f"given beside {depths[0]}; keep one of them"
            raise self.fail("coast", depths[1], message)
        deep = "pairs [km, m] with a positive depth"
        return CoastSpec(
            side=side,
            depth_m=self._number("coast", table, "depth_m", 0.1, 12000.0, "m"),
            depth_along_coast=self._pairs(table, "depth_along_coast", lambda _, m: m > 0, deep),
            depth_cross_shore=self._pairs(table, "depth_cross_shore", lambda km, m: km >= 0 and m > 0, deep),
            line=self._pairs(
                table, "line", lambda a, b: abs(a) <= 90 and -180 <= b <= 360, "pairs [latitude, longitude] in degrees"
            ),
        )

    def _gauge(self, where: str, entry: object, coast: CoastSpec) -> GaugeEntry:
        table = self._known(where, entry, _GAUGE_KEYS)
        text = {key: self._typed(where, table, key, str) for key in _GAUGE_KEYS if key not in _NOT_TEXT}
        if text["id"] is None or not re.fullmatch(r"[A-Za-z0-9_.-]+", text["id"]):
            message = f"{_found(text['id'])}; wanted letters, digits, _ . and - only"
            raise self.fail(where, "id", message)
        for key, check in (("time_zone", zone_named), ("unit", unit_named)):
            try:
                if text[key] is not None:
                    check(text[key])
            except RecordError as error:
                raise self.fail(where, key, str(error)) from error
        if ("file" in table) == ("constants" in table):
            message = "wanted either `file` (exports) or `constants` (a table), and one of the two"
            raise self.fail(where, "id", message)
        open_coast = self._typed(where, table, "open_coast", bool)
        return GaugeEntry(
            station=Station(
                id=text["id"],
                name=text["name"] or "",
                latitude_deg=self._number(where, table, "latitude", -90.0, 90.0, "degrees, north positive"),
                longitude_deg=self._number(where, table, "longitude", -180.0, 360.0, "degrees, east positive"),
                vertical_reference=text["vertical_reference"],
                open_coast=True if open_coast is None else open_coast,
                **self._place(where, table, coast),
            ),
            files=self._files(where, table),
            constants_path=self._file(where, "constants", text["constants"]),
            layout=self._file(where, "layout", text["layout"]),
            column=text["column"],
            time_zone=text["time_zone"],
            unit=text["unit"],
        )

    def _place(self, where: str, table: Mapping[str, Any], coast: CoastSpec) -> dict[str, float | None]:
        along = self._number(where, table, "along_coast_km", -50000.0, 50000.0, "km")
        offshore = self._number(where, table, "offshore_km", 0.0, 20000.0, "km")
        if along is None and coast.line and {"latitude", "longitude"} <= set(table):
            try:
                along, nearest = coast_position(coast.line, float(table["latitude"]), float(table["longitude"]))
            except AnalysisError as error:
                raise self.fail("coast", "line", str(error)) from error
            # A drawn coast is coarse: a gauge within its own accuracy of it stands on it.
            offshore = offshore if offshore is not None else (nearest if nearest > 20.0 else 0.0)
        return {"along_coast_km": along, "offshore_km": offshore}

    def _files(self, where: str, table: Mapping[str, Any]) -> tuple[Path, ...]:
        value = table.get("file")
        if value is None:
            return ()
        patterns = value if isinstance(value, list) else [value]
        if not patterns or not all(isinstance(pattern, str) and pattern for pattern in patterns):
            message = f"is {value!r}; wanted a path, a list of paths, or a glob"
            raise self.fail(where, "file", message)
        found: list[Path] = []
        for pattern in patterns:
            whole = str(self.path.parent / pattern)
            matches = [whole] if Path(whole).is_file() else sorted(glob.glob(whole))
            if not matches:
                message = f"no file {pattern!r} (looked in {self.path.parent}); check the path"
                raise self.fail(where, "file", message)
            found += [Path(match) for match in matches if Path(match) not in found]
        return tuple(found)

    def _file(self, where: str, key: str, name: str | None) -> Path | None:
        if name is None:
            return None
        path = self.path.parent / name
        if not path.is_file():
            message = f"no file {name!r} (looked in {self.path.parent}); check the path"
            raise self.fail(where, key, message)
        return path

    def _distinct(self, gauges: tuple[GaugeEntry, ...]) -> None:
        for number, gauge in enumerate(gauges, 1):
            for earlier in gauges[: number - 1]:
                a, b = gauge.station, earlier.station
                if a.id == b.id:
                    message = f"id {a.id!r} stands twice; ids are unique in a network"
                    raise self.fail(f"gauge {number}", "id", message)
                if _same_place(a, b):
                    message = f"{a.id!r} stands at the same place as {b.id!r}; mend the place or leave one out"
                    key = "latitude" if a.latitude_deg is not None else "along_coast_km"
                    raise self.fail(f"gauge {number}", key, message)

    def _settings(self, table: Mapping[str, Any]) -> AuditSettings:
        choices = {"nodal": get_args(NodalConvention), "fail_on": ("note", "warning", "error")}
        for key, allowed in choices.items():
            if key in table and table[key] not in allowed:
                message = f"is {table[key]!r}; wanted one of {', '.join(allowed)}"
                raise self.fail("audit", key, message)
        values: dict[str, Any] = {key: table[key] for key in choices if key in table}
        limits = {"confidence": (0.5, 0.999), "minimum_days": (1.0, 40000.0)}
        for field in fields(AuditSettings):
            if field.name in table and field.name not in (*choices, "constituents"):
                low, high = limits.get(field.name, (1e-6, 1e6))
                values[field.name] = self._number("audit", table, field.name, low, high, "")
        if "constituents" in table:
            names = self._typed("audit", table, "constituents", list)
            try:
                values["constituents"] = resolve_names([str(name) for name in names])
            except ConstituentError as error:
                raise self.fail("audit", "constituents", str(error)) from error
        return AuditSettings(**values)


_NOT_TEXT = ("file", "latitude", "longitude", "along_coast_km", "offshore_km", "open_coast")


def _found(value: object) -> str:
    return "is missing" if value is None else f"is {value!r}"


def _same_place(a: Station, b: Station) -> bool:
    """Whether two gauges stand at one place: by their coordinates where both give them, else along the coast."""
    coordinates = (a.latitude_deg, a.longitude_deg), (b.latitude_deg, b.longitude_deg)
    if None not in (*coordinates[0], *coordinates[1]):
        return coordinates[0] == coordinates[1]
    if a.along_coast_km is None or b.along_coast_km is None:
        return False
    across = abs((a.offshore_km or 0.0) - (b.offshore_km or 0.0))
    return abs(a.along_coast_km - b.along_coast_km) < _SAME_PLACE_KM and across < _SAME_PLACE_KM


def _key_lines(text: str) -> dict[tuple[str, str], int]:
    """Line of each key, by table (the n-th [[gauge]] is ``gauge n``) and key; of each table itself under key ''."""
    lines: dict[tuple[str, str], int] = {}
    where, count = "", 0
    for number, line in enumerate(text.splitlines(), 1):
        table = re.match(r"\s*\[{1,2}\s*([A-Za-z0-9_-]+)\s*\]{1,2}", line)
        key = re.match(r"\s*([A-Za-z0-9_-]+)\s*=", line)
        if table and "=" not in line.split("#")[0]:
            count += table[1] == "gauge"
            where = f"gauge {count}" if table[1] == "gauge" else table[1]
            lines.setdefault((where, ""), number)
        elif key:
            lines.setdefault((where, key[1]), number)
            if not where:  # a key before any table: TOML's top level
                lines.setdefault((key[1], ""), number)
    return lines
