"""A record that is written reads back the same: CSV, Parquet, CF NetCDF."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pandas as pd
import pytest

from tidekit.errors import InputError, RecordError
from tidekit.records.ledger import RowLedger
from tidekit.records.reading import read_file, read_record
from tidekit.records.record import GaugeRecord
from tidekit.records.station import Station
from tidekit.records.writing import WRITERS, write_record

NEEDS = {".csv": (), ".parquet": ("pyarrow",), ".nc": ("xarray", "h5netcdf")}


def record() -> GaugeRecord:
    rng = np.random.default_rng(11)
    index = pd.date_range("2021-03-12 18:00", periods=50, freq="6min", tz="UTC")
    index = index[:-1].append(pd.DatetimeIndex(["2021-03-13 12:34:56.789012"], tz="UTC"))
    heights = pd.Series(rng.normal(1.5, 0.8, 50), index=index, name="height_m")
    flags = pd.Series(rng.choice([1, 2, 3, 4], 50).astype(np.int8), index=index, name="flag")
    heights.iloc[7], flags.iloc[7] = np.nan, 9
    return GaugeRecord(
        station=Station(id="mole", name="Invented Mole", latitude_deg=-44.25, vertical_reference="staff zero"),
        heights=heights,
        flags=flags,
        ledger=RowLedger(rows=50, kept=50),
    )


@pytest.mark.parametrize("suffix", WRITERS)
def test_round_trip_is_exact(tmp_path: Path, suffix: str) -> None:
    for module in NEEDS[suffix]:
        pytest.importorskip(module)
    path = tmp_path / f"mole{suffix}"
    written = record()
    write_record(written, path)
    again = read_record(path)
    assert list(again.heights.index) == list(written.heights.index)  # instants, whatever unit pandas keeps them in
    assert again.heights.equals(written.heights)
    assert again.flags.equals(written.flags)
    assert again.ledger.adds_up
    assert [file.name for file in tmp_path.iterdir()] == [path.name]


def test_csv_carries_what_is_known(tmp_path: Path) -> None:
    write_record(record(), tmp_path / "mole.csv")
    lines = (tmp_path / "mole.csv").read_text().splitlines()
    assert lines[:4] == [
        "# gauge: mole",
        "# name: Invented Mole",
        "# latitude: -44.25",
        "# vertical reference: staff zero",
    ]
    assert lines[4] == "time_utc,height_m,ioc_quality_flag"
    assert lines[5].startswith("2021-03-12T18:00:00.000000Z,")
    assert read_record(tmp_path / "mole.csv").station.vertical_reference == "staff zero"


def test_netcdf_follows_the_cf_conventions(tmp_path: Path) -> None:
    xarray = pytest.importorskip("xarray")
    pytest.importorskip("h5netcdf")
    write_record(record(), tmp_path / "mole.nc")
    with xarray.open_dataset(tmp_path / "mole.nc") as data:
        assert data.attrs["Conventions"] == "CF-1.11"
        assert data.attrs["featureType"] == "timeSeries"
        # Names of the CF standard name table.
        assert data["height"].attrs["standard_name"] == "water_surface_height_above_reference_datum"
        assert data["height"].attrs["units"] == "m"
        assert data["flag"].attrs["flag_meanings"].split()[0] == "good"
        assert data["station"].attrs["cf_role"] == "timeseries_id"
        assert float(data["latitude"]) == -44.25


def test_parquet_with_local_times_asks_for_their_zone(tmp_path: Path) -> None:
    pytest.importorskip("pyarrow")
    times = pd.date_range("2021-03-13", periods=30, freq="h")
    pd.DataFrame({"time": times, "level_m": np.linspace(1, 2, 30)}).to_parquet(tmp_path / "mole.parquet")
    with pytest.raises(RecordError, match=r"mole\.parquet: nothing in this export states its time zone"):
        read_record(tmp_path / "mole.parquet")
    found = read_record(tmp_path / "mole.parquet", time_zone="UTC+1")
    assert str(found.heights.index[0]) == "2021-03-12 23:00:00+00:00"


def test_workbook(tmp_path: Path) -> None:
    pytest.importorskip("openpyxl")
    times = pd.date_range("2021-03-13", periods=30, freq="h")
    frame = pd.DataFrame({"time (UTC)": times, "level (cm)": np.arange(30.0), "note": "x, y"})
    frame.loc[4, "level (cm)"] = np.nan
    frame.to_excel(tmp_path / "mole.xlsx", index=False)
    file = read_file(tmp_path / "mole.xlsx")
    assert file.evidence[0].startswith("workbook file")
    found = read_record(tmp_path / "mole.xlsx")
    assert list(found.heights.index) == list(times.tz_localize("UTC"))
    assert found.heights.iloc[5] == pytest.approx(0.05)
    assert found.flags.iloc[4] == 9


@pytest.mark.parametrize(
    ("name", "start"), [("mole.parquet", b"PAR1"), ("mole.xlsx", b"PK\x03\x04"), ("mole.nc", b"\x89HDF")]
)
def test_damaged_table_files_are_one_line(tmp_path: Path, name: str, start: bytes) -> None:
    (tmp_path / name).write_bytes(start + bytes(range(200)))
    with pytest.raises(RecordError, match=f"{name}: this .* file") as raised:
        read_record(tmp_path / name)
    assert "\n" not in str(raised.value)


def test_unknown_suffix(tmp_path: Path) -> None:
    with pytest.raises(InputError, match=r"mole\.doc: wanted a name that ends with \.csv, \.parquet, \.nc"):
        write_record(record(), tmp_path / "mole.doc")
    assert not list(tmp_path.iterdir())
