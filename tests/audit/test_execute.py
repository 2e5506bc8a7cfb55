"""Networks of one gauge, of short records, of constants; wrong input leaves nothing."""

import json
import shutil
from pathlib import Path

import numpy as np
import pytest

from tidekit.audit.execute import run_audit
from tidekit.cli.main import main
from tidekit.records.network_file import read_network

SAMPLES = Path(__file__).parents[2] / "sample_series"
HEAD = '[network]\nname = "n"\n[coast]\nside = "left"\ndepth_m = 60.0\n'


def gauge_table(gauge: str, source: str, along: float = 0.0) -> str:
    place = f"latitude = {-41.0 + along / 111.0}\nlongitude = 88.0\nalong_coast_km = {along}"
    return f'[[gauge]]\nid = "{gauge}"\n{source}\n{place}\n'


def run(tmp_path: Path, text: str, *options: str) -> int:
    path = tmp_path / "network.toml"
    path.write_text(text)
    return main(["audit", str(path), "--out", str(tmp_path / "out"), *options])


def short_export(path: Path, hours: int) -> None:
    times = np.datetime64("2021-01-01T00", "m") + np.arange(hours) * np.timedelta64(60, "m")
    rows = [f"{str(t).replace('T', ' ')},{np.cos(0.5 * n):.3f}" for n, t in enumerate(times)]
    path.write_text("# times: UTC\ntime,height (m)\n" + "\n".join(rows) + "\n")


def test_one_gauge_is_audited_and_undetermined(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    shutil.copy(SAMPLES / "exports/dellisk_2021.txt", tmp_path)
    assert run(tmp_path, HEAD + gauge_table("d", 'file = "dellisk_2021.txt"')) == 0
    document = json.loads((tmp_path / "out/audit.json").read_text())
    assert document["verdict"] == "undetermined"
    assert "undetermined" in capsys.readouterr().out
    assert {"MHHW", "LAT", "ISLW"} <= {row["datum"] for row in document["datums"]}


def test_a_short_gauge_is_a_finding_beside_a_sound_one(tmp_path: Path) -> None:
    shutil.copy(SAMPLES / "exports/dellisk_2021.txt", tmp_path)
    short_export(tmp_path / "short.csv", 8)
    gauges = gauge_table("d", 'file = "dellisk_2021.txt"') + gauge_table("s", 'file = "short.csv"', 50.0)
    assert run(tmp_path, HEAD + gauges) == 1
    (finding,) = json.loads((tmp_path / "out/audit.json").read_text())["findings"]
    assert (finding["gauge"], finding["kind"], finding["severity"]) == ("s", "coverage", "error")
    assert "too short for any constituent" in finding["evidence"]


def test_only_short_gauges_are_wrong_input(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    short_export(tmp_path / "short.csv", 8)
    assert run(tmp_path, HEAD + gauge_table("s", 'file = "short.csv"')) == 2
    message = capsys.readouterr().err
    assert message.count("\n") == 1
    assert "short.csv" in message
    assert not (tmp_path / "out").exists()


def test_gauges_given_by_constants_make_a_wave(tmp_path: Path) -> None:
    """Constants alone: five gauges of an exact wave of 24.26 m/s, sqrt(9.81 * 60)."""
    speeds = {"M2": 28.9841042, "S2": 30.0, "N2": 28.4397295, "K1": 15.0410686, "O1": 13.9430356}
    text = HEAD
    for n, along in enumerate((0.0, 90.0, 200.0, 310.0, 400.0)):
        hours = along * 1e3 / 24.26108 / 3600.0
        rows = [f"{name},1.0,{(40.0 + speed * hours) % 360.0:.4f}" for name, speed in speeds.items()]
        (tmp_path / f"g{n}.csv").write_text("constituent,amplitude_m,phase_lag_deg\n" + "\n".join(rows) + "\n")
        text += gauge_table(f"g{n}", f'constants = "g{n}.csv"', along)
    assert run(tmp_path, text) == 0
    document = json.loads((tmp_path / "out/audit.json").read_text())
    together = document["propagation"][-1]
    assert document["verdict"] == "consistent"
    assert together["speed_low_m_per_s"] < 24.26108 < together["speed_high_m_per_s"]


def test_fail_on_decides_the_exit_code(tmp_path: Path) -> None:
    shutil.copy(SAMPLES / "exports/dellisk_2021.txt", tmp_path)
    text = HEAD + "[audit]\nminimum_days = 400.0\n" + gauge_table("d", 'file = "dellisk_2021.txt"')
    assert run(tmp_path, text) == 0
    assert run(tmp_path, text, "--fail-on", "warning") == 1


@pytest.mark.parametrize(
    ("text", "where"),
    [
        (HEAD + 'colour = "red"\n' + gauge_table("d", 'file = "d.csv"'), "network.toml:6 [coast.colour]"),
        (HEAD + gauge_table("d", 'file = "none.csv"'), "network.toml:8 [gauge 1.file]"),
        (HEAD + gauge_table("d", 'file = "d.csv"') * 2, "[gauge 2.id]"),
        (HEAD + gauge_table("d", 'file = "d.csv"') + gauge_table("e", 'file = "d.csv"'), "[gauge 2.latitude]"),
        (HEAD.replace("60.0", "-3"), "network.toml:5 [coast.depth_m]"),
        (HEAD.replace("left", "west"), "network.toml:4 [coast.side]"),
        ("[network\n", "network.toml:1: not TOML"),
    ],
)
def test_a_wrong_network_file_is_one_line(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], text: str, where: str
) -> None:
    short_export(tmp_path / "d.csv", 900)
    body = text if "gauge" in text or "not TOML" in where else text + gauge_table("d", 'file = "d.csv"')
    assert run(tmp_path, body) == 2
    message = capsys.readouterr().err
    assert message.count("\n") == 1
    assert where in message
    assert not (tmp_path / "out").exists()


def test_a_missing_network_is_named(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["audit", str(tmp_path / "no.toml"), "--out", str(tmp_path / "out")]) == 2
    assert "no.toml: cannot read this network file" in capsys.readouterr().err


def test_the_first_wrong_gauge_of_the_file_is_named(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Gauges are audited side by side; the complaint is the same each time all the same."""
    good = "constituent,amplitude_m,phase_lag_deg\nM2,1.0,40\n"
    text = HEAD
    for n, content in enumerate((good, "constituent\nM2\n", good, "no table\n", "")):
        (tmp_path / f"g{n}.csv").write_text(content)
        text += gauge_table(f"g{n}", f'constants = "g{n}.csv"', 60.0 * n)
    assert run(tmp_path, text) == 2
    assert "g1.csv" in capsys.readouterr().err


def test_progress_tells_of_every_gauge_and_of_the_end(tmp_path: Path) -> None:
    (tmp_path / "a.csv").write_text("constituent,amplitude_m,phase_lag_deg\nM2,1.0,40\n")
    tables = [gauge_table(gauge, 'constants = "a.csv"', 60.0 * n) for n, gauge in enumerate("abc")]
    (tmp_path / "network.toml").write_text(HEAD + "".join(tables))
    told: list[str] = []
    audit = run_audit(read_network(tmp_path / "network.toml"), progress=told.append)
    assert [gauge.station.id for gauge in audit.gauges] == ["a", "b", "c"]
    assert told[:4] == [f"gauges: {n} of 3" + (f", {'abc'[n - 1]} done" if n else "") for n in range(4)]
    assert told[-1] == "the records beside one another"
