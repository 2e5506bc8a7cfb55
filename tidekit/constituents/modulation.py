"""Arguments V and nodal modulation f exp(iu) of constituents, exact in time or held at mid-year.

A line constituent stands for all lines of the tide-generating potential that share its first three
Doodson numbers: they differ only by the slow angles p, N' and p_s, and a record of a year cannot tell
them apart. Exact modulation sums those side lines at each time. Compound tides multiply the
modulations of their parts.
"""

from __future__ import annotations

from collections.abc import Sequence
from functools import cache
from typing import get_args

import numpy as np
from numpy.typing import ArrayLike, NDArray

from tidekit.astronomy.longitudes import mean_longitudes_rad
from tidekit.astronomy.potential import potential_lines
from tidekit.astronomy.timescales import datetime64_from_hours, hours_from_datetime64, julian_centuries_tt
from tidekit.constituents.catalogue import resolve
from tidekit.constituents.constants import NodalConvention
from tidekit.constituents.schureman import SCHUREMAN_RULES, schureman_factors
from tidekit.errors import ConstituentError

_NEGLIGIBLE = 1e-4
"""Side lines below this part of the main line are left out: together under 0.1 mm on a metre."""


def arguments_rad(names: Sequence[str], t_h: ArrayLike) -> NDArray[np.float64]:
    """Equilibrium arguments V of constituents, without u.

    Parameters
    ----------
    names : sequence of str, length k
        Constituents.
    t_h : array-like, shape (n,)
        Times. [UTC hours since 2000-01-01 00:00]

    Returns
    -------
    ndarray, shape (n, k)
        Arguments at Greenwich, not wrapped. [radians]

    Raises
    ------
    ConstituentError
        If a name is unknown.

    References
    ----------
    .. [1] Doodson, A. T., "The harmonic development of the tide-generating potential", Proc. R. Soc.
       Lond. A 100 (1921) 305-329.
    """
    entries = [resolve(name) for name in names]
    numbers = np.array([entry.doodson for entry in entries], dtype=np.float64).reshape(-1, 6)
    quarters = np.array([entry.phase_quarter for entry in entries], dtype=np.float64)
    longitudes = mean_longitudes_rad(np.asarray(t_h, dtype=np.float64))
    return np.asarray(longitudes @ numbers.T + 0.5 * np.pi * quarters)


def nodal_factors(names: Sequence[str], t_h: ArrayLike, *, nodal: NodalConvention = "exact") -> NDArray[np.complex128]:
    """Nodal modulation f exp(iu) of constituents.

    Parameters
    ----------
    names : sequence of str, length k
        Constituents.
    t_h : array-like, shape (n,)
        Times. [UTC hours since 2000-01-01 00:00]
    nodal : {"exact", "mid_year"}
        Sum the side lines at each time, or take the published formulae of f and u at the middle of each
        calendar year, as agencies do whose constants are made with them.

    Returns
    -------
    ndarray of complex, shape (n, k)
        Dimensionless.

    Raises
    ------
    ConstituentError
        If a name or the convention is unknown.
    """
    times = np.asarray(t_h, dtype=np.float64)
    if nodal == "exact":
        return _with_compounds(names, _side_line_sums(_lines_of(tuple(names)), times), len(times))
    if nodal not in get_args(NodalConvention):
        message = f"unknown nodal convention {nodal!r}; there are 'exact' and 'mid_year'"
        raise ConstituentError(message)
    middles, year_of = np.unique(mid_year_h(times), return_inverse=True)
    published = {name: _published(name, middles) for name in _lines_of(tuple(names))}
    return _with_compounds(names, published, len(middles))[year_of]


def carriers(names: Sequence[str], t_h: ArrayLike, *, nodal: NodalConvention = "exact") -> NDArray[np.complex128]:
    """Carriers f exp(i(V + u)): a height is the real part of carrier times H exp(-iG).

    Parameters
    ----------
    names : sequence of str, length k
        Constituents.
    t_h : array-like, shape (n,)
        Times. [UTC hours since 2000-01-01 00:00]
    nodal : {"exact", "mid_year"}
        See `nodal_factors`.

    Returns
    -------
    ndarray of complex, shape (n, k)
        Dimensionless.

    Raises
    ------
    ConstituentError
        If a name or the convention is unknown.
    """
    return np.asarray(nodal_factors(names, t_h, nodal=nodal) * np.exp(1j * arguments_rad(names, t_h)))


def year_start_h(t_h: ArrayLike, *, years_on: int = 0) -> NDArray[np.float64]:
    """Start of the calendar year (UTC) of each time, or of a later one. [UTC hours since 2000-01-01 00:00]"""
    years = datetime64_from_hours(np.asarray(t_h, dtype=np.float64)).astype("datetime64[Y]") + years_on
    return hours_from_datetime64(years.astype("datetime64[us]"))


def mid_year_h(t_h: ArrayLike) -> NDArray[np.float64]:
    """Middle of the calendar year (UTC) of each time, shape (n,). [UTC hours since 2000-01-01 00:00]"""
    return np.asarray(0.5 * (year_start_h(t_h) + year_start_h(t_h, years_on=1)))


def side_lines(name: str) -> tuple[NDArray[np.int64], NDArray[np.float64], NDArray[np.float64]]:
    """Lines of the potential that modulate a line constituent, itself among them.

    Parameters
    ----------
    name : str
        A constituent that is not compound and has a line.

    Returns
    -------
    differences : ndarray of int, shape (j, 3)
        Their multiples of p, N' and p_s less the main line's.
    ratio : ndarray, shape (j,)
        Amplitude over the main line's at the table's epoch, signed.
    drift_per_century : ndarray, shape (j,)
        Rate of that ratio. [per Julian century]

    Raises
    ------
    ConstituentError
        If the constituent has no line in the potential.
    """
    lines = potential_lines()
    number = np.array(resolve(name).doodson)
    group = np.all(lines.doodson[:, :3] == number[:3], axis=1)
    main = group & np.all(lines.doodson == number, axis=1)
    if not main.any():
        message = f"{name} has no line in the tide-generating potential"
        raise ConstituentError(message)
    # The ocean answers the third degree differently from the second, so a main line is modulated by lines
    # of its own degree only; where both degrees have the main line, the larger one names the constituent.
    index = int(np.flatnonzero(main)[np.argmax(np.abs(lines.amplitude_m[main]))])
    same = group & (lines.degree == lines.degree[index])
    same &= np.abs(lines.amplitude_m) > _NEGLIGIBLE * abs(lines.amplitude_m[index])
    amplitude = lines.amplitude_m[index]
    ratio = lines.amplitude_m[same] / amplitude
    drift = (lines.drift_m_per_century[same] - ratio * lines.drift_m_per_century[index]) / amplitude
    return np.asarray(lines.doodson[same, 3:] - number[3:], dtype=np.int64), ratio, drift


@cache
def _lines_of(names: tuple[str, ...]) -> tuple[str, ...]:
    """Line constituents with side lines that constituents or their parts are."""
    parts = [part for name in names for part, _ in resolve(name).parts or ((name, 1),)]
    return tuple(name for name in dict.fromkeys(parts) if resolve(name).nodal == "lines")


@cache
def _side_line_table(
    names: tuple[str, ...],
) -> tuple[NDArray[np.float64], NDArray[np.float64], NDArray[np.float64]]:
    """Distinct differences of side lines (j, 3); ratio and drift of each in each constituent, (j, k)."""
    found = [side_lines(name) for name in names]
    distinct, place = np.unique(np.concatenate([line[0] for line in found]), axis=0, return_inverse=True)
    column = np.repeat(np.arange(len(names)), [len(line[1]) for line in found])
    ratio, drift = np.zeros((2, len(distinct), len(names)))
    ratio[place, column] = np.concatenate([line[1] for line in found])
    drift[place, column] = np.concatenate([line[2] for line in found])
    return distinct.astype(np.float64), ratio, drift


def _side_line_sums(names: tuple[str, ...], t_h: NDArray[np.float64]) -> dict[str, NDArray[np.complex128]]:
    """Sum the side lines of constituents: all of them share a few dozen differences of side lines."""
    if not names:
        return {}
    differences, ratio, drift = _side_line_table(names)
    waves = np.exp(1j * (mean_longitudes_rad(t_h)[:, 3:] @ differences.T))
    since_epoch = julian_centuries_tt(t_h) - potential_lines().epoch_centuries
    sums = waves @ ratio + since_epoch[:, np.newaxis] * (waves @ drift)
    return dict(zip(names, sums.T, strict=True))


def _published(name: str, t_h: NDArray[np.float64]) -> NDArray[np.complex128]:
    if name not in SCHUREMAN_RULES:
        return _side_line_sums((name,), t_h)[name]
    factor = schureman_factors(name, t_h)
    if name == "M1":
        # The published V of M1 lacks p, and its speed has p's rate: agencies run it on from the start of the
        # year, so half a year of p (20 degrees) is theirs that a p held at mid-year would take away.
        perigee = mean_longitudes_rad(np.concatenate([t_h, year_start_h(t_h)]))[:, 3]
        factor = factor * np.exp(1j * (perigee[: len(t_h)] - perigee[len(t_h) :]))
    return factor


def _with_compounds(
    names: Sequence[str], of_line: dict[str, NDArray[np.complex128]], count: int
) -> NDArray[np.complex128]:
    """Factors of constituents from those of lines: a compound has the product of its parts'."""
    result = np.ones((count, len(names)), dtype=np.complex128)
    for column, name in enumerate(names):
        for part, times in resolve(name).parts or ((name, 1),):
            if part in of_line:
                # A part that is subtracted multiplies the amplitude all the same and turns the phase back.
                factor = of_line[part] if times > 0 else of_line[part].conj()
                result[:, column] *= factor if abs(times) == 1 else factor ** abs(times)
    return result
