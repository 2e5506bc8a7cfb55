"""`tidekit inspect` as its user sees it: what it prints, and one line for every wrong input."""

from __future__ import annotations

import json
from datetime import datetime, timedelta
from pathlib import Path

import pytest

from tidekit.cli import main as entry
from tidekit.records.layout import Layout, read_layout

HEAD = "# gauge: Invented Pier\n# times: UTC\n# unit: m\ntime,height\n"


@pytest.fixture(autouse=True)
def only_inspect(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(entry, "COMMANDS", ("inspect",))


@pytest.fixture(autouse=True)
def in_folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)


def hours(count: int, start: datetime = datetime(2021, 3, 4), time_format: str = "%Y-%m-%d %H:%M") -> list[str]:
    return [f"{start + timedelta(hours=n):{time_format}},{1 + n / 100:.3f}" for n in range(count)]


def write(text: str, name: str = "pier.csv") -> str:
    Path(name).write_text(text)
    return name


def wrong(capsys: pytest.CaptureFixture[str], *arguments: str) -> str:
    """Run a command that must fail: exit code 2, one line on standard error, nothing on standard output."""
    assert entry.main(["inspect", *arguments]) == entry.EXIT_WRONG_INPUT
    out, err = capsys.readouterr()
    assert out == ""
    assert err.count("\n") == 1
    assert err.startswith("tidekit inspect: ")
    return err


def test_text_tells_layout_ledger_span_and_gaps(capsys: pytest.CaptureFixture[str]) -> None:
    rows = hours(48)
    del rows[10:13]
    rows[20] = rows[20].split(",")[0] + ","
    rows.insert(30, rows[29])
    rows.append("end of data")
    assert entry.main(["inspect", write(HEAD + "\n".join(rows))]) == 0
    text = capsys.readouterr().out
    for piece in (
        "rows from line 5",
        "unit m from line 3",
        "time zone UTC from line 2",
        "47 = 44 kept + 1 flagged + 2 rejected",
        "1 flagged 9: missing value",
        "1 rejected: same row again (line 35)",
        "1 rejected: row is cut short (line 51)",
        "2021-03-04 00:00 to 2021-03-05 23:00 UTC",
        "60 min; 2 gaps, 4 samples absent",
        "4 h from 2021-03-04 09:00 to 2021-03-04 13:00",
        "1.000 to 1.470 m above a reference that the export does not name",
    ):
        assert piece in text


def test_json_is_one_document_with_every_rejected_row(capsys: pytest.CaptureFixture[str]) -> None:
    rows = hours(30)
    rows[3] = "not a time,1.0"
    rows[7] = rows[7].split(",")[0] + ",high"
    assert entry.main(["inspect", "--json", write(HEAD + "\n".join(rows))]) == 0
    document = json.loads(capsys.readouterr().out)
    assert document["adds_up"]
    assert document["rows"] == document["kept"] + document["flagged"] + document["rejected"] == 30
    assert [(row["line"], row["reason"]) for row in document["rejected_rows"]] == [
        (8, "time cannot be read"),
        (12, "height is not a number"),
    ]
    assert document["files"][0]["evidence"]


def test_saved_layout_reads_the_same_record(capsys: pytest.CaptureFixture[str]) -> None:
    export = write(HEAD + "\n".join(hours(30)))
    assert entry.main(["inspect", export, "--json", "--save-layout", "layout.toml"]) == 0
    first = json.loads(capsys.readouterr().out)
    assert isinstance(read_layout("layout.toml"), Layout)
    assert entry.main(["inspect", export, "--json", "--layout", "layout.toml"]) == 0
    second = json.loads(capsys.readouterr().out)
    assert second["files"][0]["evidence"] == ["layout declared"]
    for document in (first, second):
        del document["files"]
    assert first == second


def test_record_written_reads_the_same(capsys: pytest.CaptureFixture[str]) -> None:
    rows = hours(30)
    rows[4] = rows[4].split(",")[0] + ","
    export = write(HEAD + "\n".join(rows))
    assert entry.main(["inspect", export, "--json", "--out", "record.csv"]) == 0
    first = json.loads(capsys.readouterr().out)
    assert entry.main(["inspect", "record.csv", "--json"]) == 0
    second = json.loads(capsys.readouterr().out)
    for document in (first, second):
        del document["files"]
    assert first == second
    assert "wanted a name that ends with .csv, .parquet, .nc" in wrong(capsys, export, "--out", "record.doc")


def test_two_files_are_joined_and_repeats_name_their_file(capsys: pytest.CaptureFixture[str]) -> None:
    rows = hours(30)
    first, second = write(HEAD + "\n".join(rows[:20])), write(HEAD + "\n".join(rows[18:]), "later.csv")
    assert entry.main(["inspect", first, second]) == 0
    text = capsys.readouterr().out
    assert "32 = 30 kept + 0 flagged + 2 rejected" in text
    assert "later.csv:5, later.csv:6" in text


def test_missing_file(capsys: pytest.CaptureFixture[str]) -> None:
    assert "absent.csv: cannot read this export (No such file or directory)" in wrong(capsys, "absent.csv")


@pytest.mark.parametrize("text", ["", "\n \n\n"])
def test_empty_file(capsys: pytest.CaptureFixture[str], text: str) -> None:
    assert "pier.csv: this file is empty" in wrong(capsys, write(text))


def test_header_without_rows(capsys: pytest.CaptureFixture[str]) -> None:
    assert "pier.csv:1: no time column" in wrong(capsys, write(HEAD))


def test_no_time_column(capsys: pytest.CaptureFixture[str]) -> None:
    rows = "\n".join(f"{n},{n / 10}" for n in range(20))
    assert "pier.csv:1: no time column" in wrong(capsys, write("index,height (m)\n" + rows))


def test_no_height_column(capsys: pytest.CaptureFixture[str]) -> None:
    rows = "\n".join(row.split(",")[0] + ",calm" for row in hours(20))
    assert "pier.csv" in wrong(capsys, write("time,sea\n" + rows))


def test_mixed_date_orders(capsys: pytest.CaptureFixture[str]) -> None:
    rows = hours(60, datetime(2021, 3, 12), "%d/%m/%Y %H:%M")
    rows[50] = "03/14/2021 02:00,1.5"
    error = wrong(capsys, write(HEAD + "\n".join(rows)))
    assert "pier.csv:55: mixed date orders" in error
    assert "split the file" in error


def test_date_that_reads_two_ways(capsys: pytest.CaptureFixture[str]) -> None:
    export = write(HEAD + "\n".join(hours(10, datetime(2021, 4, 3), "%d/%m/%Y %H:%M")))
    error = wrong(capsys, export)
    assert "pier.csv:5: the date in '03/04/2021 00:00' can be read day-month-year or month-day-year" in error
    assert 'date_order = "day-month-year"' in error
    declared = write('date_order = "day-month-year"\n', "layout.toml")
    assert entry.main(["inspect", export, "--layout", declared]) == 0
    assert "2021-04-03 00:00 to 2021-04-03 09:00" in capsys.readouterr().out


def test_no_time_zone_is_never_taken_as_utc(capsys: pytest.CaptureFixture[str]) -> None:
    export = write("time,height (m)\n" + "\n".join(hours(10)))
    assert "time_zone" in wrong(capsys, export)
    assert entry.main(["inspect", export, "--time-zone", "UTC-8"]) == 0
    assert "2021-03-04 08:00" in capsys.readouterr().out


def test_abbreviation_of_several_zones(capsys: pytest.CaptureFixture[str]) -> None:
    error = wrong(capsys, write("Time zone: CST\ntime,height (m)\n" + "\n".join(hours(10))))
    assert "pier.csv:1: 'CST' is not one time zone" in error


def test_ambiguous_local_hour(capsys: pytest.CaptureFixture[str]) -> None:
    rows = hours(12, datetime(2021, 10, 31))
    error = wrong(capsys, write(HEAD + "\n".join(rows)), "--time-zone", "Europe/Berlin")
    assert "pier.csv:7: the local time 2021-10-31 02:00 occurs twice or never in Europe/Berlin" in error


def test_hour_that_the_clock_never_shows(capsys: pytest.CaptureFixture[str]) -> None:
    rows = hours(12, datetime(2021, 3, 28))
    error = wrong(capsys, write(HEAD + "\n".join(rows)), "--time-zone", "Europe/Berlin")
    assert "pier.csv:7: the local time 2021-03-28 02:00 occurs twice or never" in error


def test_repeated_hour_that_the_rows_settle(capsys: pytest.CaptureFixture[str]) -> None:
    # Clocks go back at 03:00: the hour of two is seen twice, as rows follow one another.
    rows = hours(3, datetime(2021, 10, 31)) + hours(5, datetime(2021, 10, 31, 2))
    export = write(HEAD + "\n".join(rows))
    assert entry.main(["inspect", export, "--time-zone", "Europe/Berlin"]) == 0
    text = capsys.readouterr().out
    assert "2021-10-30 22:00 to 2021-10-31 05:00 UTC" in text
    assert "60 min; no gaps" in text


@pytest.mark.parametrize(
    "head", ["# times: UTC\n# unit: fathoms\ntime,height\n", "# times: UTC\ntime,height (cubits)\n"]
)
def test_unknown_unit(capsys: pytest.CaptureFixture[str], head: str) -> None:
    export = write(head + "\n".join(hours(10)))
    assert "pier.csv:2: unknown unit" in wrong(capsys, export)
    assert "unknown unit 'span'; wanted one of m, dm" in wrong(capsys, export, "--unit", "span")
    assert entry.main(["inspect", export, "--unit", "ft"]) == 0
    assert "0.305 to" in capsys.readouterr().out


def test_unit_not_stated(capsys: pytest.CaptureFixture[str]) -> None:
    assert "--unit" in wrong(capsys, write("# times: UTC\ntime,height\n" + "\n".join(hours(10))))


def test_several_height_columns(capsys: pytest.CaptureFixture[str]) -> None:
    rows = "\n".join(row + ",2.5" for row in hours(10))
    export = write("# times: UTC\ntime,radar level (m),float level (m)\n" + rows)
    assert "declare one (--column)" in wrong(capsys, export)
    assert entry.main(["inspect", export, "--column", "float level (m)"]) == 0
    assert "2.500 to 2.500 m" in capsys.readouterr().out
    assert "no one column 'sonar'" in wrong(capsys, export, "--column", "sonar")


def test_binary_file(capsys: pytest.CaptureFixture[str]) -> None:
    Path("pier.csv").write_bytes(bytes(range(256)) * 20)
    assert "pier.csv: this is a binary file" in wrong(capsys, "pier.csv")


def test_folder(capsys: pytest.CaptureFixture[str]) -> None:
    assert "this is a folder" in wrong(capsys, ".")


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("delimitre = ','", r"layout.toml [delimitre]: unknown key"),
        ("decimal = 5", "layout.toml [decimal]: is 5; wanted a text"),
        ("first_row = 3", "layout.toml [first_row]: where columns stand is declared whole"),
        ("date_order = 'dmy'", "layout.toml [date_order]: is no date order"),
        ("unit = 'ell'", "layout.toml: unknown unit 'ell'"),
        ("a = ", "layout.toml: this layout is not TOML"),
    ],
)
def test_wrong_layout(capsys: pytest.CaptureFixture[str], text: str, message: str) -> None:
    export = write(HEAD + "\n".join(hours(10)))
    assert message in wrong(capsys, export, "--layout", write(text, "layout.toml"))


def test_wrong_input_leaves_no_layout_behind(capsys: pytest.CaptureFixture[str]) -> None:
    export = write("time,height (m)\n" + "\n".join(hours(10)))
    wrong(capsys, export, "--save-layout", "layout.toml")
    assert not Path("layout.toml").exists()
