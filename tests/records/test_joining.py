"""Several files for one gauge: overlaps enter once and every repeated row is accounted for."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from tidekit.errors import RecordError
from tidekit.files import sha256_of
from tidekit.records.joining import OTHER_HEIGHT, SAME_ROW
from tidekit.records.layout import Layout, read_layout, write_layout
from tidekit.records.reading import read_file, read_record


@pytest.fixture(autouse=True)
def in_folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)


def write(name: str, heights: dict[int, str], unit: str = "m") -> str:
    rows = "".join(f"2021-03-04 {hour:02d}:00,{text}\n" for hour, text in heights.items())
    Path(name).write_text(f"time (UTC),level ({unit})\n{rows}")
    return name


def test_overlap_of_two_files() -> None:
    first = write("b.csv", {0: "1.0", 1: "1.1", 2: "1.2"})
    second = write("a.csv", {1: "1.1", 2: "9.9", 3: "1.3"})
    record = read_record([first, second])
    assert record.heights.tolist() == [1.0, 1.1, 1.2, 1.3]
    # Files keep the order in which they were named, and the first named has precedence.
    assert [(row.path, row.line, row.reason) for row in record.ledger.rejected] == [
        ("a.csv", 2, SAME_ROW),
        ("a.csv", 3, OTHER_HEIGHT),
    ]
    assert (record.ledger.rows, record.ledger.kept, record.ledger.adds_up) == (6, 4, True)
    assert [source.path for source in record.sources] == ["b.csv", "a.csv"]


def test_a_height_is_worth_more_than_a_blank() -> None:
    first, second = write("a.csv", {0: "1.0", 1: ""}), write("b.csv", {1: "1.1", 2: "1.2"})
    record = read_record([first, second])
    assert record.heights.tolist() == [1.0, 1.1, 1.2]
    assert [(row.path, row.line, row.reason) for row in record.ledger.rejected] == [("a.csv", 3, SAME_ROW)]


def test_same_height_in_two_units_is_the_same_row() -> None:
    record = read_record([write("a.csv", {0: "1.1", 1: "1.3"}), write("b.csv", {0: "110", 1: "130"}, "cm")])
    assert record.ledger.reasons == {SAME_ROW: 2}


def test_the_same_file_named_twice_adds_nothing() -> None:
    name = write("a.csv", {0: "1.0", 1: "1.1"})
    record = read_record([name, name])
    assert record.ledger.reasons == {SAME_ROW: 2}
    assert record.ledger.adds_up


def test_record_of_missing_values_only_is_a_record() -> None:
    record = read_record(write("a.csv", {0: "-99.99", 1: "1.0", 2: "-99.99"}))
    assert np.isnan(record.heights.to_numpy()).tolist() == [True, False, True]
    assert (record.ledger.kept, record.ledger.flagged) == (1, 2)
    assert record.heights_m.tolist() == [1.0]


def test_no_readable_row_is_an_error_that_tells_the_first_reason() -> None:
    Path("a.csv").write_text("# times: UTC\n2021-03-04 00:00,high\n2021-03-04 01:00,low\n")
    layout = Layout(delimiter=",", first_row=2, time_columns=(1,), height_column=2, unit="m", time_zone="UTC")
    with pytest.raises(
        RecordError, match=r"a\.csv:2: no row could be read \(2 rows, the first: height is not a number"
    ):
        read_record("a.csv", layout=layout)


def test_layout_round_trip() -> None:
    layout = Layout(
        delimiter="fixed", edges=(1, 12, 18), first_row=4, time_columns=(1, 2), time_parts=("date", "clock"),
        height_column=3, date_order="day-month-year", unit="cm", time_zone="Pacific/Auckland", decimal=",",
        missing=("", "-1", 'a "quoted" mark'), comment="", vertical_reference="staff zero",
    )  # fmt: skip
    write_layout(layout, "a.toml")
    assert read_layout("a.toml") == layout


def test_layout_that_begins_behind_the_last_row() -> None:
    layout = Layout(delimiter=",", first_row=99, time_columns=(1,), height_column=2, unit="m", time_zone="UTC")
    with pytest.raises(RecordError, match=r"a\.csv:99: no rows from line 99 on"):
        read_record(write("a.csv", {0: "1.0"}), layout=layout)


def test_fingerprint_is_that_of_the_file() -> None:
    name = write("a.csv", {0: "1.0", 1: "1.1"})
    Path("empty").write_bytes(b"abc")
    record = read_record(name)
    # FIPS 180-4's one-block example: the message "abc".
    assert sha256_of("empty") == "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad"
    assert record.sources[0].sha256 == sha256_of(name)


def test_progress_is_told_every_byte() -> None:
    name = write("a.csv", dict.fromkeys(range(24), "1.0"))
    told: list[int] = []
    read_file(name, progress=told.append)
    assert told == [Path(name).stat().st_size]
