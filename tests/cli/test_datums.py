"""`tidekit datums` as its user sees it."""

import json
from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from numpy.testing import assert_allclose

from tidekit.cli import main as entry
from tidekit.constituents.constants_table import read_constants
from tidekit.datums.predicted import predicted_datums
from tidekit.prediction.heights import predict_heights

TABLE = """gauge,constituent,amplitude_m,amplitude_sd_m,phase_lag_deg,phase_lag_sd_deg,nodal,vertical_reference
Quill Bay,Z0,2.0,0.01,0.0,0.0,exact,staff zero
Quill Bay,M2,0.8,0.01,205.0,1.0,exact,staff zero
Quill Bay,S2,0.25,0.01,230.0,2.0,exact,staff zero
Quill Bay,K1,0.32,0.01,40.0,2.0,exact,staff zero
Quill Bay,O1,0.20,0.01,20.0,3.0,exact,staff zero
"""
NETWORK = """[network]
name = "Invented coast"

[coast]
side = "right"
depth_m = 50.0

[[gauge]]
id = "quill"
latitude = 10.0
longitude = 20.0
constants = "quill.csv"

[[gauge]]
id = "skerry"
latitude = 11.0
longitude = 20.0
file = "skerry.csv"
vertical_reference = "board zero"
"""
LEVELS = ("HAT", "MHHW", "MHW", "MSL", "MLW", "MLLW", "LAT")
START = pd.Timestamp("2013-03-01T00:00Z")
DAYS = 60
SHORT_RECORD_M = 0.08
"""Sixty days of a tide whose springs and nodal state differ from the mean of 19 years; K2 and P1 are not in it."""


@pytest.fixture(autouse=True)
def only_datums(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(entry, "COMMANDS", ("datums",))


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    """A table of constants, an export made from them, and a network of both."""
    (tmp_path / "quill.csv").write_text(TABLE, encoding="utf-8")
    (tmp_path / "network.toml").write_text(NETWORK, encoding="utf-8")
    hours = np.arange(24.0 * DAYS)
    since = (START - pd.Timestamp("2000-01-01T00:00Z")) / pd.Timedelta("1h")
    height = predict_heights(read_constants(tmp_path / "quill.csv"), since + hours)
    height = height + np.random.default_rng(2).normal(0.0, 0.01, len(hours))
    times = (START + pd.to_timedelta(hours, unit="h")).strftime("%Y-%m-%dT%H:%MZ")
    frame = pd.DataFrame({"time": times, "water_level_m": height.round(3)})
    frame.to_csv(tmp_path / "skerry.csv", index=False)
    return tmp_path


@pytest.mark.parametrize("source", ["quill.csv", "network.toml:quill"])
def test_a_table_of_constants(folder: Path, source: str, capsys: pytest.CaptureFixture[str]) -> None:
    out = folder / "datums.csv"
    options = ["--years", "2000-2002", "--json", "--out", str(out)]
    assert entry.main(["datums", str(folder / source), *options]) == 0
    document = json.loads(capsys.readouterr().out)
    assert document["caution"] == entry.CAUTION
    assert [table["gauge"] for table in document["tables"]] == ["quill"]
    expected = predicted_datums(read_constants(folder / "quill.csv"), years=(2000, 2002))
    frame = pd.read_csv(out).set_index("datum")
    assert list(frame.columns) == ["gauge", "height_m", "height_sd_m", "method"]
    assert_allclose(frame.loc[list(LEVELS), "height_m"], [expected.height(n) for n in LEVELS], atol=5e-5)
    assert document["tables"][0]["details"]["tide_type"] == "mixed, mainly semidiurnal"


@pytest.mark.parametrize("source", ["skerry.csv", "network.toml:skerry"])
def test_an_export_gives_both_tables(folder: Path, source: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert entry.main(["datums", str(folder / source), "--years", "2008-2026"]) == 0
    text = capsys.readouterr().out
    assert "skerry: datums observed" in text
    assert "skerry: datums predicted 2008-2026" in text
    assert ("metres above board zero" in text) == source.startswith("network")
    assert text.endswith(entry.CAUTION + "\n")
    rows = {}
    for line in text.splitlines():
        words = line.split()
        if words and words[0] in LEVELS:
            rows.setdefault(words[0], []).append(float(words[1]))
    assert len(rows["MHHW"]) == len(rows["MLLW"]) == 2
    truth = predicted_datums(read_constants(folder / "quill.csv"))
    for name in ("MHHW", "MHW", "MSL", "MLW", "MLLW"):
        assert_allclose(rows[name], truth.height(name), atol=SHORT_RECORD_M)


def test_the_observed_method_is_named_in_the_table(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    out = folder / "datums.csv"
    assert entry.main(["datums", str(folder / "skerry.csv"), "--years", "2000-2001", "--out", str(out)]) == 0
    capsys.readouterr()
    frame = pd.read_csv(out)
    methods = frame.loc[frame["datum"] == "MHW", "method"].str.split(":").str[0].tolist()
    assert methods == ["observed", "predicted 2000-2001"]


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (["absent.csv"], "absent.csv"),
        (["network.toml:nowhere"], "no gauge 'nowhere'"),
        (["network.toml"], "name one of its gauges"),
        (["quill.csv", "--years", "2001-1983"], "'2001-1983' is no span of years"),
        (["quill.csv", "--years", "19"], "'19' is no span of years"),
        (["short.csv"], "no whole tidal day in 11.0 h of record"),
    ],
)
def test_wrong_requests(folder: Path, arguments: list[str], words: str, capsys: pytest.CaptureFixture[str]) -> None:
    lines = (folder / "skerry.csv").read_text(encoding="utf-8").splitlines()
    (folder / "short.csv").write_text("\n".join(lines[:13]) + "\n", encoding="utf-8")
    out = folder / "never.csv"
    assert entry.main(["datums", str(folder / arguments[0]), *arguments[1:], "--out", str(out)]) == 2
    captured = capsys.readouterr()
    assert words in captured.err
    assert captured.err.count("\n") == 1
    assert captured.out == ""
    assert not out.exists()
