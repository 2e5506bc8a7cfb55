"""Positions of Moon and Sun from a general astronomy library, for deriving the potential; extra `derive`.

Nothing at run time imports this module: it needs pyerfa.
"""

from __future__ import annotations

import warnings
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from tidekit.errors import TidekitError

try:
    import erfa
except ModuleNotFoundError as error:
    _message = "deriving the potential needs pyerfa; install tidekit with its extra: pip install 'tidekit[derive]'"
    raise TidekitError(_message) from error

EARTH_RADIUS_M = 6378136.6
MOON_MASS_OVER_EARTH = 0.0123000371
SUN_MASS_OVER_EARTH = 332946.0487
ASTRONOMICAL_UNIT_M = 149597870700.0
"""IERS Conventions (2010) Table 1.1; IAU 2012 resolution B2. Masses: IERS Conventions, GM ratios."""

_J2000 = 2451545.0
_CHUNK = 20_000
"""Dates at a time: the nutation series of so many takes some 200 MB."""


@dataclass(frozen=True, eq=False, kw_only=True)
class Body:
    """Where a body stands against the true equator of date; arrays of shape (n,)."""

    mass_over_earth: float
    """Its mass over the Earth's."""
    right_ascension_rad: NDArray[np.float64]
    """Right ascension less the equation of the equinoxes, so that mean sidereal time carries it. [radians]"""
    declination_rad: NDArray[np.float64]
    """Declination. [radians]"""
    parallax: NDArray[np.float64]
    """Earth's equatorial radius over its distance."""


def moon_and_sun(days_tt: NDArray[np.float64]) -> tuple[Body, Body]:
    """Geocentric Moon and Sun.

    Parameters
    ----------
    days_tt : ndarray, shape (n,)
        Days of Terrestrial Time since J2000.0. [days]

    Returns
    -------
    moon, sun : Body
        Geometric places, without aberration: gravity comes from where they are.

    References
    ----------
    .. [1] Meeus, J., "Astronomical Algorithms", 2nd ed. (1998), chapter 47, after Chapront-Touze and Chapront:
       the Moon of `erfa.moon98`.
    .. [2] Bretagnon, P. and Francou, G., Astron. Astrophys. 202 (1988) 309: VSOP, behind `erfa.epv00`.
    .. [3] IAU 2006/2000A precession-nutation: `erfa.pnm06a`.
    """
    pieces = [_places(days_tt[start : start + _CHUNK]) for start in range(0, len(days_tt), _CHUNK)]
    moon, sun = (np.concatenate(part) for part in zip(*pieces, strict=True))
    return _body(MOON_MASS_OVER_EARTH, moon), _body(SUN_MASS_OVER_EARTH, sun)


def _places(days_tt: NDArray[np.float64]) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Cartesian places (n, 3) in astronomical units, x toward the mean sidereal origin on the true equator."""
    with warnings.catch_warnings():
        # The series of the Sun is stated for 1900 to 2100; beyond, its error grows to some arcseconds.
        warnings.simplefilter("ignore", erfa.ErfaWarning)
        heliocentric, _ = erfa.epv00(_J2000, days_tt)
    moon = erfa.moon98(_J2000, days_tt)["p"]
    # Apparent less mean sidereal time is the equation of the equinoxes: turning it away makes the mean the carrier.
    to_equator = erfa.rz(erfa.ee06a(_J2000, days_tt), erfa.pnm06a(_J2000, days_tt))
    return erfa.rxp(to_equator, moon), erfa.rxp(to_equator, -heliocentric["p"])


def _body(mass_over_earth: float, place_au: NDArray[np.float64]) -> Body:
    distance = np.linalg.norm(place_au, axis=1)
    return Body(
        mass_over_earth=mass_over_earth,
        right_ascension_rad=np.arctan2(place_au[:, 1], place_au[:, 0]),
        declination_rad=np.arcsin(place_au[:, 2] / distance),
        parallax=EARTH_RADIUS_M / (distance * ASTRONOMICAL_UNIT_M),
    )
