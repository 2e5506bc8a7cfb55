"""The command audit: what it prints, and where it stops before it starts."""

import contextlib
import io
import json
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import pytest

from tests.network.simulate import LAG_DEG, NAMES
from tidekit.cli.main import main
from tidekit.constituents.catalogue import speeds_deg_per_h

SPEED_M_PER_S = 24.26108
"""sqrt(9.81 * 60)."""


def write_network(folder: Path) -> Path:
    """Five gauges of an exact wave, given by their constants; the third is an hour late."""
    text = '[network]\nname = "five"\n[coast]\nside = "left"\ndepth_m = 60.0\n'
    speeds = speeds_deg_per_h(NAMES)
    for n, along in enumerate((0.0, 90.0, 200.0, 310.0, 400.0)):
        hours = along * 1e3 / SPEED_M_PER_S / 3600.0 + (1.0 if n == 2 else 0.0)
        rows = [
            f"{name},1.0,{(lag + speed * hours) % 360.0:.4f}"
            for name, lag, speed in zip(NAMES, LAG_DEG, speeds, strict=True)
        ]
        (folder / f"g{n}.csv").write_text("constituent,amplitude_m,phase_lag_deg\n" + "\n".join(rows) + "\n")
        text += (
            f'[[gauge]]\nid = "g{n}"\nconstants = "g{n}.csv"\nalong_coast_km = {along}\n'
            f"latitude = {-41.0 + along / 111.0}\nlongitude = 88.0\n"
        )
    (folder / "network.toml").write_text(text)
    return folder / "network.toml"


@pytest.fixture
def network(tmp_path: Path) -> Path:
    return write_network(tmp_path)


@dataclass(frozen=True)
class Run:
    code: int
    out: str
    err: str
    document: dict[str, Any]
    page: str


@pytest.fixture(scope="module")
def runs(tmp_path_factory: pytest.TempPathFactory) -> tuple[Run, Run]:
    """Two runs into one folder: the first asks for JSON, the second for words after the network took another name."""
    path = write_network(tmp_path_factory.mktemp("network"))
    first = run(path, "--json")
    path.write_text(path.read_text().replace('"five"', '"five again"'))
    return first, run(path)


def run(path: Path, *options: str) -> Run:
    out, err = io.StringIO(), io.StringIO()
    folder = path.parent / "out"
    with contextlib.redirect_stdout(out), contextlib.redirect_stderr(err):
        code = main(["audit", str(path), "--out", str(folder), *options])
    document = json.loads((folder / "audit.json").read_text())
    return Run(code, out.getvalue(), err.getvalue(), document, (folder / "report.html").read_text())


def test_json_is_the_document_and_nothing_else(runs: tuple[Run, Run]) -> None:
    first = runs[0]
    assert first.code == 1
    assert json.loads(first.out) == first.document
    assert "Not for navigation" in first.document["caution"]
    assert first.err == ""  # no progress where nobody watches


def test_it_prints_the_verdict_then_the_findings(runs: tuple[Run, Run]) -> None:
    lines = runs[1].out.splitlines()
    assert lines[0] == "five again: 5 gauges"
    assert lines[1].startswith("Wave: consistent: ")
    (found,) = [line.split() for line in lines if line.startswith("  error")]
    assert found[1:3] == ["g2", "time_zone"]
    assert abs(float(found[3]) - 1.0) < 3.0 * float(found[5])
    assert "Not for navigation" in lines[-1]
    assert runs[1].err == ""


def test_a_second_run_replaces_the_first(runs: tuple[Run, Run]) -> None:
    assert [one.document["network"] for one in runs] == ["five", "five again"]
    assert "<h1>five again</h1>" in runs[1].page
    assert runs[0].document["findings"] == runs[1].document["findings"]


def test_a_file_in_the_way_is_told_before_the_work(network: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (network.parent / "out").write_text("mine")
    (network.parent / "g0.csv").write_text("this would be the next complaint")
    assert main(["audit", str(network), "--out", str(network.parent / "out")]) == 2
    message = capsys.readouterr().err
    assert message.count("\n") == 1
    assert "wanted a folder for the files of the audit, found a file" in message
    assert (network.parent / "out").read_text() == "mine"


def test_a_wrong_constants_table_is_named_and_leaves_nothing(network: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (network.parent / "g3.csv").write_text("constituent,amplitude_m,phase_lag_deg\nM2,much,40\n")
    assert main(["audit", str(network), "--out", str(network.parent / "out")]) == 2
    message = capsys.readouterr().err
    assert message.count("\n") == 1
    assert "g3.csv:2" in message
    assert not (network.parent / "out").exists()


class Terminal(io.StringIO):
    def isatty(self) -> bool:
        return True


def test_a_terminal_sees_progress_and_is_left_clean(network: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    (network.parent / "g4.csv").write_text("no table\n")
    terminal = Terminal()
    monkeypatch.setattr("sys.stderr", terminal)
    assert main(["audit", str(network), "--out", str(network.parent / "out")]) == 2
    shown = terminal.getvalue()
    assert "gauges: 4 of 5, g3 done" in shown
    last = shown.split("\r\033[K")[-1]
    assert last.startswith("tidekit audit: ")
    assert "g4.csv" in last


def test_the_folder_must_be_named(network: Path, capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit, match="2"):
        main(["audit", str(network)])
    assert "--out" in capsys.readouterr().err
