"""Arguments that lines of the potential can have: integer combinations of the mean longitudes."""

from __future__ import annotations

import bisect
import itertools

import numpy as np
from numpy.typing import NDArray

from tidekit.astronomy.longitudes import slow_longitudes_rad

Doodson = tuple[int, int, int, int, int, int]

PARTED = 2.5 * 2 * np.pi / (600 * 365.25)
"""Rates closer than this are one line to the fit: 2.5 cycles in six centuries, past a Hann window's main lobe."""

_SLOW_RATES = np.diff(slow_longitudes_rad([-0.5, 0.5]), axis=0)[0] / 36525.0
"""Rates of s, h, p, N' and p_s at J2000. [radians a day]"""


def candidates(degree: int, species: int, *, moon: bool) -> list[list[Doodson]]:
    """Arguments that a body's lines can have by symmetry, simplest first, no two too close to part by the fit.

    In Delaunay's angles ``a l + b l' + c F + d D + e Omega`` the multiple of F has the degree's parity and that of
    Omega is at most the degree; the Sun's lines have h and p_s only. Each entry lists arguments that differ in
    p_s alone.
    """
    found: list[tuple[int, Doodson]] = []
    if moon:
        ranges = (range(-5, 6), range(-3, 4), range(-6, 7), range(-6, 7), range(-degree, degree + 1))
        for a, b, c, d, e in itertools.product(*ranges):
            if (c - degree) % 2 == 0:
                number = (species, species + a + c + d, b - d, -a, c - e, -b)
                found.append((abs(a) + 3 * abs(b) + abs(c) + abs(d) + abs(e), number))
    else:
        for k, b in itertools.product(range(-degree, degree + 1, 2), range(-5, 6)):
            found.append((abs(k) // 2 + 3 * abs(b), (species, species, k + b, 0, 0, -b)))
    chosen: dict[Doodson, list[Doodson]] = {}
    taken: list[float] = []
    for _, number in sorted(found):
        rate = slow_rate(number)
        apart_from_p_s: Doodson = (*number[:5], 0)
        # Long-period lines are real: of the two signs the one that grows in time is kept.
        if apart_from_p_s in chosen:
            chosen[apart_from_p_s].append(number)
        elif (species > 0 or rate > 0 or not any(number)) and not near(taken, rate):
            chosen[apart_from_p_s] = [number]
            bisect.insort(taken, rate)
    return list(chosen.values())


def near(rates: list[float], rate: float) -> bool:
    """Whether a sorted list has a rate within `PARTED` of this one."""
    place = bisect.bisect_left(rates, rate - PARTED)
    return place < len(rates) and rates[place] < rate + PARTED


def slow_rate(number: Doodson) -> float:
    """Speed of an argument less that of ``species (tau + s)``. [radians a day]"""
    return float(np.dot(slow_number(number), _SLOW_RATES))


def slow_number(number: Doodson) -> NDArray[np.float64]:
    """Multiples of s, h, p, N' and p_s in an argument less ``species (tau + s)``, shape (5,)."""
    slow = np.array(number[1:], dtype=np.float64)
    slow[0] -= number[0]
    return slow
