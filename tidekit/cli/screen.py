"""`tidekit screen`: quality flags and what raised them."""

from __future__ import annotations

import argparse
from dataclasses import asdict
from pathlib import Path
from typing import Any

import pandas as pd

from tidekit.cli.main import EXIT_DONE, EXIT_FINDINGS
from tidekit.cli.output import add_output_options, add_reading_options, print_json, reading_options, write_table
from tidekit.errors import InputError
from tidekit.files import replacing
from tidekit.quality.overrides import apply_overrides, read_overrides
from tidekit.quality.screening import Screening, screen
from tidekit.records.record import FLAG_FAIL, FLAG_SUSPECT
from tidekit.records.source import open_source
from tidekit.report.figures_record import draw_record

_WORDS = {1: "good", 2: "not evaluated", 3: "suspect", 4: "fail", 9: "missing"}
_PICTURES = (".png", ".svg", ".pdf")
_SHOWN = 12


def add_parser(commands: Any) -> None:
    """Add the command to the parser."""
    parser = commands.add_parser(
        "screen",
        help="quality flags and what raised them",
        description="Screen a record with the tests of the IOOS water-level manual, thresholds derived from the "
        "gauge's own tide and noise and shown. Flags: 1 good, 2 not evaluated, 3 suspect, 4 fail, 9 missing.",
        epilog="example: tidekit screen sample_series/network.toml:dellisk --out flags.csv --picture flags.png. "
        "Exit code 1: samples fail.",
    )
    parser.add_argument("source", metavar="SOURCE", help="an export, or NETWORK.toml:gauge_id")
    parser.add_argument("--review", metavar="FILE", type=Path, help="a reviewer's flags (from_utc,to_utc,flag,reason)")
    parser.add_argument("--picture", metavar="FILE", type=Path, help="draw the record and its flags (png, svg or pdf)")
    add_reading_options(parser)
    add_output_options(parser, table="the flags")
    parser.set_defaults(run=run)


def run(options: argparse.Namespace) -> int:
    """Screen the record."""
    if options.picture and options.picture.suffix.lower() not in _PICTURES:
        message = f"cannot draw a {options.picture.suffix or 'nameless'} picture; wanted {', '.join(_PICTURES)}"
        raise InputError(message, path=options.picture)
    found = screen(open_source(options.source, **reading_options(options)))
    if options.review:
        found = apply_overrides(found, read_overrides(options.review))
    if options.out:
        write_table(found.to_frame(), options.out)
    if options.picture:
        with replacing(options.picture) as part:
            draw_record(found).savefig(part, format=options.picture.suffix.lower()[1:], dpi=130)
    if options.json:
        print_json(_document(found))
    else:
        print(_text(found))
    return EXIT_FINDINGS if (found.flags == FLAG_FAIL).any() else EXIT_DONE


def _counts(found: Screening) -> dict[str, int]:
    return {word: int((found.flags == flag).sum()) for flag, word in _WORDS.items()}


def _raised(found: Screening) -> dict[str, dict[str, int]]:
    return {
        test: {"suspect": int((flags == FLAG_SUSPECT).sum()), "fail": int((flags == FLAG_FAIL).sum())}
        for test, flags in found.by_test.items()
    }


def _flagged(found: Screening) -> pd.DataFrame:
    frame = found.to_frame()
    frame["reason"] = [found.reviewed.get(n, "") for n in range(len(frame))]
    return frame[frame["raised_by"] != ""]


def _document(found: Screening) -> dict[str, Any]:
    return {
        "gauge": found.record.station.id,
        "samples": len(found.flags),
        "flags": _counts(found),
        "raised_by_test": _raised(found),
        "thresholds": asdict(found.thresholds),
        "flagged": _flagged(found),
    }


def _text(found: Screening) -> str:
    counts = ", ".join(f"{count} {word}" for word, count in _counts(found).items() if count)
    lines = [
        f"{found.record.station.label}: {len(found.flags)} samples: {counts}",
        "",
        f"{'test':<20}{'suspect':>9}{'fail':>7}",
    ]
    lines += [f"{test:<20}{n['suspect']:>9}{n['fail']:>7}" for test, n in _raised(found).items()]
    lines += ["", "thresholds of this gauge"]
    for name, value in asdict(found.thresholds).items():
        shown = " to ".join(f"{part:.3f}" for part in value) if isinstance(value, tuple) else f"{value:.4g}"
        lines.append(f"  {name:<22}{shown}")
    flagged = _flagged(found).sort_values("flag", ascending=False, kind="stable")
    if len(flagged):
        lines += ["", "flagged samples, the worst first"]
        for row in flagged.head(_SHOWN).itertuples(index=False):
            lines.append(
                f"  {row.time_utc}  {row.height_m:8.3f} m  flag {row.flag}  {row.raised_by} {row.reason}".rstrip()
            )
        if len(flagged) > _SHOWN:
            lines.append(f"  ... and {len(flagged) - _SHOWN} more (--out or --json give all)")
    return "\n".join(lines)
