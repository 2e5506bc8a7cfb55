"""Which cells stand for no value: texts always, numbers such as -99 only where the record shows that they do.

In metres -99 is no water level; in centimetres it is a common one.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from tidekit.records.cutting import Bytes, as_matrix
from tidekit.records.layout import Layout
from tidekit.records.numerals import read_numbers
from tidekit.records.record import FLAG_MISSING
from tidekit.records.units import METRES

USUAL_NUMBERS = (-99.0, -99.9, -99.99, -99.999, -999.0, -999.9, -9999.0, 9999.0, 99999.0, -32768.0)
"""Numbers that exports write where there is no value (common practice, no source)."""
_SMALLEST_SPAN_M = 0.1


def declared_missing(texts: Bytes, value: NDArray[np.float64], layout: Layout) -> NDArray[np.bool_]:
    """Find cells that the layout's marks name.

    Parameters
    ----------
    texts : ndarray of uint8, shape (n, width)
        Cells of the heights.
    value : ndarray, shape (n,)
        The same as numbers; NaN where they are none.
    layout : Layout
        Its marks; numbers among them match by value.

    Returns
    -------
    ndarray of bool, shape (n,)
        Which are missing.
    """
    marks = as_matrix([mark.encode("latin-1", "replace") for mark in layout.missing])
    numbers = read_numbers(marks, ".")
    missing = np.isin(value, numbers[np.isfinite(numbers)])
    if "" in layout.missing:
        missing |= texts[:, 0] == 0
    for row in np.flatnonzero(~missing & ~np.isfinite(value)):
        missing[row] = bytes(texts[row]).rstrip(b"\0").decode("latin-1") in layout.missing
    return missing


def usual_numbers_m(layout: Layout) -> NDArray[np.float64]:
    """The usual numbers in the layout's unit. [m]"""
    return np.array(USUAL_NUMBERS) * METRES[str(layout.unit)]


def drop_isolated_marks(height_m: NDArray[np.float64], flag: NDArray[np.int8], layout: Layout) -> None:
    """Set usual numbers to NaN and flag 9, in place, where they lie farther from all else than all else spans.

    Parameters
    ----------
    height_m : ndarray, shape (n,)
        Heights of a whole file. [m]
    flag : ndarray of int8, shape (n,)
        Their flags.
    layout : Layout
        For its unit.
    """
    usual = usual_numbers_m(layout)
    marked = np.zeros(len(height_m), dtype=np.bool_)
    for mark in usual:
        marked |= height_m == mark
    if not marked.any():
        return
    others = height_m[~marked & np.isfinite(height_m)]
    low, high = np.percentile(others, [1, 99]) if len(others) else (0.0, 0.0)
    span = max(high - low, _SMALLEST_SPAN_M)
    gone = marked & ((height_m < low - span) | (height_m > high + span))
    height_m[gone] = np.nan
    flag[gone] = FLAG_MISSING
