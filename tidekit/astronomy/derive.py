"""Derive the tide-generating potential's line table from positions of Moon and Sun.

Run as ``python -m tidekit.astronomy.derive`` with the extra `derive` installed; it rewrites
``tables/potential_lines.csv``. The slow part of each degree and species of the potential is sampled over six
centuries, and lines at integer combinations of the mean longitudes are fitted to it, the strongest first.

References
----------
.. [1] Cartwright, D. E. and Tayler, R. J., "New computations of the tide-generating potential", Geophys. J.
   R. Astron. Soc. 23 (1971) 45-74: method and normalisation.
.. [2] Doodson, A. T., Proc. R. Soc. Lond. A 100 (1921) 305-329: the six angles.
"""

from __future__ import annotations

import argparse
import math
import sys
import time
from collections.abc import Iterable
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray
from scipy.special import lpmv

from tidekit.astronomy.arguments import Doodson, candidates, slow_rate
from tidekit.astronomy.kepler_sun import harmonic, sun_on_ellipse
from tidekit.astronomy.line_fit import Samples, fit, sample_times, strengths_at
from tidekit.astronomy.potential import COLUMNS
from tidekit.astronomy.sky import EARTH_RADIUS_M, Body, moon_and_sun
from tidekit.files import write_text

HALF_SPAN_DAYS = 300 * 365.25
"""Half of 1700 to 2300: long enough, under a Hann window, to part 2N' from p (a beat of 179 years)."""
KEEP_M = 1e-5
"""Lines below this height are not tabulated. [m]"""
SEARCH_M = 4e-6
"""Lines are sought down to this height, so that those kept are clear of what remains. [m]"""
DRIFT_FROM_M = 3e-4
"""Lines above this height may drift in time. [m]"""
PEAK_SHARE = 0.15
"""Each round takes the lines above this part of the strongest left."""
ALL_PARTS = ((2, 0), (2, 1), (2, 2), (3, 0), (3, 1), (3, 2), (3, 3))
"""Degrees and species of the table."""


@dataclass(frozen=True)
class Line:
    """One line of the potential."""

    degree: int
    doodson: Doodson
    amplitude_m: float
    drift_m_per_century: float


def degree_height_m(body: Body, degree: int) -> NDArray[np.float64]:
    """Height scale ``a (m/M) (a/r)^(n+1)`` of a body's potential of one degree, over gravity. [m]"""
    return EARTH_RADIUS_M * body.mass_over_earth * body.parallax ** (degree + 1)


def harmonic_factor(degree: int, species: int, sine: NDArray[np.float64]) -> NDArray[np.float64]:
    """Normalised Legendre function times what the sum over spherical harmonics leaves of it.

    ``(4 pi / (2n+1)) (2 - [m=0]) (-1)^m N_nm P_nm``, with N_nm of Cartwright and Tayler and P_nm without the
    phase (-1)^m, which scipy's `lpmv` contains and so supplies here.
    """
    norm = math.sqrt(
        (2 * degree + 1) / (4 * math.pi) * math.factorial(degree - species) / math.factorial(degree + species)
    )
    share = 4 * math.pi / (2 * degree + 1) * (1 if species == 0 else 2)
    return np.asarray(share * norm * lpmv(species, degree, sine))


def slow_function(body: Body, degree: int, species: int) -> NDArray[np.complex128]:
    """Part of the potential that multiplies ``exp(i species (tau + s))``, shape (n,). [m]

    Sidereal time is tau + s + 180 degrees, hence the factor (-1)^species.
    """
    strength = degree_height_m(body, degree) * harmonic_factor(degree, species, np.sin(body.declination_rad))
    return np.asarray((-1) ** species * strength * np.exp(-1j * species * body.right_ascension_rad))


def real_line(
    alternatives: list[Doodson], residual: NDArray[np.complex128], samples: Samples, turn: complex
) -> Doodson:
    """Choose among arguments that differ in p_s alone: the potential's coefficients are real, once turned.

    The solar perigee stands near 283 degrees for centuries, so a wrong multiple of it shows as a phase.
    """

    def realness(number: Doodson) -> float:
        coefficient = turn * np.vdot(samples.waves({number: 1.0}, slice(None)), residual * samples.window)
        return float(abs(coefficient.real) / abs(coefficient))

    return max(alternatives, key=realness)


def sun_pair(number: Doodson, degree: int) -> dict[Doodson, float]:
    """The Sun's lines that differ in p_s alone and move as one in the fit, with their ratios to the strongest."""
    ascension, declination, nearness = sun_on_ellipse()
    body = Body(mass_over_earth=1.0, right_ascension_rad=ascension, declination_rad=declination, parallax=nearness)
    field = slow_function(body, degree, number[0])
    species, s, h = number[:3]
    same = [(species, s, h, 0, 0, p_s) for p_s in range(-5, 6) if (h + p_s) % 2 == 0]
    strength = {other: harmonic(field, other[2], other[5]) for other in same}
    main = max(same, key=lambda other: abs(strength[other]))
    ratios = {other: (strength[other] / strength[main]).real for other in same}
    return {other: ratio for other, ratio in ratios.items() if abs(ratio) > 1e-6}


def body_lines(body: Body, degree: int, species: int, samples: Samples, *, moon: bool) -> list[Line]:
    """Find and fit the lines of one body's potential of one degree and species, the strongest first."""
    values = slow_function(body, degree, species)
    turn = 1.0 if (degree + species) % 2 == 0 else 1j
    offered = candidates(degree, species, moon=moon)
    rates = np.array([slow_rate(alternatives[0]) for alternatives in offered])
    groups: list[dict[Doodson, float]] = []
    used = np.zeros(len(offered), dtype=bool)
    coefficients = drifts = np.zeros(0, dtype=np.complex128)
    residual = values
    while True:
        left = np.where(used, 0.0, strengths_at(residual, samples, rates)) * (2 if species == 0 else 1)
        fresh = left > max(PEAK_SHARE * left.max(), SEARCH_M)
        if not fresh.any():
            break
        used |= fresh
        for index in np.flatnonzero(fresh):
            alternatives = offered[index]
            groups.append(
                {real_line(alternatives, residual, samples, turn): 1.0} if moon else sun_pair(alternatives[0], degree)
            )
        known = np.concatenate([np.abs(coefficients), left[fresh]])
        coefficients, drifts, residual = fit(values, samples, groups, list(known > DRIFT_FROM_M))
    imaginary = np.abs((turn * coefficients).imag).max()
    print(f"  largest imaginary part {imaginary:.1e} m, residual {np.abs(residual).std():.1e} m", file=sys.stderr)
    return [
        Line(degree, number, ratio * (turn * coefficient).real, ratio * (turn * drift).real)
        for group, coefficient, drift in zip(groups, coefficients, drifts, strict=True)
        for number, ratio in group.items()
    ]


def derive(half_span_days: float = HALF_SPAN_DAYS, *, wanted: Iterable[tuple[int, int]] = ALL_PARTS) -> list[Line]:
    """Derive the lines of the wanted (degree, species) parts, Moon and Sun added.

    Parameters
    ----------
    half_span_days : float
        Half the span of the fit, about J2000. [days]
    wanted : iterable of (int, int)
        Degrees and species.

    Returns
    -------
    list of Line
        Every line of at least `KEEP_M`, by degree and Doodson number.
    """
    samples = sample_times(half_span_days)
    moon, sun = moon_and_sun(samples.centuries * 36525.0)
    total: dict[tuple[int, Doodson], list[float]] = {}
    for degree, species in wanted:
        began = time.monotonic()
        found = body_lines(moon, degree, species, samples, moon=True)
        if degree == 2:
            found += body_lines(sun, degree, species, samples, moon=False)
        for line in found:
            entry = total.setdefault((degree, line.doodson), [0.0, 0.0])
            entry[0] += line.amplitude_m
            entry[1] += line.drift_m_per_century
        seconds = time.monotonic() - began
        print(f"degree {degree}, species {species}: {len(found)} lines, {seconds:.0f} s", file=sys.stderr)
    return [
        Line(degree, number, *values) for (degree, number), values in sorted(total.items()) if abs(values[0]) >= KEEP_M
    ]


def table_text(lines: list[Line]) -> str:
    """Write lines as the committed table."""
    header = [
        "# Lines of the tide-generating potential; made by python -m tidekit.astronomy.derive, not by hand.",
        "# Height = amplitude_m times cos (degree + species even) or sin (odd) of the argument, times the latitude",
        "# function (-1)^m N_nm P_nm of Cartwright and Tayler (1971); (-1)^m stands in both, for every degree.",
        "# amplitude_m holds at the epoch; drift_m_per_century is its rate. Arguments in tau, s, h, p, N' and p_s.",
        "# epoch_centuries: 0.0",
    ]
    rows = [
        ",".join(
            [str(line.degree), *map(str, line.doodson), f"{line.amplitude_m:.7f}", f"{line.drift_m_per_century:.7f}"]
        )
        for line in lines
    ]
    return "\n".join([*header, ",".join(COLUMNS), *rows]) + "\n"


def main() -> None:
    """Derive the whole table and write it."""
    parser = argparse.ArgumentParser(prog="python -m tidekit.astronomy.derive", description=__doc__)
    default = Path(__file__).parent / "tables" / "potential_lines.csv"
    parser.add_argument("--out", type=Path, default=default, help="where to write; the committed table by default")
    out = parser.parse_args().out
    lines = derive()
    write_text(out, table_text(lines))
    print(f"{len(lines)} lines of {KEEP_M:g} m or more written to {out}", file=sys.stderr)


if __name__ == "__main__":
    main()
