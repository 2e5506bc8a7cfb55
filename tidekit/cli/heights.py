"""`tidekit heights`: predicted heights over a period."""

from __future__ import annotations

import argparse

import numpy as np
import pandas as pd

from tidekit.cli.main import CAUTION, EXIT_DONE
from tidekit.cli.output import add_output_options, print_json, write_table
from tidekit.cli.periods import (
    add_prediction_options,
    constants_of,
    heading,
    iso_times,
    local_times,
    parse_step_h,
    period_of,
    prediction_document,
    zone_of,
)
from tidekit.errors import InputError
from tidekit.prediction.heights import predict_heights

_MOST_HEIGHTS = 20_000_000
"""More would not fit the memory of a small machine as a table; 19 years by the minute are 10 million."""


def add_parser(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Add the command."""
    parser = commands.add_parser(
        "heights",
        help="predicted heights over a period",
        description="Predict the height of the tide at a regular step over a period.",
        epilog="example: tidekit heights constants.csv --start 2031-04-05 --end 2031-04-06 --step 6min",
    )
    add_prediction_options(parser)
    parser.add_argument("--step", metavar="STEP", default="1h", help="such as 6min, 30s or 1h (default: %(default)s)")
    add_output_options(parser, table="the heights")
    parser.set_defaults(run=run)


def run(options: argparse.Namespace) -> int:
    """Run the command."""
    start, end = period_of(options)
    step = parse_step_h(options.step)
    count = int(np.ceil((end - start) / step - 1e-6))
    if count > _MOST_HEIGHTS:
        message = f"{options.step} makes {count} heights of this period; ask for {_MOST_HEIGHTS} at most"
        raise InputError(message, key="--step")
    constants = constants_of(options)
    t_h = start + step * np.arange(count, dtype=np.float64)
    times = iso_times(local_times(t_h, zone_of(options.time_zone)))
    frame = pd.DataFrame({"time": times, "height_m": np.round(predict_heights(constants, t_h), 4)})
    if options.out:
        write_table(frame, options.out)
    if options.json:
        print_json({**prediction_document(constants, options), "heights": frame})
        return EXIT_DONE
    if options.out:
        print(f"{count} heights in {options.out}")
    else:
        print(heading("Predicted heights", constants, options.time_zone))
        print(frame.to_string(index=False, float_format="%.3f"))
    print(CAUTION)
    return EXIT_DONE
