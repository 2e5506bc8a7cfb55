"""`tidekit coast` as its user sees it, on invented coasts whose wave is exact: speed ``sqrt(9.81 * 60)`` m/s."""

import json
import math
from collections.abc import Mapping, Sequence
from pathlib import Path

import pandas as pd
import pytest
from numpy.testing import assert_allclose

from tidekit.cli import main as entry
from tidekit.cli.main import CAUTION

SPEEDS = {"M2": 28.9841042, "S2": 30.0, "N2": 28.4397295, "K1": 15.0410686, "O1": 13.9430356}
"""Degrees per hour (Schureman 1940, Table 2, from memory); the tide of the gauges below."""
WAVE_M_PER_S = math.sqrt(9.81 * 60.0)
ROSSBY_KM = WAVE_M_PER_S / (2 * 7.292115e-5 * math.sin(math.radians(41.2))) / 1e3
PLACES_KM = (0.0, 70.0, 165.0, 240.0, 330.0, 410.0, 480.0, 560.0)
OFFSHORE_KM = (0.0, 0.0, 0.0, 118.0, 0.0, 0.0, 0.0, 0.0)
COLUMNS = [
    "group",
    "direction_deg",
    "speed_m_per_s",
    "speed_low_m_per_s",
    "speed_high_m_per_s",
    "theory_speed_m_per_s",
    "cross_shore_ratio",
    "theory_cross_shore_ratio",
    "verdict",
]
EXACT = 2e-4
"""Relative: phase lags and amplitudes are written to four places."""


@pytest.fixture(autouse=True)
def only_coast(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(entry, "COMMANDS", ("coast",))


def constants_text(delay_h: float, amplitude_m: float) -> str:
    rows = [f"{name},{amplitude_m:.4f},{(40.0 + speed * delay_h) % 360.0:.4f}" for name, speed in SPEEDS.items()]
    return "constituent,amplitude_m,phase_lag_deg\n" + "\n".join(rows) + "\n"


def coast(
    folder: Path,
    *,
    side: str = "left",
    sign: int = 1,
    late_h: Mapping[int, float] | None = None,
    inside: Sequence[int] = (),
    count: int = len(PLACES_KM),
    coast_keys: str = "depth_m = 60.0",
) -> Path:
    """A network file on the southern hemisphere, the wave toward increasing positions with sign +1."""
    text = f'[network]\nname = "Avel"\n[coast]\nside = "{side}"\n{coast_keys}\n'
    for n, (along, offshore) in enumerate(list(zip(PLACES_KM, OFFSHORE_KM, strict=True))[:count]):
        delay = sign * along * 1e3 / WAVE_M_PER_S / 3600.0 + (late_h or {}).get(n, 0.0)
        (folder / f"g{n}.csv").write_text(constants_text(delay, math.exp(-offshore / ROSSBY_KM)), encoding="utf-8")
        text += (
            f'[[gauge]]\nid = "g{n}"\nconstants = "g{n}.csv"\nlatitude = {-41.2 + (along - 280.0) / 111.2:.5f}\n'
            f"longitude = 88.0\nalong_coast_km = {along}\noffshore_km = {offshore}\n"
            f"open_coast = {str(n not in inside).lower()}\n"
        )
    path = folder / "network.toml"
    path.write_text(text, encoding="utf-8")
    return path


def document(path: Path, capsys: pytest.CaptureFixture[str], *options: str, code: int = 0) -> dict[str, object]:
    assert entry.main(["coast", str(path), "--json", *options]) == code
    found: dict[str, object] = json.loads(capsys.readouterr().out)
    return found


def together(found: dict[str, object]) -> dict[str, float | str]:
    rows = found["propagation"]
    assert isinstance(rows, list)
    assert rows[-1]["group"] == "all"
    last: dict[str, float | str] = rows[-1]
    return last


def accused(found: dict[str, object]) -> list[tuple[str, str]]:
    rows = found["findings"]
    assert isinstance(rows, list)
    return [(row["gauge"], row["kind"]) for row in rows if row["severity"] == "error"]


def test_an_exact_wave_is_measured_and_consistent(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    found = document(coast(tmp_path), capsys)
    row = together(found)
    assert found["verdict"] == row["verdict"] == "consistent"
    assert found["caution"] == CAUTION
    assert accused(found) == []
    assert_allclose([row["speed_m_per_s"], row["theory_speed_m_per_s"]], WAVE_M_PER_S, rtol=EXACT)
    assert_allclose(row["cross_shore_ratio"], math.exp(-118.0 / ROSSBY_KM), rtol=EXACT)
    assert_allclose(row["direction_deg"], 0.0, atol=1e-6)  # northward along a meridian
    assert float(row["speed_low_m_per_s"]) < WAVE_M_PER_S < float(row["speed_high_m_per_s"])


def test_one_row_a_constituent_and_one_for_all(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    out = tmp_path / "propagation.csv"
    assert entry.main(["coast", str(coast(tmp_path)), "--out", str(out)]) == 0
    frame = pd.read_csv(out)
    assert list(frame.columns)[: len(COLUMNS)] == COLUMNS
    assert sorted(frame["group"]) == sorted([*SPEEDS, "all"])
    text = capsys.readouterr().out
    assert text.rstrip().endswith(CAUTION)
    assert "Verdict: consistent: travels toward 0 deg with the coast on its left" in text
    assert "Theory: depth 60 m as given." in text


def test_a_wave_the_wrong_way_is_inconsistent(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    found = document(coast(tmp_path, sign=-1), capsys)
    assert found["verdict"] == "inconsistent"
    assert "keeps it on its left" in str(found["evidence"])
    assert_allclose(together(found)["direction_deg"], 180.0, atol=1e-6)


def test_the_side_of_the_land_decides_the_way(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert document(coast(tmp_path, side="right", sign=-1), capsys)["verdict"] == "consistent"


def test_depths_along_the_coast_take_their_travel_time(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    # Half the way at 100 m, half at 30 m, with a jump between: a harmonic mean of the two speeds.
    keys = "depth_along_coast = [[0.0, 100.0], [280.0, 100.0], [280.001, 30.0], [560.0, 30.0]]"
    row = together(document(coast(tmp_path, coast_keys=keys), capsys))
    wanted = 2.0 / (1.0 / math.sqrt(9.81 * 100.0) + 1.0 / math.sqrt(9.81 * 30.0))
    assert_allclose(row["theory_speed_m_per_s"], wanted, rtol=1e-5)  # the jump is a metre wide


def test_a_late_clock_gives_exit_code_1(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = coast(tmp_path, late_h={4: 12.0 / 60.0})
    found = document(path, capsys, code=1)
    assert accused(found) == [("g4", "clock_offset")]
    gauges = found["gauges"]
    assert isinstance(gauges, dict)
    assert [gauge for gauge, used in gauges.items() if not used] == ["g4"]
    assert_allclose(together(found)["speed_m_per_s"], WAVE_M_PER_S, rtol=EXACT)
    assert entry.main(["coast", str(path)]) == 1
    text = capsys.readouterr().out
    assert "Gauges off the wave, left out of the speed: g4." in text
    assert "error: g4: clock_offset +12" in text
    assert "if the gauge stands in one, mark it open_coast = false" in text


def test_an_early_clock_is_not_put_down_to_a_bay(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert entry.main(["coast", str(coast(tmp_path, late_h={4: -12.0 / 60.0}))]) == 1
    text = capsys.readouterr().out
    assert "error: g4: clock_offset -12" in text
    assert "earlier than the tide's." in text
    assert "bay" not in text


def test_a_gauge_inside_is_neither_used_nor_judged(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    # Three hours behind, as at the head of a long inlet.
    found = document(coast(tmp_path, late_h={4: 3.0}, inside=[4]), capsys)
    gauges = found["gauges"]
    assert isinstance(gauges, dict)
    assert "g4" not in gauges
    assert found["findings"] == []
    assert found["verdict"] == "consistent"


@pytest.mark.parametrize("count", [1, 2])
def test_too_few_gauges_are_undetermined(count: int, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = coast(tmp_path, count=count)
    found = document(path, capsys)
    assert found["verdict"] == "undetermined"
    assert len(str(found["evidence"])) > 20
    assert entry.main(["coast", str(path)]) == 0
    assert "Verdict: undetermined" in capsys.readouterr().out


def test_a_coast_without_depth_is_undetermined(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    found = document(coast(tmp_path, coast_keys="# no depth known"), capsys)
    assert found["verdict"] == "undetermined"
    assert "no theory to compare with" in str(found["evidence"])
    assert_allclose(together(found)["speed_m_per_s"], WAVE_M_PER_S, rtol=EXACT)


@pytest.mark.parametrize(
    ("change", "said"),
    [
        (("depth_m = 60.0", "depth = 60.0"), "network.toml:5 [coast.depth]"),
        (('"left"', '"west"'), "network.toml:4 [coast.side]"),
        (('constants = "g1.csv"', 'constants = "none.csv"'), "none.csv"),
    ],
)
def test_wrong_input_is_one_line_and_leaves_nothing(
    change: tuple[str, str], said: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    path = coast(tmp_path)
    path.write_text(path.read_text(encoding="utf-8").replace(*change), encoding="utf-8")
    assert entry.main(["coast", str(path), "--out", str(tmp_path / "out.csv")]) == 2
    heard = capsys.readouterr()
    assert heard.out == ""
    assert heard.err.count("\n") == 1
    assert said in heard.err
    assert not (tmp_path / "out.csv").exists()


def test_a_place_that_cannot_be_written_is_said(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = coast(tmp_path)
    assert entry.main(["coast", str(path), "--out", str(path / "out.csv")]) == 2  # a file is no folder
    heard = capsys.readouterr()
    assert heard.out == ""
    assert heard.err.count("\n") == 1
    assert "cannot write here" in heard.err


def test_a_wave_of_another_depth_is_inconsistent(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    found = document(coast(tmp_path, coast_keys="depth_m = 400.0"), capsys)
    assert found["verdict"] == "inconsistent"
    assert "outside" in str(found["evidence"])
