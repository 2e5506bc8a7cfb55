"""The Kelvin wave on a flat bottom: a wave that rotation holds to a straight coast.

References
----------
.. [1] Thomson, W., "On gravitational oscillations of rotating water", Proc. R. Soc. Edinburgh 10 (1879) 92-100.
.. [2] Gill, A. E., "Atmosphere-Ocean Dynamics", Academic Press (1982), section 10.4.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from tidekit.errors import AnalysisError
from tidekit.waves.rotation import GRAVITY_M_PER_S2, angular_speed_rad_per_s, coriolis_rad_per_s

Side = Literal["left", "right"]


@dataclass(frozen=True)
class KelvinWave:
    """A Kelvin wave along a straight coast over a flat bottom."""

    depth_m: float
    """Depth of the water. [m]"""
    latitude_deg: float
    """Latitude, north positive. [degrees]"""

    def __post_init__(self) -> None:
        if not (math.isfinite(self.depth_m) and self.depth_m > 0):
            message = f"depth is {self.depth_m:g} m; wanted a positive number of metres"
            raise AnalysisError(message)
        if self.coriolis_rad_per_s == 0.0:
            message = "on the equator no coast traps a Kelvin wave; give another latitude"
            raise AnalysisError(message)

    @property
    def coriolis_rad_per_s(self) -> float:
        """Coriolis parameter f. [radians per second]"""
        return coriolis_rad_per_s(self.latitude_deg)

    @property
    def speed_m_per_s(self) -> float:
        """Speed along the coast, ``c = sqrt(g h)``, the same at every frequency. [m/s]"""
        return math.sqrt(GRAVITY_M_PER_S2 * self.depth_m)

    @property
    def rossby_radius_km(self) -> float:
        """Distance offshore at which the amplitude has fallen to 1/e, ``c/|f|``. [km]"""
        return self.speed_m_per_s / abs(self.coriolis_rad_per_s) / 1e3

    @property
    def coast_side(self) -> Side:
        """Where the wave has its coast, looking the way it travels."""
        return "right" if self.latitude_deg > 0 else "left"

    def wavelength_km(self, speed_deg_per_h: float) -> float:
        """Wavelength of a constituent. [km]"""
        return 2 * math.pi * self.speed_m_per_s / angular_speed_rad_per_s(speed_deg_per_h) / 1e3

    def amplitude_ratio(self, offshore_km: ArrayLike) -> NDArray[np.float64]:
        """Amplitude over that at the coast, ``exp(-x |f|/c)``, at distances offshore [km]; none may be negative."""
        distance = np.asarray(offshore_km, dtype=np.float64)
        if np.any(distance < 0):
            message = f"distance offshore is {float(distance.min()):g} km; wanted 0 or more, seaward of the coast"
            raise AnalysisError(message)
        return np.exp(-distance / self.rossby_radius_km)

    def current_m_per_s(self, height_m: ArrayLike) -> NDArray[np.float64]:
        """Alongshore current under a surface height, ``sqrt(g/h)`` times it, in the direction of travel at a crest.

        It balances the slope across the shore: ``f v = g d(height)/dx`` (geostrophic), with none across the shore.
        """
        return np.asarray(height_m, dtype=np.float64) * math.sqrt(GRAVITY_M_PER_S2 / self.depth_m)

    def lag_deg(self, distance_km: ArrayLike, speed_deg_per_h: float) -> NDArray[np.float64]:
        """Growth of a constituent's phase lag over distances along the way of travel [km]. [degrees]"""
        hours = np.asarray(distance_km, dtype=np.float64) * 1e3 / self.speed_m_per_s / 3600.0
        return np.asarray(hours * speed_deg_per_h)


def travel_time_h(along_km: Sequence[float], depth_m: Sequence[float], start_km: float, end_km: float) -> float:
    """Time that a long wave takes along a coast whose depth is given at points and linear between them.

    Parameters
    ----------
    along_km, depth_m : sequences of one length, at least 2
        Positions in increasing order [km] and depths there [m]; beyond the ends the depth stays as it is.
    start_km, end_km : float
        From where to where. [km]

    Returns
    -------
    float
        Time, negative if `end_km` is before `start_km`. [hours]

    Raises
    ------
    AnalysisError
        If there are not as many depths as positions, positions do not increase, or a depth is not positive.

    Notes
    -----
    Where the depth is linear, ``h = h1 + a (x - x1)``, the integral of ``dx / sqrt(g h)`` is
    ``2 (sqrt(h2) - sqrt(h1)) / (a sqrt(g))``, which equals ``2 dx / (sqrt(g h1) + sqrt(g h2))``.
    """
    positions, depths = np.asarray(along_km, dtype=np.float64), np.asarray(depth_m, dtype=np.float64)
    if positions.shape != depths.shape or len(positions) < 2:
        message = f"{len(positions)} positions and {len(depths)} depths along the coast; wanted as many, at least 2"
        raise AnalysisError(message)
    # Asked the positive way round, so that a NaN fails too.
    if not (np.all(np.diff(positions) > 0) and np.all(depths > 0)):
        message = "depths along the coast want increasing positions and positive depths"
        raise AnalysisError(message)
    low, high = sorted((start_km, end_km))
    inside = positions[(positions > low) & (positions < high)]
    points = np.concatenate([[low], inside, [high]])
    speeds = np.sqrt(GRAVITY_M_PER_S2 * np.interp(points, positions, depths))
    seconds = float(np.sum(2e3 * np.diff(points) / (speeds[1:] + speeds[:-1])))
    return math.copysign(seconds / 3600.0, end_km - start_km)
