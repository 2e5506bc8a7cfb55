"""What every command shares: printing tables and JSON, writing tables, finding constants and records."""

from __future__ import annotations

import argparse
import json
import math
from collections.abc import Mapping
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd

from tidekit.files import write_text


def add_output_options(parser: argparse.ArgumentParser, *, table: str | None = None) -> None:
    """Add `--json`, and `--out FILE` where the command writes a table."""
    parser.add_argument("--json", action="store_true", help="print one JSON document and nothing else")
    if table:
        parser.add_argument("--out", metavar="FILE", type=Path, help=f"write {table} to FILE (CSV)")


def add_reading_options(parser: argparse.ArgumentParser) -> None:
    """Add what a user may declare of an export."""
    parser.add_argument(
        "--layout", metavar="FILE", type=Path, help="layout of the export (TOML), instead of recognising it"
    )
    parser.add_argument("--column", help="name or number of the column that holds the heights")
    parser.add_argument("--time-zone", help="zone of the times: UTC, UTC-8, Pacific/Auckland ...")
    parser.add_argument("--unit", help="unit of the heights: m, cm, mm, ft ...")


def reading_options(options: argparse.Namespace) -> dict[str, Any]:
    """Give the declarations of `add_reading_options` as keywords of the readers."""
    return {key: getattr(options, key) for key in ("layout", "column", "time_zone", "unit")}


def jsonable(value: Any) -> Any:
    """Turn numpy, pandas and dates into what JSON has; a number that is not finite becomes null."""
    if isinstance(value, Mapping):
        return {str(key): jsonable(entry) for key, entry in value.items()}
    if isinstance(value, pd.DataFrame):
        return jsonable(value.to_dict(orient="records"))
    if isinstance(value, np.ndarray):
        return jsonable(value.tolist())
    if isinstance(value, (list, tuple)):
        return [jsonable(entry) for entry in value]
    if isinstance(value, np.generic):
        return jsonable(value.item())
    if isinstance(value, float):
        return value if math.isfinite(value) else None
    if isinstance(value, pd.Timestamp):
        return value.isoformat()
    return value if value is None or isinstance(value, (str, int, bool)) else str(value)


def print_json(document: Mapping[str, Any]) -> None:
    """Print one JSON document."""
    print(json.dumps(jsonable(document), indent=2, allow_nan=False))


def write_table(frame: pd.DataFrame, path: Path) -> None:
    """Write a table as CSV, whole or not at all."""
    write_text(path, frame.to_csv(index=False, lineterminator="\n"))
