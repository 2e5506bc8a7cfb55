"""The command `constants`: what it prints, writes and refuses, on the shipped network."""

import json
from pathlib import Path

import pandas as pd
import pytest
from numpy.testing import assert_allclose

from tidekit.cli.main import main
from tidekit.constituents.constants_table import read_constants

SAMPLES = Path(__file__).parents[2] / "sample_series"
SOURCE = f"{SAMPLES / 'network.toml'}:avelhead"


def month(tmp_path: Path) -> Path:
    """The first thirty days of a shipped export."""
    lines = (SAMPLES / "exports/avelhead_2021.csv").read_text().splitlines()
    path = tmp_path / "month.csv"
    path.write_text("\n".join(lines[: 4 + 720]) + "\n")
    return path


def test_the_table_reads_back(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    out = tmp_path / "c.csv"
    assert main(["constants", SOURCE, "--out", str(out)]) == 0
    table = pd.read_csv(out)
    assert list(table.columns)[:3] == ["gauge", "constituent", "speed_deg_per_h"]
    assert list(table["constituent"])[:2] == ["Z0", "Sa"]
    # What the coast was made with (tidekit/demo/coast.py): M2 0.812 m at 302 degrees.
    constants = read_constants(out).select(["M2"])
    assert abs(constants.amplitude_m[0] - 0.812) < 4 * constants.amplitude_sd_m[0]
    assert abs(constants.phase_lag_deg[0] - 302.0) < 4 * constants.phase_lag_sd_deg[0]
    assert "Harmonic analysis by least squares" in capsys.readouterr().out


def test_json_is_one_document(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["constants", SOURCE, "--constituents", "M2", "S2", "K1", "2*M2 + S2", "--trend", "--json"]) == 0
    document = json.loads(capsys.readouterr().out)
    assert [row["constituent"] for row in document["constants"]] == ["Z0", "K1", "M2", "S2", "2MS6"]
    assert document["trend_sd_m_per_year"] > 0


def test_a_month_infers_by_the_equilibrium_tide_or_by_a_reference(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    reference = tmp_path / "reference.csv"
    assert main(["constants", SOURCE, "--out", str(reference)]) == 0
    capsys.readouterr()
    rows = {}
    for name, options in (("equilibrium", []), ("reference", ["--reference", str(reference)])):
        assert main(["constants", str(month(tmp_path)), "--json", *options]) == 0
        table = pd.DataFrame(json.loads(capsys.readouterr().out)["constants"]).set_index("constituent")
        assert set(table.loc[["K2", "P1", "nu2"], "basis"]) == {"inferred"}
        assert {"M2", "S2", "K1", "O1"} <= set(table.index[table["basis"] == "fitted"])
        rows[name] = table.loc["K2", "amplitude_m"] / table.loc["S2", "amplitude_m"]
    year = pd.read_csv(reference).set_index("constituent")["amplitude_m"]
    assert_allclose(rows["reference"], year["K2"] / year["S2"], rtol=1e-6)
    # Doodson (1921), from memory: K2 over S2 is 0.2721; masses have moved by 8e-4 since.
    assert_allclose(rows["equilibrium"], 0.2721, atol=1e-3)


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        (["none.csv"], "none.csv: cannot read this export"),
        ([SOURCE, "--constituents", "M2", "XX9"], "unknown constituent 'XX9'"),
        ([SOURCE, "--constituents", "M2", "m2"], "M2 named more than once"),
        ([f"{SAMPLES / 'network.toml'}:nobody"], "no gauge 'nobody'"),
    ],
)
def test_wrong_requests_are_one_line(arguments: list[str], message: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["constants", *arguments]) == 2
    error = capsys.readouterr().err
    assert error.count("\n") == 1
    assert message in error


def test_constituents_of_one_speed_are_warned_of(capsys: pytest.CaptureFixture[str]) -> None:
    """MO3 and 2MK3 share a speed and differ only in nodal modulation, which a year hardly shows."""
    assert main(["constants", SOURCE, "--constituents", "M2", "K1", "MO3", "2MK3"]) == 0
    assert "MO3 and 2MK3 are hard to part" in capsys.readouterr().out
