"""`tidekit inspect`: what is in an export."""

from __future__ import annotations

import argparse
from pathlib import Path
from typing import Any

import numpy as np

from tidekit.cli.output import add_output_options, add_reading_options, print_json, reading_options
from tidekit.records.layout import write_layout
from tidekit.records.reading import read_file, read_record
from tidekit.records.record import GaugeRecord

_SHOWN = 5


def add_parser(commands: Any) -> None:
    """Add the command to the parser."""
    parser = commands.add_parser(
        "inspect",
        help="what is in an export: layout, rows, span, step, gaps",
        description="Show what is in gauge exports: the layout found and why, every row accounted for, span and gaps.",
        epilog="example: tidekit inspect sample_series/exports/avel_head.csv",
    )
    parser.add_argument("exports", metavar="EXPORT", nargs="+", type=Path, help="one gauge's export files")
    add_reading_options(parser)
    parser.add_argument("--save-layout", metavar="FILE", type=Path, help="save the layout found, as TOML")
    add_output_options(parser)
    parser.set_defaults(run=run)


def run(options: argparse.Namespace) -> int:
    """Inspect the exports."""
    declared = reading_options(options)
    first = read_file(options.exports[0], **declared)
    record = read_record(options.exports, **declared)
    if options.save_layout:
        write_layout(first.layout, options.save_layout)
    document = {"evidence": list(first.evidence), **describe(record)}
    if options.json:
        print_json(document)
    else:
        print(_text(document))
    return 0


def describe(record: GaugeRecord) -> dict[str, Any]:
    """What a record holds, as plain values."""
    ledger, heights = record.ledger, record.heights.dropna()
    gaps = np.diff(record.times_h)
    long = np.flatnonzero(gaps > 1.5 * record.step_h)
    widest = long[np.argsort(-gaps[long], kind="stable")][:_SHOWN]
    times = record.heights.index[record.usable]
    return {
        "files": [source.path for source in record.sources],
        "layout": record.layout_name,
        "vertical_reference": record.station.vertical_reference,
        "rows": ledger.rows,
        "kept": ledger.kept,
        "flagged": ledger.flagged,
        "rejected": len(ledger.rejected),
        "adds_up": ledger.adds_up,
        "rejected_rows": [{"file": row.path, "line": row.line, "reason": row.reason} for row in ledger.rejected],
        "first_utc": times[0] if len(times) else None,
        "last_utc": times[-1] if len(times) else None,
        "step_min": 60.0 * record.step_h,
        "gaps": len(long),
        "longest_gaps": [{"after_utc": times[place], "hours": float(gaps[place])} for place in widest],
        "lowest_m": float(heights.min()) if len(heights) else None,
        "highest_m": float(heights.max()) if len(heights) else None,
    }


def _text(found: dict[str, Any]) -> str:
    lines = [f"Files      {', '.join(found['files'])}", f"Layout     {found['layout']}"]
    lines += [f"             {sentence}" for sentence in found["evidence"]]
    lines.append(
        f"Rows       {found['rows']}: {found['kept']} kept, {found['flagged']} missing, {found['rejected']} rejected"
    )
    rejected = found["rejected_rows"]
    lines += [f"             {row['file']}:{row['line']}: {row['reason']}" for row in rejected[:_SHOWN]]
    if len(rejected) > _SHOWN:
        lines.append(f"             ... and {len(rejected) - _SHOWN} more (--json lists all)")
    if found["first_utc"] is not None:
        lines.append(f"Span       {found['first_utc']:%Y-%m-%d %H:%M} to {found['last_utc']:%Y-%m-%d %H:%M} UTC")
        lines.append(f"Step       {found['step_min']:g} min, {found['gaps']} gaps")
        lines += [
            f"             {gap['hours']:.1f} h after {gap['after_utc']:%Y-%m-%d %H:%M}"
            for gap in found["longest_gaps"]
        ]
        reference = found["vertical_reference"] or "a reference that the export does not name"
        lines.append(f"Heights    {found['lowest_m']:.3f} to {found['highest_m']:.3f} m above {reference}")
    return "\n".join(lines)
