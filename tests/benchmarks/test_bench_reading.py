"""Reading one-minute exports: time against a bare read of the same file, and memory against the series itself.

Small in every test run; ``python tests/benchmarks/test_bench_reading.py 20`` reads 20 years (10.5 million rows).
"""

from __future__ import annotations

import importlib
import sys
import tempfile
import time
import tracemalloc
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from tidekit.records.reading import read_record

MINUTES_A_YEAR = 525_960
MOST_TIMES_BARE = 12.0
"""Bound on the time against pyarrow's bare read, for files small enough that fixed costs count; 3 to 4 times was
measured at full size on two busy cores, where pyarrow uses both and the reader one."""
MOST_TIMES_SERIES = 3.0
"""Bound on the peak of memory, in times the series' own size (16 bytes a row)."""


def write_minutes(path: Path, years: float) -> int:
    """Write an export of one-minute rows; give its number of rows."""
    rows = int(years * MINUTES_A_YEAR)
    with path.open("w") as stream:
        stream.write("time (UTC),level (m)\n")
        for start in range(0, rows, 100_000):
            minutes = np.arange(start, min(start + 100_000, rows))
            times = np.datetime_as_string(np.datetime64("2001-01-01T00:00") + minutes)
            heights = 2.0 + 1.3 * np.sin(minutes * 2 * np.pi / 745.2)
            stream.writelines(f"{t.replace('T', ' ')},{h:.3f}\n" for t, h in zip(times, heights, strict=True))
    return rows


def measured(path: Path) -> dict[str, float]:
    """Seconds to read, seconds of a bare read, peak of memory over the series' size."""
    csv: Any = importlib.import_module("pyarrow.csv")
    start = time.perf_counter()
    csv.read_csv(path)
    bare = time.perf_counter() - start
    start = time.perf_counter()
    record = read_record(path)
    own = time.perf_counter() - start
    size = record.heights.memory_usage()
    del record
    tracemalloc.start()
    read_record(path)
    peak = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    return {"read_s": own, "bare_s": bare, "times_bare": own / bare, "times_series": peak / size}


def test_reading_keeps_to_its_bounds(tmp_path: Path) -> None:
    pytest.importorskip("pyarrow")
    rows = write_minutes(tmp_path / "minutes.csv", 1.0)
    found = measured(tmp_path / "minutes.csv")
    assert read_record(tmp_path / "minutes.csv").ledger.kept == rows
    assert found["times_bare"] < MOST_TIMES_BARE
    # Blocks in hand weigh beside so short a series; at 20 years they do not.
    assert found["times_series"] < 3 * MOST_TIMES_SERIES


if __name__ == "__main__":
    with tempfile.TemporaryDirectory() as folder:
        file = Path(folder) / "minutes.csv"
        print(write_minutes(file, float(sys.argv[1])), "rows", measured(file))
