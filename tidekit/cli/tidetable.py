"""`tidekit tidetable`: high and low waters over a period."""

from __future__ import annotations

import argparse

import pandas as pd

from tidekit.cli.main import CAUTION, EXIT_DONE
from tidekit.cli.output import add_output_options, print_json, write_table
from tidekit.cli.periods import (
    add_prediction_options,
    constants_of,
    heading,
    iso_times,
    period_of,
    prediction_document,
    zone_of,
)
from tidekit.prediction.tide_table import tide_table

_KINDS = "HH higher and H lower high water of the tidal day, LL lower and L higher low water"


def add_parser(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Add the command."""
    parser = commands.add_parser(
        "tidetable",
        help="high and low waters over a period",
        description=f"Predict the times and heights of high and low waters. Kinds: {_KINDS}.",
        epilog="example: tidekit tidetable constants.csv --start 2031-04-05 --end 2031-04-12 "
        "--time-zone Pacific/Auckland",
    )
    add_prediction_options(parser)
    add_output_options(parser, table="the tide table")
    parser.set_defaults(run=run)


def run(options: argparse.Namespace) -> int:
    """Run the command."""
    start, end = period_of(options)
    constants = constants_of(options)
    table = tide_table(constants, start, end, time_zone=zone_of(options.time_zone))
    times = iso_times(pd.DatetimeIndex(table["time"]))
    frame = table.assign(time=times, height_m=table["height_m"].round(4))
    if options.out:
        write_table(frame, options.out)
    if options.json:
        print_json({**prediction_document(constants, options), "waters": frame})
        return EXIT_DONE
    if options.out:
        print(f"{len(frame)} waters in {options.out}")
    else:
        print(heading("High and low waters", constants, options.time_zone))
        to_the_minute = [time[:16].replace("T", " ") + time[19:] for time in times]
        print(frame.assign(time=to_the_minute).to_string(index=False, float_format="%.2f"))
        print(_KINDS)
    print(CAUTION)
    return EXIT_DONE
