"""Write the corpus of small exports and what each should read as.

Run from the repository: ``python tests/records/exports/make.py``. Gauges, places and heights are invented. What is
expected is written from the invented series itself, never by the reader under test.
"""

from __future__ import annotations

import gzip
import io
import json
import math
import zipfile
from collections.abc import Callable, Iterable
from datetime import UTC, datetime, timedelta
from pathlib import Path
from typing import Any

FOLDER = Path(__file__).parent
CASES: dict[str, dict[str, Any]] = {}
COUNT = 30
START = datetime(2021, 3, 12, 18)
"""Thirty hours from here cross midnight into the 13th: a day that is no month."""
EARLY = datetime(2021, 3, 4, 2)


def series(decimals: int = 3, count: int = COUNT) -> list[float]:
    """Heights of an invented tide, rounded as they are written. [m]"""
    return [round(1.62 + 1.31 * math.sin(2 * math.pi * n / 12.42 + 0.7), decimals) for n in range(count)]


def times(count: int = COUNT, start: datetime = START, step_min: float = 60) -> list[datetime]:
    """Times as the gauge's clock shows them."""
    return [start + timedelta(minutes=step_min * n) for n in range(count)]


def case(
    name: str,
    content: str | bytes,
    clock: Iterable[datetime] = (),
    height_m: Iterable[float | None] = (),
    *,
    offset_h: float = 0.0,
    rejected: Iterable[tuple[int, str]] = (),
    flags: dict[int, int] | None = None,
    error: str = "",
    **declared: str,
) -> None:
    """Write one export and note what it should read as."""
    (FOLDER / name).write_bytes(content.encode() if isinstance(content, str) else content)
    utc = [(time - timedelta(hours=offset_h)).replace(tzinfo=UTC).isoformat() for time in clock]
    CASES[name] = {
        "declared": declared,
        "utc": utc,
        "height_m": list(height_m),
        "flags": {str(row): flag for row, flag in (flags or {}).items()},
        "rejected": [list(row) for row in rejected],
        "error": error,
    }


def table(head: str, row: Callable[[datetime, float], str], heights: list[float] | None = None, **options: Any) -> str:
    """Text of an export: a head, then a row each."""
    rows = zip(times(**options), heights or series(), strict=True)
    return head + "".join(row(time, height) + "\n" for time, height in rows)


def plain(head: str = "time (UTC),water level (m)\n", stamp: str = "%Y-%m-%d %H:%M", mark: str = ",") -> str:
    """The plainest export there is."""
    return table(head, lambda t, h: f"{t:{stamp}}{mark}{h:.3f}")


def delimiters() -> None:
    t, h = times(), series()
    case("comma.csv", plain(), t, h)
    comma = table(
        "Station;Invented Mole\nClock;UTC+1\nDate;Clock time;Height [m];Samples\n",
        lambda t, h: f"{t:%d.%m.%Y;%H:%M};{h:.3f};60".replace(".", ",").replace(f"{t:%d,%m,%Y}", f"{t:%d.%m.%Y}"),
    )
    case("semicolon_decimal_comma.txt", comma, t, h, offset_h=1)
    case(
        "words_of_another_language.csv",
        table(
            "Pegel Erfunden\nDatum;Uhrzeit (MEZ);Pegel [cm]\n",
            lambda t, v: f"{t:%d.%m.%Y;%H:%M};{100 * v:.1f}".replace(".", ",").replace(
                f"{t:%d,%m,%Y}", f"{t:%d.%m.%Y}"
            ),
        ),
        t,
        h,
        offset_h=1,
    )
    case("tab.tsv", plain("time [UTC]\tlevel [m]\n", mark="\t"), t, h)
    case("pipe.txt", plain("# zone: UTC-3\ntime|stage (m)\n", mark="|"), t, h, offset_h=-3)
    blanks = table("# times in UTC\n# date clock level_m\n", lambda t, h: f"  {t:%Y/%m/%d   %H:%M:%S} {h:9.3f}")
    case("blanks.txt", blanks, t, h)
    # The battery, between clock and height, is blank in every third row: runs of blanks would shift the height.
    rows = [
        f"{a:%Y-%m-%d %H:%M}{'      ' if n % 3 == 0 else '  12.6'}{b:9.3f}"
        for n, (a, b) in enumerate(zip(t, h, strict=True))
    ]
    fixed = "Clock: UTC\nDATE       TIME    BATT  LEVEL_M\n" + "\n".join(rows) + "\n"
    case("fixed_places.txt", fixed, t, h)
    case("blank_beside_comma.csv", plain(mark=" , "), t, h)
    case("trailing_commas.csv", table("time (UTC),level (m),,\n", lambda t, h: f"{t:%Y-%m-%d %H:%M},{h:.3f},,"), t, h)
    case("no_last_line_end.csv", plain().rstrip("\n"), t, h)


def junk() -> None:
    t, h = times(), series()
    lines = plain().splitlines()
    again = [*lines[:11], lines[0], *lines[11:]]
    case("header_again.csv", "\n".join(again) + "\n", t, h, rejected=[(12, "header again")])
    footer = plain() + "\nTotal rows: 30\nEnd of export\n"
    cut = "row is cut short"
    case("footer.csv", footer, t, h, rejected=[(33, cut), (34, cut)])
    head = "".join(f"Logger setting {n}: {n * 7}\n" for n in range(14)) + "Time zone: UTC+10\n\ntime,height (m)\n"
    case("long_header.csv", plain(head), t, h, offset_h=10)
    comments = plain("% exported by hand\n% unit: metres\n% clock: GMT\ntime,level\n")
    case("comments.csv", comments.replace("2021-03-13 02:00", "% battery changed\n2021-03-13 02:00"), t, h)
    quoted = table(
        '"INVENTED","Mole 7","9021"\n"TIMESTAMP_UTC","RECORD","BATT","LEVEL"\n"","RN","V","m"\n',
        lambda t, h: f'"{t:%Y-%m-%d %H:%M:%S}",{t.hour},12.61,{h:.3f}',
    )
    case("quoted_with_unit_row.csv", quoted, t, h)
    quoted = table(
        '"time (UTC)","level, still water (m)"\n', lambda t, h: f'"{t:%Y-%m-%d %H:%M}","{h:.3f}"'.replace(".", ",")
    )
    case("quoted_decimal_comma.csv", quoted, t, h)
    blank = plain().replace("2021-03-13 05:00", "\n\n2021-03-13 05:00")
    case("blank_lines.csv", blank, t, h)


def encodings() -> None:
    t, h = times(), series()
    accented = plain("# Ort: Höhenstrand, 7 °C\ntime (UTC),Höhe water level (m)\n")
    case("byte_order_mark.csv", b"\xef\xbb\xbf" + plain().encode(), t, h)
    case("utf16.csv", plain().encode("utf-16"), t, h)
    case("latin1.csv", accented.encode("latin-1"), t, h)
    case("utf8_accents.csv", accented, t, h)
    case("crlf.csv", plain().replace("\n", "\r\n"), t, h)
    case("carriage_returns.csv", plain().replace("\n", "\r"), t, h)
    case("packed.csv.gz", gzip.compress(plain().encode(), mtime=0), t, h)
    case("packed.zip", _zip({"mole.csv": plain()}), t, h)
    case("two_in_one.zip", _zip({"a.csv": plain(), "b.csv": plain()}), error="wanted one file in this archive, found 2")


def _zip(files: dict[str, str]) -> bytes:
    buffer = io.BytesIO()
    with zipfile.ZipFile(buffer, "w", zipfile.ZIP_DEFLATED) as archive:
        for name, text in files.items():
            archive.writestr(zipfile.ZipInfo(name, (2021, 1, 1, 0, 0, 0)), text)
    return buffer.getvalue()


def dates() -> None:
    t, h = times(), series()
    iso = "time,level (m)\n"
    utc = "time (UTC),level (m)\n"
    case("offset_z.csv", plain(iso, "%Y-%m-%dT%H:%M:%SZ"), t, h)
    case("offset_0930.csv", plain(iso, "%Y-%m-%dT%H:%M:%S+09:30"), t, h, offset_h=9.5)
    case("offset_minus.csv", plain(iso, "%Y-%m-%d %H:%M -0330"), t, h, offset_h=-3.5)
    case("day_first.csv", plain(utc, "%d/%m/%Y %H:%M"), t, h)
    case("month_first.csv", plain(utc, "%m/%d/%Y %H:%M"), t, h)
    case("two_digit_year.csv", plain(utc, "%d/%m/%y %H:%M"), t, h)
    early = table(utc, lambda t, h: f"{t:%d/%m/%Y %H:%M},{h:.3f}", start=EARLY)
    case("day_first_by_steps.csv", early, times(start=EARLY), h)
    case("month_name.csv", plain(utc, "%d-%b-%Y %H:%M:%S"), t, h)
    case("month_name_first.csv", plain(utc, "%b %d %Y %H:%M"), t, h)
    case("packed_stamp.txt", plain("time_utc,level_m\n", "%Y%m%d%H%M"), t, h)
    case("packed_date_and_clock.txt", plain("# UTC times\ndate clock level_m\n", "%Y%m%d %H%M", " "), t, h)
    case("packed_iso.csv", plain(iso, "%Y%m%dT%H%M%SZ"), t, h)
    case("day_of_year.txt", plain("# clock: UTC\nyear doy hour level_m\n", "%Y %j %H", " "), t, h)
    case("day_of_year_stamp.csv", plain(utc, "%Y-%jT%H:%M"), t, h)
    named = "# clock: UTC\nyear month day hour minute level_m\n"
    case("calendar_columns.txt", plain(named, "%Y %m %d %H %M", " "), t, h)
    case("calendar_without_names.txt", plain("", "%Y %m %d %H %M", " "), t, h, time_zone="UTC", unit="m")
    seconds = table("epoch,level_m\n", lambda t, h: f"{int(t.replace(tzinfo=UTC).timestamp())},{h:.3f}")
    case("epoch_seconds.csv", seconds, t, h)
    milli = table("timestamp;level_m\n", lambda t, h: f"{int(t.replace(tzinfo=UTC).timestamp())}000;{h:.3f}")
    case("epoch_milliseconds.csv", milli, t, h)
    ends = plain(utc).replace("2021-03-13 00:00", "2021-03-12 24:00")
    case("clock_24.csv", ends, t, h)
    tenths = table(
        "date,hour (UTC),level (m)\n", lambda t, h: f"{t:%Y-%m-%d},{t.hour + t.minute / 60:.1f},{h:.3f}", step_min=30
    )
    case("decimal_hours.csv", tenths, times(step_min=30), h)
    number = table(
        "date,hhmm,level (m),zone\n", lambda t, h: f"{t:%Y-%m-%d},{t.hour * 100 + t.minute},{h:.3f},UTC", step_min=30
    )
    case("hours_and_minutes_as_one_number.csv", number, times(step_min=30), h)
    case("am_pm.csv", plain(utc, "%m/%d/%Y %I:%M %p"), t, h)
    single = table(utc, lambda t, h: f"{t.day}.{t.month}.{t.year} {t.hour}:{t:%M},{h:.3f}")
    case("single_digits.csv", single, t, h)
    half = [START + timedelta(seconds=0.5 * n) for n in range(COUNT)]
    rows = "".join(f"{a:%Y-%m-%d %H:%M:%S}.{a.microsecond // 100000},{b:.3f}\n" for a, b in zip(half, h, strict=True))
    case("half_seconds.csv", utc + rows, half, h)
    case("station_column.csv", plain("station,date,time (UTC),level (m)\n", "9021,%Y-%m-%d,%H:%M"), t, h)
    last = table("level (m),time (UTC)\n", lambda t, h: f"{h:.3f},{t:%Y-%m-%d %H:%M}")
    case("time_last.csv", last, t, h)


def heights() -> None:
    t, h = times(), series()
    cm = [round(100 * value) for value in series(2)]
    case(
        "centimetres.csv",
        table("time (UTC),level (cm)\n", lambda t, v: f"{t:%Y-%m-%d %H:%M},{v:.0f}", cm),
        t,
        series(2),
    )
    mm = [1000 * value for value in h]
    case("millimetres.csv", table("# unit: mm\ntime_utc,level\n", lambda t, v: f"{t:%Y-%m-%d %H:%M},{v:.0f}", mm), t, h)
    feet = table("time_utc,height_ft_mllw\n", lambda t, v: f"{t:%Y-%m-%d %H:%M},{v:.3f}")
    case("feet.csv", feet, t, [value * 0.3048 for value in h])
    power = table("time (UTC),level (m)\n", lambda t, v: f"{t:%Y-%m-%d %H:%M},{v:.3E}")
    case("powers_of_ten.csv", power, t, h)
    signs = table("time (UTC),level (m)\n", lambda t, v: f"{t:%Y-%m-%d %H:%M},{v - 2:+.3f}")
    case("signs.csv", signs, t, [round(value - 2, 3) for value in h])
    typographic = signs.replace(",-", ",\N{MINUS SIGN}")
    case("typographic_minus.csv", typographic, t, [round(value - 2, 3) for value in h])
    marks = dict(zip((3, 7, 11, 15, 19, 23), ("-99.99", "9999", "", "NaN", "missing", "-"), strict=True))
    rows = [f"{a:%Y-%m-%d %H:%M},{marks.get(n, f'{b:.3f}')}" for n, (a, b) in enumerate(zip(t, h, strict=True))]
    gone = [None if n in marks else value for n, value in enumerate(h)]
    case("missing_marks.csv", "time (UTC),level (m)\n" + "\n".join(rows) + "\n", t, gone, flags=dict.fromkeys(marks, 9))
    absent = [line for n, line in enumerate(plain().splitlines()) if n not in (9, 10, 20)]
    keep = [n for n in range(COUNT) if n + 1 not in (9, 10, 20)]
    case("absent_rows.csv", "\n".join(absent), [t[n] for n in keep], [h[n] for n in keep])
    two = table("time (UTC),radar level (m),float level (m)\n", lambda t, v: f"{t:%Y-%m-%d %H:%M},{v + 5:.3f},{v:.3f}")
    case("two_sensors.csv", two, t, h, column="float level (m)")
    case("two_sensors_undeclared.csv", two, error=r"several columns may hold the height \('radar level \(m\)', 'float")
    beside = table(
        "time (UTC),water temperature (degC),water level (m),pressure (hPa),sigma\n",
        lambda t, v: f"{t:%Y-%m-%d %H:%M},11.2,{v:.3f},1013,0.004",
    )
    case("other_sensors.csv", beside, t, h)
    quality = [
        f"{a:%Y-%m-%d %H:%M},{b:.3f},{'B' if n == 4 else 'D' if n == 9 else 'G'}"
        for n, (a, b) in enumerate(zip(t, h, strict=True))
    ]
    (FOLDER / "quality.toml").write_text('quality_column = 3\nquality_bad = ["B"]\nquality_suspect = ["D"]\n')
    case(
        "quality.csv",
        "time (UTC),level (m),quality\n" + "\n".join(quality),
        t,
        h,
        flags={4: 4, 9: 3},
        layout="quality.toml",
    )


def order_of_rows() -> None:
    t, h = times(), series()
    lines = plain().splitlines()
    shuffled = [lines[0], *lines[16:], *lines[1:16]]
    case("unsorted.csv", "\n".join(shuffled), t, h)
    same = [*lines[:6], lines[5], *lines[6:], lines[1].split(",")[0] + ",1.111"]
    rejected = [(7, "same row again"), (33, "same time again with another height")]
    case("repeated_rows.csv", "\n".join(same), t, h, rejected=rejected)
    torn = lines.copy()
    torn[4], torn[9] = "2021-03-1", torn[9].split(",")[0] + ",1.2.3"
    reasons = [(5, "row is cut short"), (10, "height is not a number")]
    keep = [n for n in range(COUNT) if n not in (3, 8)]
    case("torn_rows.csv", "\n".join(torn), [t[n] for n in keep], [h[n] for n in keep], rejected=reasons)


def zones() -> None:
    h = series()
    autumn = times(start=datetime(2021, 10, 31), step_min=30)
    # In Paris clocks go back from 03:00 to 02:00 at 01:00 UTC: the series runs on in UTC from 22:00 the day before.
    local = [time if n < 6 else time - timedelta(hours=1) for n, time in enumerate(autumn)]
    rows = "".join(f"{a:%Y-%m-%d %H:%M},{b:.3f}\n" for a, b in zip(local, h, strict=True))
    declared = {"time_zone": "Europe/Paris"}
    case("clocks_go_back.csv", "time,level (m)\n" + rows, autumn, h, offset_h=2, **declared)
    spring = times(start=datetime(2021, 3, 28), step_min=60)
    local = [time if n < 2 else time + timedelta(hours=1) for n, time in enumerate(spring)]
    rows = "".join(f"{a:%Y-%m-%d %H:%M},{b:.3f}\n" for a, b in zip(local, h, strict=True))
    case("clocks_go_on.csv", "time zone: Europe/Paris\ntime,level (m)\n" + rows, spring, h, offset_h=1)
    hourly = table(
        "time zone: Europe/Paris\ntime,level (m)\n",
        lambda t, v: f"{t:%Y-%m-%d %H:%M},{v:.3f}",
        start=datetime(2021, 10, 31),
    )
    case("hour_shown_twice.csv", hourly, error=r"hour_shown_twice\.csv:5: the local time 2021-10-31 02:00 occurs twice")
    standard = plain("Time: EST,Level: m (MSL)\ntime,level\n")
    case("standard_time_abbreviation.csv", standard, times(), h, offset_h=-5)
    case("no_zone.csv", plain("time,level (m)\n"), error="nothing in this export states its time zone")
    case("local_time.csv", plain("local time,level (m)\n"), error="'local' is not one time zone")
    mixed = plain("time,level (m)\n", "%Y-%m-%dT%H:%MZ").replace("2021-03-13T02:00Z", "2021-03-13T02:00")
    case("some_offsets.csv", mixed, error=r"some_offsets\.csv:10: this time carries no offset")


def questions() -> None:
    short = table(
        "time (UTC),level (m)\n", lambda t, v: f"{t:%d/%m/%Y %H:%M},{v:.3f}", series(count=6), count=6, start=EARLY
    )
    case(
        "two_readings.csv",
        short,
        error=r"two_readings\.csv:2: the date in '04/03/2021 02:00' can be read day-month-year or",
    )
    case("no_unit.csv", plain("time (UTC),level\n"), error="states the unit of its heights; declare it")
    case("unknown_unit.csv", plain("time (UTC),level (fathoms)\n"), error="unknown unit 'fathoms'")
    swapped = plain("time (UTC),level (m)\n", "%d/%m/%Y %H:%M").replace("13/03/2021 05", "03/13/2021 05")
    case("mixed_orders.csv", swapped, error=r"mixed_orders\.csv:13: mixed date orders")
    comma = plain("time (UTC),level (m)\n").replace(".", ",")
    case("comma_for_two_things.csv", comma, error="rows have 3 cells and the header 2")
    days = table("date (UTC),level (m)\n", lambda t, v: f"{t:%Y-%m-%d},{v:.3f}", step_min=1440)
    case("days_only.csv", days, error="dates without a clock")


def main() -> None:
    """Write the whole corpus."""
    for part in (delimiters, junk, encodings, dates, heights, order_of_rows, zones, questions):
        part()
    lines = [f" {json.dumps(name)}: {json.dumps(entry)}" for name, entry in CASES.items()]
    (FOLDER / "expected.json").write_text("{\n" + ",\n".join(lines) + "\n}\n")


if __name__ == "__main__":
    main()
