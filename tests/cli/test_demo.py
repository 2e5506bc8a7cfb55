"""The command demo: what it writes and says."""

import json
from pathlib import Path

import pytest

from tidekit.cli.main import main
from tidekit.records.network_file import read_network


def test_it_writes_a_network_that_reads(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    folder = tmp_path / "coast"
    assert main(["demo", str(folder)]) == 0
    shown = capsys.readouterr().out
    assert f"tidekit audit {folder / 'network.toml'} --out {folder}_audit" in shown
    assert len(read_network(folder / "network.toml").gauges) == 10
    assert "invented" in (folder / "README.md").read_text()


def test_json_lists_the_files(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["demo", str(tmp_path / "coast"), "--seed", "5", "--json"]) == 0
    files = [Path(name) for name in json.loads(capsys.readouterr().out)["files"]]
    assert files[0].name == "network.toml"
    assert all(path.is_file() for path in files)
    assert {path for path in (tmp_path / "coast").rglob("*") if path.is_file()} == set(files)
    assert "seed = 5" in (tmp_path / "coast" / "truth.toml").read_text()


def test_a_place_that_cannot_be_written_is_one_line(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (tmp_path / "file").write_text("x")
    assert main(["demo", str(tmp_path / "file" / "coast")]) == 2
    message = capsys.readouterr().err
    assert message.count("\n") == 1
    assert "cannot write here" in message
