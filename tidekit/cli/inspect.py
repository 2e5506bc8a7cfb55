"""`tidekit inspect`: what is in an export."""

from __future__ import annotations

import argparse
import sys
import textwrap
from collections import Counter
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd

from tidekit.cli.output import add_output_options, add_reading_options, print_json, reading_options
from tidekit.records.layout import write_layout
from tidekit.records.reading import ReadFile, read_file, record_of
from tidekit.records.record import GaugeRecord
from tidekit.records.writing import write_record

_GAPS_SHOWN, _LINES_SHOWN = 5, 5
_GAP_STEPS = 1.5
"""A step longer than so many ordinary ones is a gap."""
_SAME_STEP_H = 1e-4
_REGULAR = 0.5
"""Share of steps that must be the commonest for the record to have one."""
_LONG_BYTES = 20_000_000
_WIDTH, _INDENT = 100, 12


def add_parser(commands: Any) -> None:
    """Add the command to the parser."""
    parser = commands.add_parser(
        "inspect",
        help="what is in an export: layout, rows, span, step, gaps",
        description="Show what is in gauge exports: the layout found and why, every row accounted for, span and gaps.",
        epilog="example: tidekit inspect sample_series/exports/avelhead_2021.csv",
    )
    parser.add_argument("exports", metavar="EXPORT", nargs="+", type=Path, help="one gauge's export files")
    add_reading_options(parser)
    parser.add_argument("--save-layout", metavar="FILE", type=Path, help="save the first file's layout, as TOML")
    parser.add_argument("--out", metavar="FILE", type=Path, help="write the record to FILE (.csv, .parquet or .nc)")
    add_output_options(parser)
    parser.set_defaults(run=run)


def run(options: argparse.Namespace) -> int:
    """Inspect the exports."""
    declared = reading_options(options)
    files = [read_file(path, progress=_progress(path), **declared) for path in options.exports]
    if sys.stderr.isatty():
        print("\r\033[K", end="", file=sys.stderr)  # clear the line of progress
    record = record_of(files, options.exports)
    if options.out:
        write_record(record, options.out)
    if options.save_layout:
        write_layout(files[0].layout, options.save_layout)
    document = describe(record, files)
    if options.json:
        print_json(document)
    else:
        print(as_text(document))
    return 0


def _progress(path: Path) -> Callable[[int], None] | None:
    """Megabytes read, on a terminal and for long files only."""
    if not sys.stderr.isatty() or not path.is_file() or path.stat().st_size < _LONG_BYTES:
        return None

    def show(done: int) -> None:
        print(f"\r{path.name}: {done / 1e6:,.0f} MB read", end="\r", file=sys.stderr, flush=True)

    return show


def describe(record: GaugeRecord, files: Sequence[ReadFile]) -> dict[str, Any]:
    """What a record holds, as plain values.

    Parameters
    ----------
    record : GaugeRecord
        The record.
    files : sequence of ReadFile
        What was read from each of its files.

    Returns
    -------
    dict
        Files with their layouts and evidence, the ledger, span, step, gaps and range.
    """
    ledger, heights = record.ledger, record.heights.dropna()
    times = record.heights.index[record.usable]
    return {
        "files": [
            {
                "file": source.path,
                "sha256": source.sha256,
                "rows": file.rows.count,
                "layout": file.layout.describe(),
                "evidence": list(file.evidence),
                "unit": file.layout.unit,
                "time_zone": file.layout.time_zone,
            }
            for source, file in zip(record.sources, files, strict=True)
        ],
        "vertical_reference": record.station.vertical_reference,
        "rows": ledger.rows,
        "kept": ledger.kept,
        "flagged": ledger.flagged,
        "flags": {str(flag): count for flag, count in sorted(Counter(record.flags.tolist()).items())},
        "rejected": len(ledger.rejected),
        "adds_up": ledger.adds_up,
        "reasons": ledger.reasons,
        "rejected_rows": [{"file": row.path, "line": row.line, "reason": row.reason} for row in ledger.rejected],
        "first_utc": times[0] if len(times) else None,
        "last_utc": times[-1] if len(times) else None,
        "step_min": 60.0 * record.step_h,
        "regular_share": _regular_share(record),
        **_gaps(record, pd.DatetimeIndex(times)),
        "lowest_m": float(heights.min()) if len(heights) else None,
        "highest_m": float(heights.max()) if len(heights) else None,
    }


def _regular_share(record: GaugeRecord) -> float:
    """Share of steps that are the commonest."""
    steps_h = np.diff(record.times_h)
    return float(np.mean(np.abs(steps_h - record.step_h) < _SAME_STEP_H)) if len(steps_h) else 1.0


def _gaps(record: GaugeRecord, times: pd.DatetimeIndex) -> dict[str, Any]:
    """Spells without a usable height, the longest first."""
    steps_h = np.diff(record.times_h)
    long = np.flatnonzero(steps_h > _GAP_STEPS * record.step_h)
    order = long[np.argsort(-steps_h[long], kind="stable")]
    absent = np.round(steps_h[long] / record.step_h).astype(int) - 1 if len(long) else np.zeros(0, dtype=int)
    return {
        "gaps": len(long),
        "absent_samples": int(absent.sum()),
        "longest_gaps": [
            {"from_utc": times[n], "to_utc": times[n + 1], "hours": round(float(steps_h[n]), 3)}
            for n in order[:_GAPS_SHOWN]
        ],
    }


def as_text(found: dict[str, Any]) -> str:
    """The same for a terminal."""
    lines: list[str] = []
    for file in found["files"]:
        lines += _entry("File", f"{file['file']} ({file['rows']:,} rows)")
        lines += _entry("Layout", file["layout"])
        for sentence in file["evidence"]:
            lines += _entry("", sentence, bullet="- ")
    lines += _entry(
        "Rows",
        f"{found['rows']:,} = {found['kept']:,} kept + {found['flagged']:,} flagged + {found['rejected']:,} rejected",
    )
    for flag, words in (
        ("9", "missing value"),
        ("4", "bad by the export's own mark"),
        ("3", "in doubt by its own mark"),
    ):
        if flag in found["flags"]:
            lines += _entry("", f"{found['flags'][flag]:,} flagged {flag}: {words}", bullet="- ")
    for reason, count in found["reasons"].items():
        places = [row for row in found["rejected_rows"] if row["reason"] == reason]
        many = len(found["files"]) > 1
        shown = ", ".join(f"{row['file']}:{row['line']}" if many else str(row["line"]) for row in places[:_LINES_SHOWN])
        word = "line" if count == 1 else "lines"
        more = f" and {count - _LINES_SHOWN:,} more" if count > _LINES_SHOWN else ""
        lines += _entry("", f"{count:,} rejected: {reason} ({word} {shown}{more})", bullet="- ")
    if found["first_utc"] is None:
        return "\n".join([*lines, *_entry("Heights", "none")])
    lines += _entry("Span", f"{found['first_utc']:%Y-%m-%d %H:%M} to {found['last_utc']:%Y-%m-%d %H:%M} UTC")
    if np.isfinite(found["step_min"]):
        lines += _entry("Step", _step_words(found))
    for gap in found["longest_gaps"]:
        lines += _entry(
            "",
            f"{gap['hours']:g} h from {gap['from_utc']:%Y-%m-%d %H:%M} to {gap['to_utc']:%Y-%m-%d %H:%M}",
            bullet="- ",
        )
    reference = found["vertical_reference"] or "a reference that the export does not name"
    lines += _entry("Heights", f"{found['lowest_m']:.3f} to {found['highest_m']:.3f} m above {reference}")
    return "\n".join(lines)


def _step_words(found: dict[str, Any]) -> str:
    if found["regular_share"] < _REGULAR:
        return f"irregular, most often {found['step_min']:g} min"
    count, absent = found["gaps"], found["absent_samples"]
    if not count:
        return f"{found['step_min']:g} min; no gaps"
    word = "gap" if count == 1 else "gaps"
    return f"{found['step_min']:g} min; {count:,} {word}, {absent:,} samples absent"


def _entry(name: str, text: str, *, bullet: str = "") -> list[str]:
    """A named line of the listing, folded."""
    indent = " " * (_INDENT + len(bullet))
    return textwrap.wrap(
        text,
        _WIDTH,
        initial_indent=f"{name:<{_INDENT}}{bullet}",
        subsequent_indent=indent,
        break_long_words=False,
        break_on_hyphens=False,
    )
