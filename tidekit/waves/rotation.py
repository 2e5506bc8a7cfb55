"""The Earth's rotation and gravity, as wave theory needs them."""

from __future__ import annotations

import math

from tidekit.errors import AnalysisError

GRAVITY_M_PER_S2 = 9.81
"""Gravity of the published solutions that tidekit is checked against. [m/s^2]"""
EARTH_ROTATION_RAD_PER_S = 7.292115e-5
"""IERS Conventions (2010) Table 1.1. [rad/s]"""


def coriolis_rad_per_s(latitude_deg: float) -> float:
    """Coriolis parameter ``f = 2 Omega sin(latitude)``, negative in the southern hemisphere.

    Parameters
    ----------
    latitude_deg : float
        Latitude, north positive. [degrees]

    Returns
    -------
    float
        [radians per second]

    Raises
    ------
    AnalysisError
        If the latitude is not between -90 and 90.

    Examples
    --------
    >>> f"{coriolis_rad_per_s(45.0):.4e}"
    '1.0313e-04'
    """
    if not -90.0 <= latitude_deg <= 90.0:
        message = f"latitude is {latitude_deg:g} degrees; wanted -90 to 90, north positive"
        raise AnalysisError(message)
    return 2.0 * EARTH_ROTATION_RAD_PER_S * math.sin(math.radians(latitude_deg))


def angular_speed_rad_per_s(speed_deg_per_h: float) -> float:
    """Angular speed of a constituent. [radians per second]"""
    return math.radians(speed_deg_per_h) / 3600.0


def inertial_latitude_deg(frequency: float) -> float:
    """Latitude, north or south, at which a frequency equals the inertial one.

    Poleward of it no inertia-gravity wave of that frequency travels freely and a channel of any width carries
    Kelvin waves alone.

    Parameters
    ----------
    frequency : float
        Frequency. [radians per second]

    Returns
    -------
    float
        0 to 90; NaN where the frequency is above the inertial one even at the poles. [degrees]

    Examples
    --------
    >>> f"{inertial_latitude_deg(EARTH_ROTATION_RAD_PER_S):.1f}"
    '30.0'
    """
    sine = abs(frequency) / (2.0 * EARTH_ROTATION_RAD_PER_S)
    return math.degrees(math.asin(sine)) if sine <= 1.0 else math.nan
