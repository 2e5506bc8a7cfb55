"""Where a hasty reader would misread without a word: settled by the data, or asked."""

from __future__ import annotations

from datetime import datetime, timedelta
from pathlib import Path

import pytest

from tidekit.errors import RecordError
from tidekit.records.reading import read_file, read_record
from tidekit.records.units import unit_in


@pytest.fixture(autouse=True)
def in_folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)


def write(head: str, rows: list[str]) -> str:
    Path("mole.csv").write_text(head + "\n".join(rows) + "\n")
    return "mole.csv"


def hours(count: int, time_format: str, start: datetime = datetime(2021, 4, 2)) -> list[str]:
    return [f"{start + timedelta(hours=n):{time_format}}" for n in range(count)]


def test_one_odd_date_is_no_witness_against_all_steps() -> None:
    rows = [f"{time},1.5" for time in hours(200, "%d/%m/%Y %H:%M")]
    rows[90] = "04/14/2021 18:00,1.5"
    with pytest.raises(
        RecordError, match=r"line 92 shows, but rows follow one another evenly only if dates are day-mon"
    ):
        read_record(write("time (UTC),level (m)\n", rows))


def test_sign_that_appears_late_in_columns_of_fixed_places() -> None:
    rows = [
        f"{time} {'    ' if n % 3 else '12.6'} {-1.25 if n == 700 else 1.25:6.2f}"
        for n, time in enumerate(hours(720, "%Y-%m-%d %H:%M"))
    ]
    record = read_record(write("times: UTC\nDATE       TIME  BATT LEVEL_M\n", rows))
    assert record.heights.iloc[700] == -1.25
    assert record.heights.drop(record.heights.index[700]).eq(1.25).all()
    assert record.ledger.kept == 720


def test_whole_numbers_behind_a_clock_are_no_seconds() -> None:
    rows = [f"{time} {30 + n % 17} 118" for n, time in enumerate(hours(60, "%Y %m %d %H %M"))]
    with pytest.raises(RecordError, match="columns 6, 7 hold numbers; declare one"):
        read_record(write("", rows), time_zone="UTC", unit="cm")
    record = read_record("mole.csv", time_zone="UTC", unit="cm", column="6")
    assert record.heights.iloc[5] == pytest.approx(0.35)
    assert record.step_h == 1.0


def test_plain_numbers_are_no_time() -> None:
    rows = [f"{n} {n * 7 % 31} {n * 3 % 19} {n / 10}" for n in range(60)]
    with pytest.raises(RecordError, match="no time column"):
        read_record(write("", rows), time_zone="UTC", unit="m")


def test_date_settled_by_a_row_far_below_the_first_lines() -> None:
    rows = [f"{time},1.5" for time in hours(24 * 60, "%d/%m/%Y %H:%M", datetime(2021, 5, 1))]
    file = read_file(write("time (UTC),level (m)\n", rows))
    assert file.layout.date_order == "day-month-year"
    # 6-minute rows of one day say nothing; the thirteenth of the month does, whatever its place.
    many = [f"{datetime(2021, 5, 4) + timedelta(seconds=10 * n):%d/%m/%Y %H:%M:%S},1.5" for n in range(8640 * 10)]
    file = read_file(write("time (UTC),level (m)\n", many))
    assert "dates begin with the day, as line 77762 shows" in file.evidence


def test_contradicting_declaration_is_told() -> None:
    rows = [f"{time},1.5" for time in hours(30, "%Y-%m-%d %H:%M")]
    file = read_file(write("time (UTC),level (m)\n", rows), time_zone="UTC-8", unit="ft")
    assert "time zone UTC-8 declared, in place of UTC" in file.evidence
    assert "unit ft declared, in place of m" in file.evidence


@pytest.mark.parametrize(
    ("label", "unit"),
    [
        ("SLEV(metres)", "m"), ("height_ft_mllw", "ft"), ("Water Level: m (MSL)", "m"), ("LEVEL_M", "m"),
        ("Stage [FT]", "ft"), ("Sigma", None), ("Station M level", None),
        ("level in mm", "mm"), ("level cm or ft", None), ("in", None),
    ],
)  # fmt: skip
def test_units_in_labels(label: str, unit: str | None) -> None:
    assert unit_in(label) == unit


def test_a_column_named_datum_is_no_vertical_reference() -> None:
    rows = [f"{time},1.5" for time in hours(30, "%d.%m.%Y,%H:%M", datetime(2021, 3, 12))]
    file = read_file(write("times: UTC\nDatum,Uhrzeit,Pegel (m)\n", rows))
    assert file.layout.vertical_reference is None
    file = read_file(write("times: UTC\nDatum: AHD\nDatum,Uhrzeit,Pegel (m)\n", rows))
    assert file.layout.vertical_reference == "AHD"
