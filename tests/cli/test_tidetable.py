"""`tidekit tidetable` as its user sees it."""

import json
from pathlib import Path

import pandas as pd
import pytest

from tidekit.cli import main as entry

TABLE = """gauge,constituent,amplitude_m,phase_lag_deg,nodal,vertical_reference
Quill Bay,Z0,2.0,0.0,exact,chart datum
Quill Bay,M2,0.8,205.0,exact,chart datum
Quill Bay,S2,0.25,230.0,exact,chart datum
Quill Bay,K1,0.32,40.0,exact,chart datum
"""
WEEK = ["--start", "2013-04-01", "--end", "2013-04-08"]


@pytest.fixture(autouse=True)
def only_tidetable(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(entry, "COMMANDS", ("tidetable",))


@pytest.fixture
def table(tmp_path: Path) -> Path:
    path = tmp_path / "quill.csv"
    path.write_text(TABLE, encoding="utf-8")
    return path


def test_table_on_standard_output(table: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert entry.main(["tidetable", str(table), *WEEK, "--time-zone", "Pacific/Chatham"]) == 0
    lines = capsys.readouterr().out.splitlines()
    assert "metres above chart datum, times in Pacific/Chatham" in lines[0]
    assert lines[-1] == entry.CAUTION
    rows = [line.split() for line in lines[2:-2]]
    assert {row[-1] for row in rows} == {"HH", "H", "L", "LL"}
    assert rows[0][0] == "2013-04-01"
    assert {row[1][5:] for row in rows} == {"+13:45", "+12:45"}


def test_json_and_csv_agree(table: Path, capsys: pytest.CaptureFixture[str]) -> None:
    out = table.with_name("waters.csv")
    assert entry.main(["tidetable", str(table), *WEEK, "--json", "--out", str(out)]) == 0
    document = json.loads(capsys.readouterr().out)
    assert document["caution"] == entry.CAUTION
    frame = pd.read_csv(out)
    assert list(frame.columns) == ["time", "height_m", "kind"]
    assert document["waters"] == frame.to_dict(orient="records")
    assert 26 <= len(frame) <= 28
    # Highs and lows by turns.
    high = frame["kind"].isin(["HH", "H"]).to_numpy()
    assert (high[1:] != high[:-1]).all()


def test_wrong_request_leaves_nothing(table: Path, capsys: pytest.CaptureFixture[str]) -> None:
    out = table.with_name("never.csv")
    assert entry.main(["tidetable", str(table), "--start", "soon", "--end", "2013-04-08", "--out", str(out)]) == 2
    assert (
        capsys.readouterr().err
        == "tidekit tidetable: [--start]: 'soon' is no time; write 2031-04-05 or 2031-04-05T13:20\n"
    )
    assert not out.exists()
