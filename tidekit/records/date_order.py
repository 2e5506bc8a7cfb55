"""Settle the order of dates by the data, or ask."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from tidekit.errors import RecordError
from tidekit.records.layout import DATE_ORDERS, DateOrder

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
