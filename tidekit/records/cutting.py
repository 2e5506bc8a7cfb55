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
from numpy.typing import NDArray

from tidekit.records.decoding import Block
from tidekit.records.layout import BLANKS, FIXED, Layout

Bytes = NDArray[np.uint8]
WIDEST_CELL = 48
"""A longer cell is no time and no number; it is cut there, and so read as neither."""
_FEED, _RETURN, _SPACE, _TAB, _QUOTE = b'\n\r \t"'


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
    columns = sorted(set(wanted))
    data = np.frombuffer(block.data, dtype=np.uint8)
    ends = np.flatnonzero(data == _FEED)
    starts = np.concatenate(([0], ends[:-1] + 1))
    line = block.first_line + np.arange(len(starts), dtype=np.int64)
    starts, ends = _trimmed(data, starts, ends, blanks=(_SPACE, _RETURN))
    rows = (line >= layout.first_row) & (ends > starts)
    if layout.comment:
        rows &= ~_begins_with(data, starts, layout.comment.encode())
    starts, ends, line = starts[rows], ends[rows], line[rows]
    if layout.delimiter == FIXED:
        starts = block_line_starts(data, starts)
    quoted = _counts(np.flatnonzero(data == _QUOTE), starts, ends) > 0 if _QUOTE in block.data else None
    spans = {column: _span(data, starts, ends, layout, column) for column in columns}
    short = np.zeros(len(starts), dtype=np.bool_)
    texts: dict[int, Bytes] = {}
    for column, (first, last) in spans.items():
        short |= first < 0
        texts[column] = _gather(data, *_trimmed(data, np.maximum(first, 0), last, blanks=(_SPACE, _TAB)))
    if quoted is not None and quoted.any() and layout.delimiter not in (BLANKS, FIXED):
        short, texts = _recut_quoted(block.data, starts, ends, np.flatnonzero(quoted), layout, short, texts)
    return Cells(line, texts, short)


def block_line_starts(data: Bytes, starts: NDArray[np.int64]) -> NDArray[np.int64]:
    """Starts of lines before their leading blanks: columns of fixed width count from there."""
    feeds = np.flatnonzero(data == _FEED)
    before = np.searchsorted(feeds, starts) - 1
    return np.where(before >= 0, feeds[before] + 1, 0)


def _counts(places: NDArray[np.int64], starts: NDArray[np.int64], ends: NDArray[np.int64]) -> NDArray[np.int64]:
    """How many places lie in each span."""
    return np.searchsorted(places, ends) - np.searchsorted(places, starts)


def _span(
    data: Bytes, starts: NDArray[np.int64], ends: NDArray[np.int64], layout: Layout, column: int
) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Start and end of a column's cell in each line; -1 and 0 where the line is too short."""
    if layout.delimiter == FIXED:
        edges = (*layout.edges, 1 + WIDEST_CELL + layout.edges[-1])
        first = np.minimum(starts + edges[column - 1] - 1, ends)
        return first, np.minimum(starts + edges[column] - 1, ends)
    if layout.delimiter == BLANKS:
        blank = (data == _SPACE) | (data == _TAB) | (data == _FEED) | (data == _RETURN)
        change = np.diff(np.concatenate(([True], blank, [True])).astype(np.int8))
        opens, closes = np.flatnonzero(change == -1), np.flatnonzero(change == 1)
        place = np.searchsorted(opens, starts) + column - 1
        short = place >= np.searchsorted(opens, ends)
        place = np.minimum(place, len(opens) - 1)
        return np.where(short, -1, opens[place]), np.where(short, 0, closes[place])
    marks = np.flatnonzero(data == ord(layout.delimiter))
    low, high = np.searchsorted(marks, starts), np.searchsorted(marks, ends)
    padded = np.concatenate((marks, [0, 0]))
    short = low + column - 1 > high
    first = starts if column == 1 else padded[np.minimum(low + column - 2, len(marks))] + 1
    last = np.where(low + column - 1 < high, padded[np.minimum(low + column - 1, len(marks))], ends)
    return np.where(short, -1, first), np.where(short, 0, last)


def _trimmed(
    data: Bytes, starts: NDArray[np.int64], ends: NDArray[np.int64], *, blanks: tuple[int, ...]
) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Spans without blanks at their ends."""
    is_blank = np.zeros(256, dtype=np.bool_)
    is_blank[list(blanks)] = True
    starts, ends = starts.copy(), ends.copy()
    for move, place in ((1, starts), (-1, ends)):
        todo = np.flatnonzero(ends > starts)
        while len(todo):
            at = place[todo] if move == 1 else place[todo] - 1
            todo = todo[is_blank[data[at]]]
            place[todo] += move
            todo = todo[ends[todo] > starts[todo]]
    return starts, ends


def _begins_with(data: Bytes, starts: NDArray[np.int64], mark: bytes) -> NDArray[np.bool_]:
    found = np.ones(len(starts), dtype=np.bool_)
    for offset, byte in enumerate(mark):
        found &= data[np.minimum(starts + offset, len(data) - 1)] == byte
    return found


def _gather(data: Bytes, starts: NDArray[np.int64], ends: NDArray[np.int64]) -> Bytes:
    lengths = np.clip(ends - starts, 0, WIDEST_CELL)
    width = max(int(lengths.max(initial=0)), 1)
    places = np.arange(width)
    matrix: Bytes = data[np.minimum(starts[:, None] + places, len(data) - 1)]
    matrix[places >= lengths[:, None]] = 0
    return matrix


def as_matrix(texts: list[bytes]) -> Bytes:
    """Matrix of bytes of some texts, shape (n, width)."""
    array = np.array([text[:WIDEST_CELL] for text in texts] or [b"\0"], dtype=np.bytes_)
    width = max(array.dtype.itemsize, 1)
    return np.frombuffer(array.astype(f"S{width}").tobytes(), dtype=np.uint8).reshape(-1, width)[: len(texts)].copy()


def _recut_quoted(
    data: bytes,
    starts: NDArray[np.int64],
    ends: NDArray[np.int64],
    quoted: NDArray[np.int64],
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
