"""Minor lines of the potential, carried along by a fitted constituent beside them.

Besides the constituents that have names, each species has dozens of lines a hundred times smaller than its main
ones, a cycle a year or two away from them. A year cannot fit them, yet left out they bend its N2 by 0.1 %. The
ocean answers neighbours alike, so each follows a fitted constituent by the ratio of the equilibrium tide.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cache

import numpy as np
from numpy.typing import NDArray

from tidekit.astronomy.longitudes import mean_longitudes_rad, rates_deg_per_h
from tidekit.astronomy.potential import potential_lines
from tidekit.astronomy.timescales import julian_centuries_tt
from tidekit.constituents.catalogue import resolve

LEAST_M = 1e-4
"""Equilibrium height of a group's largest line from which it counts. [m]"""


@dataclass(frozen=True)
class MinorGroup:
    """Lines that share their first three Doodson numbers, and the constituent they follow."""

    doodson: tuple[int, int, int]
    """Multiples of tau, s and h."""
    main: str
    """The fitted constituent."""


@cache
def minor_groups(names: tuple[str, ...], fitted: tuple[str, ...]) -> tuple[MinorGroup, ...]:
    """Find the groups of short-period lines that no constituent stands for.

    Parameters
    ----------
    names : tuple of str
        All constituents of a fit, the inferred ones among them.
    fitted : tuple of str
        Those that may be followed.

    Returns
    -------
    tuple of MinorGroup
        Each follows the fitted line of its species that outweighs it most for its distance in speed.
    """
    lines = potential_lines()
    taken = {resolve(name).doodson[:3] for name in names}
    mains = [name for name in fitted if resolve(name).nodal == "lines" and resolve(name).species in (1, 2)]
    height = {name: abs(_main_amplitude_m(name)) for name in mains}
    counted = (lines.degree == 2) & (lines.doodson[:, 0] > 0) & (np.abs(lines.amplitude_m) >= LEAST_M)
    groups = []
    for number in sorted({tuple(int(n) for n in row[:3]) for row in lines.doodson[counted]} - taken):
        speed = float(number @ rates_deg_per_h()[:3])
        near = [name for name in mains if resolve(name).species == number[0]]
        if near:
            main = max(near, key=lambda name: height[name] / abs(resolve(name).speed_deg_per_h - speed))
            groups.append(MinorGroup((number[0], number[1], number[2]), main))
    return tuple(groups)


def minor_carriers(groups: Sequence[MinorGroup], t_h: NDArray[np.float64]) -> NDArray[np.complex128]:
    """Carriers of groups, to be multiplied by the phasors of the constituents they follow.

    Parameters
    ----------
    groups : sequence of MinorGroup, length j
        The groups.
    t_h : ndarray, shape (n,)
        Times. [UTC hours since 2000-01-01 00:00]

    Returns
    -------
    ndarray of complex, shape (n, j)
        Dimensionless.
    """
    lines, longitudes = potential_lines(), mean_longitudes_rad(t_h)
    since_epoch = julian_centuries_tt(t_h) - lines.epoch_centuries
    result = np.empty((len(t_h), len(groups)), dtype=np.complex128)
    for column, group in enumerate(groups):
        own = _lines_of(group.doodson)
        waves = np.exp(1j * (longitudes @ lines.doodson[own].T))
        strength = lines.amplitude_m[own] + np.outer(since_epoch, lines.drift_m_per_century[own])
        quarters = 1j ** resolve(group.main).phase_quarter
        result[:, column] = np.sum(strength * waves, axis=1) * quarters / _main_amplitude_m(group.main)
    return result


def minor_speeds_deg_per_h(groups: Sequence[MinorGroup]) -> NDArray[np.float64]:
    """Speed of the largest line of each group. [degrees per hour]"""
    lines = potential_lines()
    largest = [own[np.argmax(np.abs(lines.amplitude_m[own]))] for own in (_lines_of(g.doodson) for g in groups)]
    return np.asarray(lines.doodson[np.array(largest, dtype=np.int64)] @ rates_deg_per_h())


@cache
def _lines_of(number: tuple[int, int, int]) -> NDArray[np.int64]:
    lines = potential_lines()
    return np.flatnonzero((lines.degree == 2) & np.all(lines.doodson[:, :3] == number, axis=1))


@cache
def _main_amplitude_m(name: str) -> float:
    """Amplitude of a constituent's own line of degree 2, signed; 0 where it has none."""
    lines = potential_lines()
    own = (lines.degree == 2) & np.all(lines.doodson == np.array(resolve(name).doodson), axis=1)
    return float(lines.amplitude_m[own].sum())
