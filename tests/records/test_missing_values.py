"""Numbers that may stand for no value: as the record shows, never a common height dropped."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from tidekit.records.missing_values import USUAL_NUMBERS
from tidekit.records.reading import read_record
from tidekit.records.record import FLAG_MISSING


@pytest.fixture(autouse=True)
def in_folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)


def write(heights: list[float], unit: str) -> str:
    rows = "".join(f"2021-03-{1 + n // 24:02d} {n % 24:02d}:00,{value:g}\n" for n, value in enumerate(heights))
    Path("mole.csv").write_text(f"time (UTC),level ({unit})\n{rows}")
    return "mole.csv"


def tide(count: int = 240) -> list[float]:
    """An invented tide of 1.5 m about its mean. [cm]"""
    return [round(150 * np.sin(2 * np.pi * n / 12.42)) for n in range(count)]


def test_minus_99_centimetres_is_a_height() -> None:
    heights = tide()
    heights[50] = -99
    record = read_record(write(heights, "cm"))
    assert record.ledger.kept == 240
    assert record.heights.iloc[50] == pytest.approx(-0.99)


@pytest.mark.parametrize("mark", USUAL_NUMBERS)
def test_a_mark_far_from_all_else_is_missing(mark: float) -> None:
    heights = [value / 100 for value in tide()]
    heights[50:53] = [mark] * 3
    record = read_record(write(heights, "m"))
    assert record.flags.iloc[50:53].tolist() == [FLAG_MISSING] * 3
    assert np.isnan(record.heights.iloc[50:53]).all()
    assert (record.ledger.kept, record.ledger.flagged) == (237, 3)


def test_a_declared_number_is_missing_wherever_it_lies() -> None:
    heights = tide()
    heights[50] = -99
    Path("layout.toml").write_text('missing = ["-99"]\n')
    assert read_record(write(heights, "cm"), layout="layout.toml").flags.iloc[50] == FLAG_MISSING


def test_a_height_that_is_no_mark_stays_however_far() -> None:
    heights = tide()
    heights[50] = 998
    assert read_record(write(heights, "cm")).heights.iloc[50] == pytest.approx(9.98)


def test_nothing_but_marks_is_a_record_without_heights() -> None:
    record = read_record(write([-999.0] * 30, "m"))
    assert (record.ledger.kept, record.ledger.flagged) == (0, 30)
