"""Cut blocks of lines into cells: regular lines by array operations, lines with quotes one by one.

The cells of a column travel as a matrix of bytes, a row each, padded with zeros: what the readers of times and numbers
take.
"""

from __future__ import annotations

import csv
from collections.abc import Iterable
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.lib.stride_tricks import sliding_window_view
from numpy.typing import NDArray

from tidekit.records.decoding import Block
from tidekit.records.layout import BLANKS, FIXED, Layout

Bytes = NDArray[np.uint8]
Places = NDArray[np.int64]
WIDEST_CELL = 48
"""A longer cell is no time and no number."""
_FEED, _RETURN, _SPACE, _TAB, _QUOTE, _TOO_WIDE = b'\n\r \t"?'


@dataclass(frozen=True, eq=False)
class Cells:
    """The wanted columns of a block's rows."""

    line: NDArray[np.int64]
    """Line number of each row, shape (n,)."""
    columns: dict[int, Bytes]
    """Cells of each wanted column (from 1), shape (n, width)."""
    short: NDArray[np.bool_]
    """Rows that end before the last wanted column, shape (n,)."""

    def text(self, row: int, columns: Iterable[int]) -> str:
        """Cells of one row, joined by a blank."""
        return " ".join(bytes(self.columns[c][row]).rstrip(b"\0").decode("latin-1") for c in columns)


def cut(block: Block, layout: Layout, wanted: Iterable[int]) -> Cells:
    """Cut the rows of a block.

    Parameters
    ----------
    block : Block
        Whole lines.
    layout : Layout
        Delimiter, first row, comment mark.
    wanted : iterable of int
        Columns, from 1.

    Returns
    -------
    Cells
        Rows from `layout.first_row` on, without blank and comment lines.
    """
    data = np.frombuffer(block.data + bytes(WIDEST_CELL), dtype=np.uint8)
    ends = np.flatnonzero(data == _FEED)
    whole_starts = np.concatenate(([0], ends[:-1] + 1))
    line = block.first_line + np.arange(len(ends), dtype=np.int64)
    starts, ends = _trimmed(data, whole_starts, ends, blanks=(_SPACE, _RETURN))
    rows = (line >= layout.first_row) & (ends > starts)
    if layout.comment:
        rows &= ~_begins_with(data, starts, layout.comment.encode())
    # Columns of fixed width count from the line's first character, a blank or not.
    starts, ends, line = (whole_starts if layout.delimiter == FIXED else starts)[rows], ends[rows], line[rows]
    spans = _spans(data, starts, ends, layout, sorted(set(wanted)))
    short = np.zeros(len(starts), dtype=np.bool_)
    texts: dict[int, Bytes] = {}
    for column, (first, last) in spans.items():
        short |= first < 0
        texts[column] = _gather(data, *_trimmed(data, np.maximum(first, 0), last, blanks=(_SPACE, _TAB)))
    if _QUOTE in block.data and layout.delimiter not in (BLANKS, FIXED):
        low, high = _within(np.flatnonzero(data == _QUOTE), starts, ends)
        short, texts = _recut_quoted(block.data, starts, ends, np.flatnonzero(high > low), layout, short, texts)
    return Cells(line, texts, short)


def _spans(
    data: Bytes, starts: Places, ends: Places, layout: Layout, columns: list[int]
) -> dict[int, tuple[Places, Places]]:
    """Start and end of each column's cell in each line; -1 and 0 where the line is too short."""
    if layout.delimiter == FIXED:
        edges = (*layout.edges, 1 + WIDEST_CELL + layout.edges[-1])
        return {
            c: (np.minimum(starts + edges[c - 1] - 1, ends), np.minimum(starts + edges[c] - 1, ends)) for c in columns
        }
    if layout.delimiter == BLANKS:
        blank = (data == _SPACE) | (data == _TAB) | (data == _FEED) | (data == _RETURN)
        change = np.diff(np.concatenate(([True], blank, [True])).astype(np.int8))
        opens, closes = np.flatnonzero(change == -1), np.flatnonzero(change == 1)
        low, high = _within(opens, starts, ends)
        return {c: _word(opens, closes, low + c - 1, high) for c in columns}
    marks = np.flatnonzero(data == ord(layout.delimiter))
    low, high = _within(marks, starts, ends)
    padded = np.concatenate((marks, [0, 0]))
    return {c: _cell(padded, starts, ends, low + c - 1, high, first=c == 1) for c in columns}


def _word(opens: Places, closes: Places, place: Places, high: Places) -> tuple[Places, Places]:
    """The words at a place of the list, if still in their line."""
    short, place = place >= high, np.minimum(place, len(opens) - 1)
    return np.where(short, -1, opens[place]), np.where(short, 0, closes[place])


def _cell(
    padded: Places, starts: Places, ends: Places, after: Places, high: Places, *, first: bool
) -> tuple[Places, Places]:
    """The cells before the delimiters at a place of the list, or the lines' ends."""
    last = np.where(after < high, padded[np.minimum(after, len(padded) - 1)], ends)
    if first:
        return starts, last
    short = after > high
    begin = padded[np.minimum(after, len(padded) - 1) - 1] + 1
    return np.where(short, -1, begin), np.where(short, 0, last)


def _within(places: Places, starts: Places, ends: Places) -> tuple[Places, Places]:
    """Index of the first place in each span, and of the first behind it."""
    n = len(starts)
    each = len(places) // n if n else 0
    if each and each * n == len(places):
        table = places.reshape(n, each)
        if bool((table[:, 0] >= starts).all()) and bool((table[:, -1] < ends).all()):
            low = np.arange(n) * each
            return low, low + each
    return np.searchsorted(places, starts), np.searchsorted(places, ends)


def _trimmed(data: Bytes, starts: Places, ends: Places, *, blanks: tuple[int, ...]) -> tuple[Places, Places]:
    """Spans without blanks at their ends."""
    is_blank = np.zeros(256, dtype=np.bool_)
    is_blank[list(blanks)] = True
    starts, ends = starts.copy(), ends.copy()
    for move, place in ((1, starts), (-1, ends)):
        behind = 0 if move == 1 else 1
        todo = np.flatnonzero(is_blank[data[place - behind]] & (ends > starts))
        while len(todo):
            place[todo] += move
            todo = todo[ends[todo] > starts[todo]]
            todo = todo[is_blank[data[place[todo] - behind]]]
    return starts, ends


def _begins_with(data: Bytes, starts: Places, mark: bytes) -> NDArray[np.bool_]:
    found = np.ones(len(starts), dtype=np.bool_)
    for offset, byte in enumerate(mark):
        found &= data[np.minimum(starts + offset, len(data) - 1)] == byte
    return found


def _gather(data: Bytes, starts: Places, ends: Places) -> Bytes:
    """Cells as rows of a matrix; one too wide begins with a mark that neither time nor number has."""
    lengths = np.maximum(ends - starts, 0)
    width = min(max(int(lengths.max(initial=0)), 1), WIDEST_CELL)
    matrix: Bytes = sliding_window_view(data, width)[starts]
    if int(lengths.min(initial=width)) < width:
        matrix[np.arange(width) >= lengths[:, None]] = 0
    matrix[lengths > WIDEST_CELL, 0] = _TOO_WIDE
    return matrix


def as_matrix(texts: list[bytes]) -> Bytes:
    """Matrix of bytes of some texts, shape (n, width)."""
    array = np.array([text if len(text) <= WIDEST_CELL else b"?" for text in texts] or [b"\0"], dtype=np.bytes_)
    width = max(array.dtype.itemsize, 1)
    return np.frombuffer(array.astype(f"S{width}").tobytes(), dtype=np.uint8).reshape(-1, width)[: len(texts)].copy()


def _recut_quoted(
    data: bytes,
    starts: Places,
    ends: Places,
    quoted: Places,
    layout: Layout,
    short: NDArray[np.bool_],
    texts: dict[int, Bytes],
) -> tuple[NDArray[np.bool_], dict[int, Bytes]]:
    """Cut lines that hold quotes by the rules of quoted cells."""
    rows = [split(data[starts[n] : ends[n]].decode("latin-1"), layout.delimiter) for n in quoted]
    short = short.copy()
    short[quoted] = [len(row) < max(texts) for row in rows]
    out = {}
    for column, matrix in texts.items():
        cells = as_matrix([row[column - 1].encode("latin-1") if len(row) >= column else b"" for row in rows])
        width = max(matrix.shape[1], cells.shape[1])
        whole = np.zeros((len(matrix), width), dtype=np.uint8)
        whole[:, : matrix.shape[1]] = matrix
        whole[quoted] = 0
        whole[quoted, : cells.shape[1]] = cells
        out[column] = whole
    return short, out


def split(line: str, delimiter: str, edges: tuple[int, ...] = ()) -> list[str]:
    """Cells of one line, without blanks at their ends."""
    if delimiter == BLANKS:
        return line.split()
    if delimiter == FIXED:
        bounds = [edge - 1 for edge in edges] + [len(line) + 1]
        return [line[a:b].strip() for a, b in pairwise(bounds)]
    if '"' in line:
        try:
            return [cell.strip() for cell in next(csv.reader([line], delimiter=delimiter, skipinitialspace=True))]
        except (csv.Error, StopIteration):
            pass  # a stray quote: cut at every delimiter
    return [cell.strip() for cell in line.split(delimiter)]
