"""`tidekit heights` as its user sees it."""

import json
from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from numpy.testing import assert_allclose

from tidekit.cli import main as entry
from tidekit.constituents.constants_table import read_constants
from tidekit.prediction.heights import predict_heights

TABLE = """gauge,constituent,amplitude_m,phase_lag_deg,nodal,vertical_reference
Quill Bay,Z0,2.0,0.0,exact,chart datum
Quill Bay,M2,0.8,205.0,exact,chart datum
Quill Bay,S2,0.25,230.0,exact,chart datum
Quill Bay,K1,0.32,40.0,exact,chart datum
"""
ROUNDING_M = 5e-5
START_H = 24.0 * 4839  # 2013-04-01 00:00 UTC


@pytest.fixture(autouse=True)
def only_heights(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(entry, "COMMANDS", ("heights",))


@pytest.fixture
def table(tmp_path: Path) -> Path:
    path = tmp_path / "quill.csv"
    path.write_text(TABLE, encoding="utf-8")
    return path


def test_heights_on_standard_output(table: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert entry.main(["heights", str(table), "--start", "2013-04-01", "--end", "2013-04-02"]) == 0
    lines = capsys.readouterr().out.splitlines()
    assert lines[0].endswith("metres above chart datum, times in UTC, nodal convention exact")
    assert lines[-1] == entry.CAUTION
    assert len(lines) == 24 + 3
    assert lines[2].split()[0] == "2013-04-01T00:00:00+00:00"


def test_json_is_one_document_with_the_caution(table: Path, capsys: pytest.CaptureFixture[str]) -> None:
    options = ["--start", "2013-04-01T00:00", "--end", "2013-04-01T01:00", "--step", "6min", "--json"]
    assert entry.main(["heights", str(table), *options]) == 0
    document = json.loads(capsys.readouterr().out)
    assert document["caution"] == entry.CAUTION
    assert document["vertical_reference"] == "chart datum"
    expected = predict_heights(read_constants(table), START_H + 0.1 * np.arange(10))
    assert_allclose([row["height_m"] for row in document["heights"]], expected, atol=ROUNDING_M)


def test_csv_in_local_time_over_a_clock_change(table: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Chatham Islands put their clocks back at 03:45 on 7 April 2013 (IANA database): a day of 25 hours."""
    out = table.with_name("heights.csv")
    options = ["--start", "2013-04-07", "--end", "2013-04-08", "--time-zone", "Pacific/Chatham", "--out", str(out)]
    assert entry.main(["heights", str(table), *options]) == 0
    assert capsys.readouterr().out == f"25 heights in {out}\n{entry.CAUTION}\n"
    frame = pd.read_csv(out)
    assert frame["time"].tolist()[2:5] == [
        "2013-04-07T02:00:00+13:45",
        "2013-04-07T03:00:00+13:45",
        "2013-04-07T03:00:00+12:45",
    ]
    t_h = START_H + 6 * 24.0 - 13.75 + np.arange(25.0)
    assert_allclose(frame["height_m"], predict_heights(read_constants(table), t_h), atol=ROUNDING_M)


@pytest.mark.parametrize(
    ("options", "words"),
    [
        (["--start", "2013-04-07T03:00", "--end", "2013-05-01", "--time-zone", "Pacific/Chatham"], "happens twice"),
        (["--start", "2013-09-29T03:00", "--end", "2013-10-01", "--time-zone", "Pacific/Chatham"], "does not exist"),
        (["--start", "2013-02-30", "--end", "2013-05-01"], "'2013-02-30' is no time"),
        (["--start", "01/02/2013", "--end", "2013-05-01"], "'01/02/2013' is no time"),
        (["--start", "2013-05-01", "--end", "2013-05-01"], "2013-05-01 is not after --start"),
        (["--start", "2013-05-01", "--end", "2013-05-02", "--time-zone", "Moon/Tycho"], "is not one zone"),
        (["--start", "2013-05-01", "--end", "2013-05-02", "--step", "0min"], "'0min' is no step"),
        (["--start", "2013-05-01", "--end", "2013-05-02", "--step", "6"], "'6' is no step"),
        (["--start", "1913-05-01", "--end", "2013-05-02", "--step", "1s"], "ask for 20000000 at most"),
        (["--start", "2013-05-01", "--end", "2013-05-02", "--gauge", "Nowhere"], "no gauge 'Nowhere'"),
    ],
)
def test_wrong_requests(table: Path, options: list[str], words: str, capsys: pytest.CaptureFixture[str]) -> None:
    out = table.with_name("never.csv")
    assert entry.main(["heights", str(table), *options, "--out", str(out)]) == 2
    captured = capsys.readouterr()
    assert words in captured.err
    assert captured.err.count("\n") == 1
    assert captured.out == ""
    assert not out.exists()


def test_a_fixed_offset_is_a_time_zone(table: Path, capsys: pytest.CaptureFixture[str]) -> None:
    options = ["--start", "2013-04-07", "--end", "2013-04-08", "--time-zone", "UTC-8"]
    assert entry.main(["heights", str(table), *options]) == 0
    assert capsys.readouterr().out.splitlines()[2].startswith("2013-04-07T00:00:00-08:00")


def test_an_offset_settles_what_happens_twice(table: Path, capsys: pytest.CaptureFixture[str]) -> None:
    options = ["--end", "2013-04-08", "--time-zone", "Pacific/Chatham", "--start", "2013-04-07T03:00+12:45"]
    assert entry.main(["heights", str(table), *options]) == 0
    assert capsys.readouterr().out.splitlines()[2].startswith("2013-04-07T03:00:00+12:45")


def test_missing_table(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    missing = tmp_path / "none.csv"
    assert entry.main(["heights", str(missing), "--start", "2013-05-01", "--end", "2013-05-02"]) == 2
    assert str(missing) in capsys.readouterr().err
