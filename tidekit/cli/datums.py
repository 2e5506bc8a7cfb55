"""`tidekit datums`: tidal datums from observations and from predictions."""

from __future__ import annotations

import argparse
import re
from pathlib import Path

import numpy as np
import pandas as pd

from tidekit.cli.main import CAUTION, EXIT_DONE
from tidekit.cli.output import add_output_options, add_reading_options, print_json, reading_options, write_table
from tidekit.constituents.constants_table import read_constants
from tidekit.datums.observed import observed_datums
from tidekit.datums.predicted import EPOCH_YEARS, predicted_datums
from tidekit.datums.table import DatumTable
from tidekit.errors import AnalysisError, InputError
from tidekit.harmonic.analysis import analyse_record
from tidekit.records.source import network_gauge, open_source

_LABELS = {
    "form_number": "form number (K1 + O1) / (M2 + S2)",
    "tide_type": "type of tide",
    "hat_time": "time of HAT",
    "lat_time": "time of LAT",
    "tidal_days": "whole tidal days",
    "months": "months in the errors",
}
_YEARS = re.compile(r"(\d{4})-(\d{4})")


def add_parser(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Add the command."""
    parser = commands.add_parser(
        "datums",
        help="tidal datums from observations and predictions",
        description="Tidal datums by their definitions from a record, and from 19 years predicted from its constants "
        "(or from a table of constants alone), each with its standard deviation and its method.",
        epilog="example: tidekit datums network.toml:quill --out datums.csv",
    )
    parser.add_argument("source", metavar="SOURCE", help="an export, NETWORK.toml:gauge_id, or a table of constants")
    parser.add_argument("--gauge", metavar="ID", help="whose rows, where a table of constants has several gauges")
    parser.add_argument(
        "--years",
        metavar="FIRST-LAST",
        default="{}-{}".format(*EPOCH_YEARS),
        help="calendar years of the prediction (default: %(default)s)",
    )
    add_reading_options(parser)
    add_output_options(parser, table="the datums")
    parser.set_defaults(run=run)


def run(options: argparse.Namespace) -> int:
    """Run the command."""
    years = _years_of(options.years)
    tables, remarks = _tables(options, years)
    if options.out:
        write_table(pd.concat([table.to_frame() for table in tables], ignore_index=True).round(4), options.out)
    if options.json:
        print_json({"tables": [_document(table) for table in tables], "remarks": remarks, "caution": CAUTION})
        return EXIT_DONE
    for text in (*(_page(table) for table in tables), *remarks):
        print(text, end="\n\n")
    print(CAUTION)
    return EXIT_DONE


def _years_of(text: str) -> tuple[int, int]:
    found = _YEARS.fullmatch(text)
    if not found or int(found[2]) < int(found[1]):
        message = f"{text!r} is no span of years; write the first and the last, such as 1983-2001"
        raise InputError(message, key="--years")
    return int(found[1]), int(found[2])


def _tables(options: argparse.Namespace, years: tuple[int, int]) -> tuple[list[DatumTable], list[str]]:
    """Make the tables that the source allows, and remarks on what it does not."""
    constants_path, gauge = _constants_path(options.source)
    if constants_path is not None:
        constants = read_constants(constants_path, gauge=options.gauge)
        return [predicted_datums(constants, gauge=gauge or options.gauge or constants_path.stem, years=years)], []
    record = open_source(options.source, **reading_options(options))
    tables = [observed_datums(record)]
    try:
        constants = analyse_record(record).constants
        tables.append(predicted_datums(constants, gauge=record.station.id, years=years))
    except AnalysisError as error:
        return tables, [f"No predicted datums: {error}."]
    return tables, []


def _constants_path(source: str) -> tuple[Path | None, str]:
    """Table of constants that the source is or, as a gauge of a network, names; and the gauge's id there."""
    entry = network_gauge(source)
    if entry is not None:
        return entry.constants_path, entry.station.id
    return (Path(source) if _holds_constants(Path(source)) else None), ""


def _holds_constants(path: Path) -> bool:
    """Whether a file is a table of constants, by its first line that is no comment."""
    if not path.is_file():
        return False
    with path.open(encoding="utf-8-sig", errors="replace") as stream:
        header = next((line for line in stream if line.strip() and not line.startswith("#")), "")
    return "constituent" in [cell.strip() for cell in header.split(",")]


def _page(table: DatumTable) -> str:
    """Lay a table out for people: heading, period, datums, details, notes."""
    kind = table.methods[0].split(":")[0]
    above = table.vertical_reference or "the source's zero"
    lines = [f"{table.gauge}: datums {kind}, metres above {above}"]
    if table.first_time is not None and table.last_time is not None:
        lines.append(f"{table.first_time:%Y-%m-%d %H:%M} to {table.last_time:%Y-%m-%d %H:%M} UTC")
    lines.append(f"{'datum':<5} {'height':>8} {'sd':>6}  method")
    for name, height, spread, method in zip(table.names, table.height_m, table.height_sd_m, table.methods, strict=True):
        error = f"{spread:6.3f}" if np.isfinite(spread) else "     -"
        lines.append(f"{name:<5} {height:8.3f} {error}  {method.split(': ', 1)[-1]}")
    lines += [f"{_LABELS.get(name, name)}: {_short(value)}" for name, value in table.details.items()]
    lines += [f"note: {note}" for note in table.notes]
    return "\n".join(lines)


def _short(value: float | str) -> str:
    return value if isinstance(value, str) else f"{value:.4g}"


def _document(table: DatumTable) -> dict[str, object]:
    return {
        "gauge": table.gauge,
        "vertical_reference": table.vertical_reference,
        "first_time": table.first_time,
        "last_time": table.last_time,
        "datums": table.to_frame().drop(columns="gauge").round(4),
        "details": table.details,
        "notes": table.notes,
    }
