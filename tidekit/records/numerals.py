"""Numbers from matrices of bytes: the same float64 as Python's own reading, thousands of rows at a time."""

from __future__ import annotations

import re

import numpy as np
from numpy.typing import NDArray

_MOST_DIGITS = 15
"""Integers of so many digits, and powers of ten up to 22, are exact in float64: one division rounds correctly."""
_POWERS = 10.0 ** np.arange(_MOST_DIGITS + 1)
_MINUS, _PLUS, _ZERO = b"-+0"


def read_numbers(cells: NDArray[np.uint8], decimal: str = ".") -> NDArray[np.float64]:
    """Read decimal numbers.

    Parameters
    ----------
    cells : ndarray of uint8, shape (n, width)
        ASCII texts padded with zeros.
    decimal : str
        Decimal mark, ``.`` or ``,``.

    Returns
    -------
    ndarray, shape (n,)
        Numbers; NaN where a text is none.
    """
    mark = ord(decimal)
    mantissa = np.zeros(len(cells), dtype=np.int64)
    digits = np.zeros(len(cells), dtype=np.int64)
    places = np.zeros(len(cells), dtype=np.int64)
    pointed = np.zeros(len(cells), dtype=np.bool_)
    plain = np.ones(len(cells), dtype=np.bool_)
    for index in range(cells.shape[1]):
        byte = cells[:, index]
        digit = byte - _ZERO  # uint8: other bytes wrap to more than 9
        is_digit = digit <= 9
        mantissa = np.where(is_digit & (digits < _MOST_DIGITS), mantissa * 10 + digit, mantissa)
        digits += is_digit
        places += is_digit & pointed
        is_point = byte == mark
        plain &= is_digit | (byte == 0) | (is_point & ~pointed)
        if index == 0:
            plain |= (byte == _MINUS) | (byte == _PLUS)
        pointed |= is_point
    plain &= (digits > 0) & (digits <= _MOST_DIGITS)
    value = mantissa / _POWERS[np.minimum(places, _MOST_DIGITS)]
    value[cells[:, 0] == _MINUS] *= -1.0
    value[~plain] = np.nan
    for row in np.flatnonzero(~plain & (cells[:, 0] != 0)):
        value[row] = _by_python(bytes(cells[row]).rstrip(b"\0"), decimal)
    return value


def _by_python(text: bytes, decimal: str) -> float:
    plain = text.decode("latin-1").replace("\xe2\x88\x92", "-")  # the minus sign of typography, in UTF-8
    thousands = "." if decimal == "," else ","
    if thousands in plain:
        # Only whole groups of three before a decimal mark: 1.234 may be one and a bit, 1.234,5 may not.
        if not re.fullmatch(rf"[+-]?\d{{1,3}}(\{thousands}\d{{3}})+\{decimal}\d+", plain):
            return float("nan")
        plain = plain.replace(thousands, "")
    try:
        return float(plain.replace(decimal, ".")) if "_" not in plain else float("nan")
    except ValueError:
        return float("nan")
