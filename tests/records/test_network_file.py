"""Network files: what they may say, and one line for everything else, with file, key and line."""

from __future__ import annotations

from pathlib import Path

import pytest

from tidekit.errors import NetworkFileError, RecordError
from tidekit.records.network import AuditSettings
from tidekit.records.network_file import read_network
from tidekit.records.source import network_gauge, open_source

WHOLE = """[network]
name = "Invented sound"
[coast]
side = "left"
depth_m = 60.0
[[gauge]]
id = "ash"
name = "Ash Quay"
latitude = -44.0
longitude = 88.0
along_coast_km = 0.0
file = "ash.csv"
[[gauge]]
id = "birch"
latitude = -43.0
longitude = 88.0
along_coast_km = 70.0
offshore_km = 12.0
open_coast = false
file = ["birch_*.csv", "birch.csv"]
column = "level"
time_zone = "UTC+6"
unit = "cm"
[audit]
confidence = 0.9
constituents = ["M2", "NU2"]
"""


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.chdir(tmp_path)
    rows = "\n".join(f"2021-03-04 {hour:02d}:00,{hour / 10:.1f},20" for hour in range(24))
    for name in ("ash.csv", "birch.csv", "birch_2.csv", "birch_1.csv"):
        Path(name).write_text(f"# times: UTC\ntime,level (m),temperature\n{rows}\n")
    return tmp_path


def read(text: str) -> object:
    Path("net.toml").write_text(text)
    return read_network("net.toml")


def test_whole_file(folder: Path) -> None:
    Path("net.toml").write_text(WHOLE)
    network = read_network(folder / "net.toml")
    ash, birch = network.gauges
    assert (network.name, network.coast.side, network.coast.depth_m) == ("Invented sound", "left", 60.0)
    assert (ash.station.label, ash.station.open_coast, ash.station.offshore_km) == ("Ash Quay", True, None)
    assert (birch.station.label, birch.station.open_coast, birch.station.offshore_km) == ("birch", False, 12.0)
    assert [path.name for path in birch.files] == ["birch_1.csv", "birch_2.csv", "birch.csv"]
    assert (birch.column, birch.time_zone, birch.unit) == ("level", "UTC+6", "cm")
    assert network.settings == AuditSettings(confidence=0.9, constituents=("M2", "nu2"))


def test_place_from_the_coast_line(folder: Path) -> None:
    line = WHOLE.replace("depth_m = 60.0", "line = [[-44.0, 88.0], [-42.0, 88.0]]").replace(
        "along_coast_km = 70.0\n", ""
    )
    Path("net.toml").write_text(line)
    birch = read_network("net.toml").gauges[1].station
    # One degree of latitude there: 111.1 km by the meridional radius of WGS 84.
    assert birch.along_coast_km == pytest.approx(111.1, abs=0.05)
    assert birch.offshore_km == 12.0


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        ('name = "Invented sound"', 'nam = "x"', r"net\.toml:2 \[network\.nam\]: unknown key; wanted one of name"),
        ("[audit]", "[audits]", r"net\.toml:24 \[audits\]: unknown table"),
        ("confidence", "confidance", r"net\.toml:25 \[audit\.confidance\]: unknown key"),
        ("along_coast_km = 70", "along_km = 70", r"net\.toml:17 \[gauge 2\.along_km\]: unknown key"),
        ('side = "left"', 'side = "north"', r"net\.toml:4 \[coast\.side\]: is 'north'; wanted \"left\" or \"right\""),
        ('side = "left"\n', "", r"net\.toml:3 \[coast\.side\]: is missing"),
        ("depth_m = 60.0", "depth_m = -3", r"net\.toml:5 \[coast\.depth_m\]: is -3; wanted 0\.1 to 12000 m"),
        ("depth_m = 60.0", "depth_m = true", r"net\.toml:5 \[coast\.depth_m\]: is True; wanted a number"),
        ("depth_m = 60.0", "depth_m = 6\ndepth_along_coast = [[0, 5], [9, 6]]", r"depth_along_coast\]: given beside"),
        ("depth_m = 60.0", "depth_cross_shore = [[9, 5], [0, 6]]", r"\[coast\.depth_cross_shore\]: distances do not"),
        ("latitude = -44.0", "latitude = 444", r"net\.toml:9 \[gauge 1\.latitude\]: is 444; wanted -90 to 90"),
        ("latitude = -44.0", "latitude = nan", r"net\.toml:9 \[gauge 1\.latitude\]: is nan"),
        ('"ash.csv"', '"oak.csv"', r"net\.toml:12 \[gauge 1\.file\]: no file 'oak\.csv'"),
        ('"birch_*.csv"', '"oak_*.csv"', r"net\.toml:20 \[gauge 2\.file\]: no file 'oak_\*\.csv'"),
        ('file = "ash.csv"', 'constants = "ash_constants.csv"', r"\[gauge 1\.constants\]: no file"),
        ('file = "ash.csv"', 'file = "ash.csv"\nlayout = "ash.toml"', r"net\.toml:13 \[gauge 1\.layout\]: no file"),
        ('file = "ash.csv"\n', "", r"net\.toml:7 \[gauge 1\.id\]: wanted either `file`"),
        ('id = "birch"', 'id = "ash"', r"net\.toml:14 \[gauge 2\.id\]: id 'ash' stands twice"),
        ("latitude = -43.0", "latitude = -44.0", r"\[gauge 2\.\w+\]: 'birch' stands at the same place as 'ash'"),
        ('id = "ash"', 'id = "a b"', r"net\.toml:7 \[gauge 1\.id\]: is 'a b'"),
        ('"UTC+6"', '"CST"', r"net\.toml:22 \[gauge 2\.time_zone\]: time zone 'CST' is not one zone"),
        ('"cm"', '"ell"', r"net\.toml:23 \[gauge 2\.unit\]: unknown unit 'ell'"),
        ("open_coast = false", 'open_coast = "no"', r"net\.toml:19 \[gauge 2\.open_coast\]: is 'no'; wanted true or"),
        ("confidence = 0.9", "confidence = 95", r"net\.toml:25 \[audit\.confidence\]: is 95; wanted 0\.5 to 0\.999$"),
        ('"NU2"', '"QQ9"', r"net\.toml:26 \[audit\.constituents\]: unknown constituent 'QQ9'"),
        ("[coast]", "[coast", r"net\.toml:3: not TOML"),
    ],
)
def test_faults_name_file_line_and_key(folder: Path, old: str, new: str, message: str) -> None:
    assert old in WHOLE
    with pytest.raises(NetworkFileError, match=message):
        read(WHOLE.replace(old, new, 1))


def test_missing_network_file(folder: Path) -> None:
    with pytest.raises(NetworkFileError, match=r"absent\.toml: cannot read this network file"):
        read_network("absent.toml")


def test_no_gauges(folder: Path) -> None:
    with pytest.raises(NetworkFileError, match=r"no gauges; wanted at least one \[\[gauge\]\]"):
        read(WHOLE[: WHOLE.index("[[gauge]]")])


def test_source_is_an_export_or_a_gauge_of_a_network(folder: Path) -> None:
    Path("net.toml").write_text(WHOLE)
    export, gauge = open_source("ash.csv"), open_source("net.toml:ash")
    assert export.heights.equals(gauge.heights)
    assert gauge.station.name == "Ash Quay"
    # The network declares centimetres and UTC+6 for birch, in three files that hold the same rows.
    birch = open_source("net.toml:birch", column="2")
    assert birch.heights.iloc[-1] == pytest.approx(0.023)
    assert str(birch.heights.index[0]) == "2021-03-03 18:00:00+00:00"
    assert birch.ledger.rows == 72
    assert birch.ledger.reasons == {"same row again": 48}


def test_declarations_overrule_the_network(folder: Path) -> None:
    Path("net.toml").write_text(WHOLE)
    birch = open_source("net.toml:birch", column="2", unit="m", time_zone="UTC")
    assert birch.heights.iloc[-1] == pytest.approx(2.3)
    assert str(birch.heights.index[0]) == "2021-03-04 00:00:00+00:00"


def test_unknown_gauge_and_network_without_a_gauge(folder: Path) -> None:
    Path("net.toml").write_text(WHOLE)
    with pytest.raises(NetworkFileError, match=r"no gauge 'oak'; there are ash, birch"):
        open_source("net.toml:oak")
    with pytest.raises(NetworkFileError, match="this is a network file; name one of its gauges"):
        open_source("net.toml")
    assert network_gauge("ash.csv") is None
    with pytest.raises(RecordError, match=r"oak\.csv: cannot read this export"):
        open_source("oak.csv")
