"""Screening of a made record: injected faults are flagged by the right test, sound samples are left alone."""

from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from matplotlib.figure import Figure

from tests.quality.test_slips import T_H
from tests.quality.test_slips import record as tide_heights
from tidekit.cli.main import main
from tidekit.errors import InputError
from tidekit.quality.overrides import apply_overrides, read_overrides
from tidekit.quality.screening import screen
from tidekit.records.ledger import RowLedger
from tidekit.records.record import GaugeRecord
from tidekit.records.station import Station
from tidekit.report.figures_record import draw_record

DAYS = 90


def made(heights: np.ndarray, keep: np.ndarray | None = None) -> GaugeRecord:
    index = pd.Timestamp("2000-01-01", tz="UTC") + pd.to_timedelta(T_H[: len(heights)], unit="h")
    series = pd.Series(np.round(heights, 3), index=index)
    series = series if keep is None else series[keep]
    return GaugeRecord(
        station=Station(id="a"),
        heights=series,
        flags=pd.Series(np.full(len(series), 2, dtype=np.int8), index=series.index),
        ledger=RowLedger(rows=len(series), kept=len(series)),
    )


@pytest.fixture
def heights() -> np.ndarray:
    return tide_heights(np.zeros_like(T_H))[: 24 * DAYS].copy()


def test_a_sound_record_passes(heights: np.ndarray) -> None:
    found = screen(made(heights))
    assert (found.flags == 4).sum() == 0
    assert (found.flags == 3).mean() < 0.002


def test_each_fault_is_raised_by_its_test(heights: np.ndarray) -> None:
    heights[500] += 0.6
    heights[800:808] = heights[800]
    heights[1200] = 9.0
    heights[1500] = np.nan
    found = screen(made(heights))
    raised = found.raised_by()
    assert "spike" in raised[500]
    assert found.flags[500] == 4
    assert raised[806] == "flat_line"
    assert found.flags[806] == 4
    assert "gross_range" in raised[1200]
    assert found.flags[1500] == 9
    assert raised[1500] == ""
    assert not found.screened().usable[500]


def test_a_choked_well_is_attenuated(heights: np.ndarray) -> None:
    heights[1000:1100] *= 0.05
    found = screen(made(heights))
    assert set(found.by_test["attenuated_signal"][1030:1095]) == {4}
    assert set(found.by_test["attenuated_signal"][100:900]) == {1}


def test_a_gap_is_no_spike(heights: np.ndarray) -> None:
    keep = np.ones(len(heights), dtype=bool)
    keep[700:706] = False
    found = screen(made(heights, keep))
    assert found.by_test["spike"][700] == 2  # nothing stands before it to be compared with
    assert (found.flags == 4).sum() == 0


def test_a_reviewer_overrules_and_stays_in_the_trail(heights: np.ndarray, tmp_path: Path) -> None:
    heights[500] += 0.6
    heights[503] = np.nan
    found = screen(made(heights))
    start, end = (found.record.heights.index[n].isoformat() for n in (500, 503))
    path = tmp_path / "review.csv"
    path.write_text(f"from_utc,to_utc,flag,reason\n{start},{end},1,ship wash, seen\n")
    with pytest.raises(InputError, match=r"review\.csv:2: wanted an end at or after"):
        read_overrides(path)  # a comma in a reason wants quotes
    path.write_text(f'from_utc,to_utc,flag,reason\n{start},{end},1,"ship wash, seen"\n')
    reviewed = apply_overrides(found, read_overrides(path))
    assert reviewed.flags[500:504].tolist() == [1, 1, 1, 9]
    assert reviewed.raised_by()[500] == "review"
    assert reviewed.reviewed == dict.fromkeys((500, 501, 502), "ship wash, seen")
    assert reviewed.by_test["spike"][500] == 4  # what the test said stays


@pytest.mark.parametrize(
    ("text", "match"),
    [
        ("a,b\n", r"r\.csv:1: wanted the columns"),
        ("from_utc,to_utc,flag,reason\nsoon,later,1,x\n", r"r\.csv:2: cannot read this row"),
        ("from_utc,to_utc,flag,reason\n2021-01-02,2021-01-01,1,x\n", r"r\.csv:2: wanted an end at or after"),
        ("from_utc,to_utc,flag,reason\n2021-01-01,2021-01-02,7,x\n", r"r\.csv:2: wanted"),
    ],
)
def test_a_wrong_review_is_named(tmp_path: Path, text: str, match: str) -> None:
    path = tmp_path / "r.csv"
    path.write_text(text)
    with pytest.raises(InputError, match=match):
        read_overrides(path)


def test_the_picture_marks_what_is_flagged(heights: np.ndarray) -> None:
    heights[500] += 0.6
    figure = draw_record(screen(made(heights)))
    assert isinstance(figure, Figure)
    assert "1 fail" in figure.axes[0].get_title(loc="left")


def test_the_command(tmp_path: Path, capsys: pytest.CaptureFixture[str], heights: np.ndarray) -> None:
    heights[500] += 0.6
    series = made(heights).heights
    rows = [f"{t:%Y-%m-%d %H:%M},{h}" for t, h in series.items()]
    export = tmp_path / "e.csv"
    export.write_text("# times: UTC\ntime,height (m)\n" + "\n".join(rows) + "\n")
    table, picture = tmp_path / "flags.csv", tmp_path / "flags.png"
    assert main(["screen", str(export), "--out", str(table), "--picture", str(picture)]) == 1
    frame = pd.read_csv(table, keep_default_na=False)
    assert list(frame.columns) == ["time_utc", "height_m", "flag", "raised_by", "residual_m"]
    assert frame["flag"][500] == 4
    assert picture.stat().st_size > 10_000
    assert "spike_high_m" in capsys.readouterr().out
    assert main(["screen", str(export), "--picture", str(tmp_path / "p.bmp")]) == 2
    assert "cannot draw a .bmp picture" in capsys.readouterr().err
