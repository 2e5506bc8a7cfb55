"""Join the rows of several files: sorted, one height a time, every repeated row accounted for."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from tidekit.records.ledger import RejectedRow
from tidekit.records.rows import Rows

SAME_ROW, OTHER_HEIGHT = "same row again", "same time again with another height"
_SAME_M = 1e-9
"""Heights of the same value written in two units differ by rounding only."""


@dataclass(frozen=True, eq=False)
class Joined:
    """Rows sorted by time, no time twice, each shape (n,)."""

    utc: NDArray[np.datetime64]
    """Times. [UTC]"""
    height_m: NDArray[np.float64]
    """Heights; NaN where missing. [m]"""
    flag: NDArray[np.int8]
    """Quality flags."""
    rejected: tuple[RejectedRow, ...]
    """Rows rejected in reading and in joining, by file and line."""


def join(files: Sequence[Rows]) -> Joined:
    """Join files.

    Parameters
    ----------
    files : sequence of Rows
        Files in the order of precedence: where heights differ, the first stays.

    Returns
    -------
    Joined
        Of the rows with one time, the first with a height stays, or the first if none has one.
    """
    if len(files) == 1 and bool((np.diff(files[0].utc) > np.timedelta64(0)).all()):
        file = files[0]  # the common case, without a copy
        return Joined(file.utc, file.height_m, file.flag, file.rejected)
    utc = np.concatenate([file.utc for file in files])
    height_m = np.concatenate([file.height_m for file in files])
    flag = np.concatenate([file.flag for file in files])
    file_of = np.repeat(np.arange(len(files)), [len(file.utc) for file in files])
    line = np.concatenate([file.line for file in files])
    rejected = [row for file in files for row in file.rejected]
    if not bool((np.diff(utc) > np.timedelta64(0)).all()):
        order = np.lexsort((np.arange(len(utc)), np.isnan(height_m), utc))
        utc, height_m, flag = utc[order], height_m[order], flag[order]
        file_of, line = file_of[order], line[order]
    new = np.concatenate(([True], utc[1:] != utc[:-1])) if len(utc) else np.zeros(0, dtype=np.bool_)
    if not new.all():
        kept = height_m[new][np.cumsum(new) - 1]
        same = (np.abs(kept - height_m) <= _SAME_M) | np.isnan(height_m)
        rejected += [
            RejectedRow(files[file_of[row]].path, int(line[row]), SAME_ROW if same[row] else OTHER_HEIGHT)
            for row in np.flatnonzero(~new)
        ]
    place = {file.path: number for number, file in reversed([*enumerate(files)])}
    rejected.sort(key=lambda row: (place[row.path], row.line))
    return Joined(utc[new], height_m[new], flag[new], tuple(rejected))
