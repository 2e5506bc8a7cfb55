"""`tidekit demo`: write the invented demonstration network."""

from __future__ import annotations

import argparse
from pathlib import Path
from typing import Any

from tidekit.cli.output import add_output_options, print_json
from tidekit.demo.write import SEED, write_demo


def add_parser(commands: Any) -> None:
    """Add the command to the parser."""
    parser = commands.add_parser(
        "demo",
        help="write the invented demonstration network",
        description="Write an invented coast of ten gauges, a year of hourly heights each, four of them faulty, with "
        "the truth beside it. Heights, names and places are invented.",
        epilog="example: tidekit demo my_demo && tidekit audit my_demo/network.toml --out my_audit",
    )
    parser.add_argument("folder", metavar="DIR", type=Path, help="where to write it")
    parser.add_argument("--seed", type=int, default=SEED, help="seed of weather, noise and gaps (default %(default)s)")
    add_output_options(parser)
    parser.set_defaults(run=run)


def run(options: argparse.Namespace) -> int:
    """Write the network."""
    files = write_demo(options.folder, seed=options.seed)
    if options.json:
        print_json({"files": [str(path) for path in files]})
    else:
        print(f"{len(files)} files written; next: tidekit audit {files[0]} --out {options.folder}_audit")
    return 0
