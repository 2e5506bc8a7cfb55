"""Find the column of an export that holds the heights, by its name or because there is no other."""

from __future__ import annotations

import re
from dataclasses import dataclass

from tidekit.errors import RecordError
from tidekit.records.cutting import split

_NUMBER = re.compile(r"^[+-]?(\d+([.,]\d*)*|[.,]\d+)([eE][+-]?\d+)?$")
_SURE = "height level slev wlev waterlevel sealevel stage elev"
_LIKELY = "water tide gauge value pegel niveau nivel hauteur altura h wl sl z"
_OTHER = (
    "sigma temp press atms psal sal flag qual qc wind volt batt std stdev predict forecast residual surge lat lon "
    "latitude longitude station id count sample record rn seq number humidity rain conductivity stddev dev sd error"
)
"""Words in the names of columns that hold heights, may hold them, and do not."""


@dataclass(frozen=True)
class FoundColumn:
    """The height column and why."""

    column: int
    """From 1."""
    evidence: str
    """One sentence."""


def is_number(cell: str) -> bool:
    """Whether a cell looks like a number."""
    return bool(_NUMBER.match(cell))


def header_rows(above: list[str], delimiter: str, edges: tuple[int, ...]) -> list[list[str]]:
    """Cells of the last lines above the rows: names, units, kinds."""
    return [split(line.lstrip("#%*!/ "), delimiter, edges) for line in above[-6:] if line.strip()]


def labels_of(header: list[list[str]], names: list[str]) -> list[str]:
    """Everything that stands above each column: its name first, then the cells of lines of units as wide."""
    if not names:
        return []
    others = [cells for cells in header if cells != names and len(cells) == len(names)]
    return [
        " ".join([name, *(cells[n] for cells in others if _is_unit_cell(cells[n]))]).strip()
        for n, name in enumerate(names)
    ]


def _is_unit_cell(cell: str) -> bool:
    return bool(re.fullmatch(r"[\[(]?[A-Za-z°%/]{1,8}[\])]?", cell))


def height_column(
    rows: list[list[str]],
    names: list[str],
    labels: list[str],
    time_columns: tuple[int, ...],
    column: str | None,
    path: str,
) -> FoundColumn:
    """Find the height column.

    Parameters
    ----------
    rows : list of lists of str
        Cells of the first rows.
    names, labels : list of str
        Names of columns, and all that stands above them; or empty.
    time_columns : tuple of int
        Columns of the time.
    column : str or None
        Declared name or number.
    path : str
        For errors.

    Returns
    -------
    FoundColumn
        The column.

    Raises
    ------
    RecordError
        If there is none, or several and none is declared.
    """
    width = max(len(row) for row in rows)
    if column is not None:
        return _declared(column, names, width, time_columns, path)
    _refuse_unquoted_decimals(rows, names, time_columns, path)
    numeric = [
        n
        for n in range(1, width + 1)
        if n not in time_columns and any(is_number(row[n - 1]) for row in rows if len(row) >= n)
    ]
    named = {n: names[n - 1] for n in numeric if n <= len(names)}
    likely = [n for n in numeric if not _says(named.get(n, ""), _OTHER)]
    for words in (_SURE, _LIKELY):
        hits = [n for n in likely if _says(named.get(n, ""), words)]
        if len(hits) == 1:
            return FoundColumn(hits[0], f"heights in column {hits[0]}, named {named[hits[0]]!r}")
        if hits:
            shown = ", ".join(f"{named[n]!r}" for n in hits)
            message = f"several columns may hold the height ({shown}); declare one (--column)"
            raise RecordError(message, path=path)
    if len(likely) == 1:
        name = f", named {named[likely[0]]!r}" if named.get(likely[0]) else ""
        return FoundColumn(
            likely[0], f"heights in column {likely[0]}{name}: no other holds numbers that may be heights"
        )
    if numeric:
        shown = ", ".join(f"{n} {named[n]!r}" if named.get(n) else str(n) for n in numeric)
        message = f"no height column stands out: columns {shown} hold numbers; declare one (--column)"
    else:
        message = "no height column: nothing beside the time holds numbers"
    raise RecordError(message, path=path)


def _declared(column: str, names: list[str], width: int, time_columns: tuple[int, ...], path: str) -> FoundColumn:
    folded = [name.casefold() for name in names]
    wanted = column.strip().casefold()
    places = [n for n, name in enumerate(folded, 1) if name == wanted]
    if not places and wanted.isdecimal() and 1 <= int(wanted) <= width:
        places = [int(wanted)]
    if len(places) == 1 and places[0] not in time_columns:
        return FoundColumn(places[0], f"heights in column {places[0]}, as declared")
    shown = ", ".join(filter(None, names)) or f"columns 1 to {width}"
    message = f"no one column {column!r} for heights; there are {shown}"
    raise RecordError(message, path=path)


def _says(name: str, words: str) -> bool:
    """Whether a name holds one of some words: short ones whole, long ones as the start of a word."""
    pieces = [piece for piece in re.split(r"[^a-z]+", re.sub(r"([a-z])([A-Z])", r"\1 \2", name).lower()) if piece]
    joined = "".join(pieces)
    return any(
        any(piece == word or (len(word) > 3 and piece.startswith(word)) for piece in pieces)
        or (len(word) > 5 and word in joined)
        for word in words.split()
    )


def _refuse_unquoted_decimals(
    rows: list[list[str]], names: list[str], time_columns: tuple[int, ...], path: str
) -> None:
    """Raise if commas part columns and decimals alike: one more cell of digits than there are names."""
    last = max(time_columns)
    more = [row for row in rows if len(row) == len(names) + 1 and row[-1].isdecimal() and len(names) > last]
    if len(names) == last + 1 and len(more) == len(rows):
        message = (
            f"rows have {len(names) + 1} cells and the header {len(names)}: if the comma parts cells and decimals "
            "alike, export again with another delimiter; otherwise declare a layout (--layout)"
        )
        raise RecordError(message, path=path)
