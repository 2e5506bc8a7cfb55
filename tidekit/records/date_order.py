"""Settle the order of dates by the data, or ask."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from tidekit.errors import RecordError
from tidekit.records.cutting import cut
from tidekit.records.decoding import Export
from tidekit.records.layout import DATE_ORDERS, DateOrder, Layout
from tidekit.records.table_finding import Table
from tidekit.records.time_columns import clocks, columns_of, steps_are_sound
from tidekit.records.times import read_times

_MOST = 0.9
"""Share of the rows that must read in another order before their steps count against the first."""
Clock = NDArray[np.datetime64]
_FIRST = {
    "year-month-day": "the year",
    "day-month-year": "the day",
    "month-day-year": "the month",
    "year-day-of-year": "the year and then the day of the year",
}


@dataclass(frozen=True)
class Settled:
    """An order of dates and why; or, with more than one, those still possible."""

    orders: tuple[DateOrder, ...]
    """Orders that all dates allow."""
    evidence: str = ""
    """Why the one."""


def settle(export: Export, layout: Layout, table: Table) -> Settled:
    """Settle the order of dates: by the first rows, then by all rows, then by even steps, or ask.

    Parameters
    ----------
    export : Export
        The opened file.
    layout : Layout
        Its layout but for the order of dates.
    table : Table
        Its first rows.

    Returns
    -------
    Settled
        One order, and why.

    Raises
    ------
    RecordError
        If orders are mixed, or nothing settles which it is.
    """
    path = str(export.path)
    if not any(part in ("stamp", "date") for part in table.place.parts):
        return Settled(("year-month-day",), "")
    columns = columns_of(table.rows, table.place.columns)
    clock = {order: clocks(columns, table.place, order) for order in DATE_ORDERS}
    settled = by_validity(clock, np.array(table.lines), path)
    if len(settled.orders) == 1:
        _refuse_odd_witness(settled.orders[0], clock, settled.evidence, path)
        return settled
    even = [order for order in settled.orders if steps_are_sound(clock[order])]
    for block in export.blocks():
        cells = cut(block, layout, layout.time_columns)
        whole = {
            order: read_times(
                [cells.columns[n][~cells.short] for n in layout.time_columns], layout.time_parts, order
            ).clock
            for order in settled.orders
        }
        later = by_validity(whole, cells.line[~cells.short], path)
        if len(later.orders) == 1:
            return later
    if len(even) == 1 and len({str(day)[:10] for day in clock[even[0]]}) > 1:
        return Settled((even[0],), f"dates read {even[0]}: only so do the rows follow one another in even steps")
    text = " ".join(cell[0] for cell in columns)
    message = (
        f"the date in {text!r} can be read {' or '.join(settled.orders)} and no row settles it; "
        f'declare it: --layout FILE with the line date_order = "{settled.orders[0]}"'
    )
    raise RecordError(message, path=path, line=table.lines[0])


def _refuse_odd_witness(order: DateOrder, clock: dict[DateOrder, Clock], evidence: str, path: str) -> None:
    """Raise if few dates speak for an order and the steps between all others for another."""
    for other, times in clock.items():
        known = ~np.isnat(times)
        if other == order or known.mean() < _MOST or steps_are_sound(clock[order][known]):
            continue
        if steps_are_sound(times):
            message = f"{evidence}, but rows follow one another evenly only if dates are {other}: mend that line"
            raise RecordError(message, path=path)


def by_validity(clock: dict[DateOrder, Clock], lines: NDArray[np.int64], path: str) -> Settled:
    """Find the orders that all dates allow.

    Parameters
    ----------
    clock : dict of ndarray, shape (n,)
        Times of the rows in each order.
    lines : ndarray, shape (n,)
        Their line numbers.
    path : str
        For errors.

    Returns
    -------
    Settled
        One order, or those that the dates leave open.

    Raises
    ------
    RecordError
        If some rows allow one order only and others another only.
    """
    sound = {order: ~np.isnat(times) for order, times in clock.items()}
    most = max(int(rows.sum()) for rows in sound.values())
    orders = tuple(order for order in DATE_ORDERS if order in sound and int(sound[order].sum()) == most)
    if most == 0:
        return Settled(())
    first = orders[0]
    refuse_mixed(first, sound, lines, path)
    if len(orders) > 1:
        return Settled(orders)
    begins = f"dates begin with {_FIRST[first]}"
    against = [rows for order, rows in sound.items() if order != first and rows.any()]
    if against:
        row = max(int(np.argmax(sound[first] & ~rows)) for rows in against)
        begins += f", as line {lines[row]} shows"
    return Settled((first,), begins)


def refuse_mixed(
    order: DateOrder, sound: dict[DateOrder, NDArray[np.bool_]], lines: NDArray[np.int64], path: str
) -> None:
    """Raise if a row that an order cannot read is a date in another."""
    for other, rows in sound.items():
        odd = np.flatnonzero(rows & ~sound[order])
        if other != order and len(odd):
            message = (
                f"mixed date orders: dates begin with {_FIRST[order]}, and this one can only begin with "
                f"{_FIRST[other]}; split the file or mend its dates"
            )
            raise RecordError(message, path=path, line=int(lines[odd[0]]))
