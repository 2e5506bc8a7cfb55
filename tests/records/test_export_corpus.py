"""A corpus of small exports, each with the record that it holds or the question that it raises.

``exports/make.py`` writes files and expectations from invented series; the reader has no part in them.
"""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
import pytest
from numpy.testing import assert_allclose

from tidekit.errors import RecordError
from tidekit.records.reading import read_record

EXPORTS = Path(__file__).parent / "exports"
CASES: dict[str, dict[str, Any]] = json.loads((EXPORTS / "expected.json").read_text())
ROUNDING_M = 1e-12
"""Decimals of the file times an exact factor."""
READ = [name for name, case in CASES.items() if not case["error"]]
ASK = [name for name, case in CASES.items() if case["error"]]


def declared_in(case: dict[str, Any]) -> dict[str, Any]:
    return {key: str(EXPORTS / value) if key == "layout" else value for key, value in case["declared"].items()}


@pytest.mark.parametrize("name", READ)
def test_export_reads_as_its_series(name: str) -> None:
    case = CASES[name]
    record = read_record(EXPORTS / name, **declared_in(case))
    assert list(record.heights.index) == list(pd.DatetimeIndex(case["utc"]))
    assert_allclose(record.heights.to_numpy(), np.array(case["height_m"], dtype=float), rtol=0, atol=ROUNDING_M)
    assert record.flags.tolist() == [case["flags"].get(str(row), 2) for row in range(len(case["utc"]))]
    assert [[row.line, row.reason] for row in record.ledger.rejected] == case["rejected"]
    assert record.ledger.adds_up
    assert record.ledger.rows == len(case["utc"]) + len(case["rejected"])


@pytest.mark.parametrize("name", ASK)
def test_export_raises_the_right_question(name: str) -> None:
    with pytest.raises(RecordError, match=CASES[name]["error"]) as raised:
        read_record(EXPORTS / name)
    assert name in str(raised.value)
    assert "\n" not in str(raised.value)


def test_most_of_the_corpus_needs_no_declaration() -> None:
    undeclared = [name for name in READ if not CASES[name]["declared"]]
    assert len(CASES) >= 40
    assert len(undeclared) >= 36


def test_corpus_has_no_stray_file() -> None:
    assert {path.name for path in EXPORTS.iterdir() if path.is_file()} == {
        *CASES,
        "expected.json",
        "make.py",
        "quality.toml",
    }
