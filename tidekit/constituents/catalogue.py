"""The constituents: their Doodson numbers, phases, compound make-ups, and the names people write.

A line constituent has a row of the tide-generating potential (or, for Sa and S1, which the ocean owes
to the weather, only a speed). A compound tide takes everything from its parts.
"""

from __future__ import annotations

import csv
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from functools import cache, cached_property
from importlib.resources import files
from typing import Literal, cast

import numpy as np
from numpy.typing import NDArray

from tidekit.astronomy.longitudes import rates_deg_per_h
from tidekit.constituents.makeup import format_makeup, parse_makeup
from tidekit.errors import ConstituentError

NodalRule = Literal["lines", "none", "parts"]
"""Where f and u come from: the side lines of the potential, nowhere (f = 1, u = 0), or the parts."""

_COLUMNS = ["name", "tau", "s", "h", "p", "n_prime", "p_s", "phase_quarter", "nodal", "parts", "also", "source"]


@dataclass(frozen=True)
class Constituent:
    """One tidal constituent."""

    name: str
    """The trade's usual name, or the sum it is made of."""
    doodson: tuple[int, int, int, int, int, int]
    """Multiples of tau, s, h, p, N' and p_s in its argument V."""
    phase_quarter: int
    """Quarter turns added to V, so that the potential's coefficient is positive in the northern hemisphere."""
    nodal: NodalRule
    """Where its nodal modulation comes from."""
    parts: tuple[tuple[str, int], ...] = ()
    """Constituents of a compound tide with their signed factors; empty for a line."""

    @property
    def species(self) -> int:
        """Cycles a lunar day, nearly: 0 long-period, 1 diurnal, 2 semidiurnal ..."""
        return self.doodson[0]

    @property
    def makeup(self) -> str:
        """The compound's sum; empty for a line."""
        return format_makeup(self.parts)

    @cached_property
    def speed_deg_per_h(self) -> float:
        """Speed: the rate of V at the epoch J2000. [degrees per hour]"""
        return float(np.dot(self.doodson, rates_deg_per_h()))


@cache
def _tables() -> tuple[dict[str, Constituent], dict[str, str]]:
    """Catalogue by name, and every accepted spelling (upper case) to its name."""
    text = files("tidekit.constituents").joinpath("tables/catalogue.csv").read_text(encoding="utf-8")
    rows = list(csv.DictReader(text.splitlines()))
    if list(rows[0]) != _COLUMNS:
        message = f"catalogue.csv has columns {list(rows[0])}, wanted {_COLUMNS}"
        raise ConstituentError(message)
    entries: dict[str, Constituent] = {}
    for row in rows:
        if row["nodal"] != "parts":
            numbers = [int(row[column]) for column in _COLUMNS[1:7]]
            doodson = cast(tuple[int, int, int, int, int, int], tuple(numbers))
            nodal = cast(NodalRule, row["nodal"])
            entries[row["name"]] = Constituent(row["name"], doodson, int(row["phase_quarter"]), nodal)
    lines = dict(entries)
    for row in rows:
        if row["nodal"] == "parts":
            entries[row["name"]] = _compound(row["name"], parse_makeup(row["parts"]), lines)
    ordered = {entry.name: entry for entry in sorted(entries.values(), key=lambda e: e.speed_deg_per_h)}
    spellings = {name.upper(): name for name in ordered}
    spellings |= {also.upper(): row["name"] for row in rows for also in row["also"].split()}
    # The final 1 or 2 of a Greek-letter name is often left off a table, as its letter tells the species.
    bare = {name.upper().rstrip("123"): name for name in ordered if name[:2].islower() and name[-1] in "12"}
    return ordered, bare | spellings


def _compound(name: str, parts: tuple[tuple[str, int], ...], entries: dict[str, Constituent]) -> Constituent:
    doodson = np.sum([np.multiply(entries[part].doodson, factor) for part, factor in parts], axis=0)
    quarter = sum(entries[part].phase_quarter * factor for part, factor in parts)
    numbers = cast(tuple[int, int, int, int, int, int], tuple(int(number) for number in doodson))
    return Constituent(name, numbers, quarter, "parts", parts)


def catalogue() -> tuple[str, ...]:
    """Names of the catalogue's constituents, in order of speed."""
    return tuple(_tables()[0])


@cache
def resolve(name: str) -> Constituent:
    """Find a constituent by name, by an agency's spelling of it, or by the make-up of a compound tide.

    Parameters
    ----------
    name : str
        For example ``M2``, ``NU2``, ``lambda2`` or ``2*M2 + S2``. Case does not matter.

    Returns
    -------
    Constituent
        The catalogue's entry; for a sum, the catalogue's compound of that make-up or else a new one.

    Raises
    ------
    ConstituentError
        If nothing of that name is known.

    Examples
    --------
    >>> resolve("NU2").name, resolve("2*M2 + S2").name, resolve("3*M2 + 2*N2").doodson
    ('nu2', '2MS6', (10, -2, 0, 2, 0, 0))
    """
    entries, spellings = _tables()
    key = name.strip().upper()
    if key in spellings:
        return entries[spellings[key]]
    if not any(sign in name for sign in "+-*"):
        message = f"unknown constituent {name!r}; see the catalogue, or write a compound as 2*M2 + S2"
        raise ConstituentError(message)
    made: dict[str, int] = {}
    for term, factor in parse_makeup(name):
        entry = resolve(term)
        for part, inner in entry.parts or ((entry.name, 1),):
            made[part] = made.get(part, 0) + inner * factor
    parts = tuple((part, factor) for part, factor in made.items() if factor)
    if not parts:
        message = f"{name!r} adds up to nothing; write a compound as 2*M2 + S2"
        raise ConstituentError(message)
    for entry in entries.values():
        if dict(entry.parts) == dict(parts):
            return entry
    if len(parts) == 1 and parts[0][1] == 1:
        return entries[parts[0][0]]
    compound = _compound(format_makeup(parts), parts, entries)
    if compound.speed_deg_per_h <= 0.0:
        message = f"{name!r} has no positive speed; turn its signs round"
        raise ConstituentError(message)
    return compound


def resolve_names(names: Iterable[str]) -> tuple[str, ...]:
    """Resolve names to the catalogue's spelling; a repetition is an error.

    Raises
    ------
    ConstituentError
        If a name is unknown or named twice.
    """
    found = tuple(resolve(name).name for name in names)
    repeated = sorted({name for name in found if found.count(name) > 1})
    if repeated:
        message = f"{', '.join(repeated)} named more than once; name each constituent once"
        raise ConstituentError(message)
    return found


def speeds_deg_per_h(names: Sequence[str]) -> NDArray[np.float64]:
    """Speeds of constituents.

    Parameters
    ----------
    names : sequence of str, length k

    Returns
    -------
    ndarray, shape (k,)
        Speeds at the epoch J2000. [degrees per hour]

    Raises
    ------
    ConstituentError
        If a name is unknown.
    """
    return np.array([resolve(name).speed_deg_per_h for name in names], dtype=np.float64)
