"""A reviewer's word on flags: a small CSV that overrules the tests and stays in the trail.

Columns `from_utc`, `to_utc`, `flag`, `reason`; times ISO 8601 in UTC, both ends included.
"""

from __future__ import annotations

import csv
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np
import pandas as pd

from tidekit.errors import InputError
from tidekit.quality.screening import Screening
from tidekit.records.record import FLAG_FAIL, FLAG_GOOD, FLAG_MISSING, FLAG_NOT_EVALUATED, FLAG_SUSPECT

COLUMNS = ["from_utc", "to_utc", "flag", "reason"]
_ALLOWED = (FLAG_GOOD, FLAG_NOT_EVALUATED, FLAG_SUSPECT, FLAG_FAIL)


@dataclass(frozen=True)
class Override:
    """One spell whose flags a reviewer sets."""

    start: pd.Timestamp
    """First time. [UTC]"""
    end: pd.Timestamp
    """Last time. [UTC]"""
    flag: int
    """Flag to set: 1, 2, 3 or 4."""
    reason: str
    """Why."""


def read_overrides(path: str | Path) -> tuple[Override, ...]:
    """Read a reviewer's file.

    Raises
    ------
    InputError
        If the file is missing, a column is, or a row is impossible; names the line.
    """
    try:
        lines = Path(path).read_text(encoding="utf-8-sig").splitlines()
    except (OSError, UnicodeDecodeError) as error:
        message = f"cannot read this reviewer's file ({getattr(error, 'strerror', None) or 'not UTF-8'})"
        raise InputError(message, path=path) from error
    rows = list(csv.reader(lines))
    if not rows or [cell.strip() for cell in rows[0]] != COLUMNS:
        message = f"wanted the columns {','.join(COLUMNS)}"
        raise InputError(message, path=path, line=1)
    return tuple(_override(row, path, line) for line, row in enumerate(rows[1:], 2) if any(row))


def _override(row: list[str], path: str | Path, line: int) -> Override:
    cells = [cell.strip() for cell in row]
    try:
        start, end = (pd.Timestamp(cell) for cell in cells[:2])
        start, end = (t.tz_localize("UTC") if t.tzinfo is None else t.tz_convert("UTC") for t in (start, end))
        flag = int(cells[2])
    except (ValueError, IndexError) as error:
        message = f"cannot read this row ({error}); write {','.join(COLUMNS)}"
        raise InputError(message, path=path, line=line) from error
    if len(cells) != len(COLUMNS) or not cells[3] or flag not in _ALLOWED or end < start:
        message = "wanted an end at or after the start, a flag of 1, 2, 3 or 4, and a reason"
        raise InputError(message, path=path, line=line)
    return Override(start, end, flag, cells[3])


def apply_overrides(screening: Screening, overrides: tuple[Override, ...]) -> Screening:
    """Set the flags that a reviewer gave; missing samples stay missing, and what each test said is kept.

    Parameters
    ----------
    screening : Screening
        What the tests said.
    overrides : tuple of Override
        Later ones overrule earlier ones.

    Returns
    -------
    Screening
        With `reviewed` holding the reason of each sample set.
    """
    flags, reviewed = screening.flags.copy(), dict(screening.reviewed)
    index = screening.record.heights.index
    for override in overrides:
        spell = np.asarray((index >= override.start) & (index <= override.end)) & (flags != FLAG_MISSING)
        flags[spell] = override.flag
        reviewed |= dict.fromkeys(np.flatnonzero(spell).tolist(), override.reason)
    return replace(screening, flags=flags, reviewed=reviewed)
