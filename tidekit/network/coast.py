"""What boundary-wave theory says of a given coast."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from tidekit.errors import AnalysisError
from tidekit.records.network import CoastSpec
from tidekit.records.station import Station
from tidekit.waves.kelvin import KelvinWave, travel_time_h
from tidekit.waves.rotation import GRAVITY_M_PER_S2

Float = NDArray[np.float64]

_TURNS = 60
"""Turns of the search for a depth and a trapping scale that belong together; far more than it needs."""


@dataclass(frozen=True, kw_only=True)
class CoastTheory:
    """The Kelvin wave of one coast."""

    wave: KelvinWave
    """The wave at the coast's mean latitude and effective depth."""
    sense: int
    """+1 if the wave should travel toward increasing `along_coast_km`, -1 if toward decreasing."""
    bearing_deg: float
    """Compass bearing toward increasing `along_coast_km`. [degrees]"""
    depth_note: str
    """How the effective depth was found, for people."""


def coast_theory(coast: CoastSpec, stations: list[Station]) -> CoastTheory | None:
    """Give the theory for a coast and the gauges along it.

    Parameters
    ----------
    coast : CoastSpec
        Side of the land and depths.
    stations : list of Station
        Gauges of the wave fit, with latitudes.

    Returns
    -------
    CoastTheory or None
        None where the coast gives no depth or the gauges no latitude, or where they stand on both sides of the
        equator, which no boundary wave of one hemisphere passes: there is nothing to compare with.

    Raises
    ------
    AnalysisError
        If a depth is not positive.
    """
    latitudes = [station.latitude_deg for station in stations if station.latitude_deg is not None]
    if not latitudes or min(latitudes) <= 0.0 <= max(latitudes):
        return None
    latitude = float(np.mean(latitudes))
    depth = _effective_depth(coast, stations, latitude)
    if depth is None:
        return None
    wave = KelvinWave(depth[0], latitude)
    # With the land on the side where the wave keeps its coast, it travels the way one looks.
    sense = 1 if coast.side == wave.coast_side else -1
    return CoastTheory(wave=wave, sense=sense, bearing_deg=coast_bearing_deg(stations), depth_note=depth[1])


def _effective_depth(coast: CoastSpec, stations: list[Station], latitude: float) -> tuple[float, str] | None:
    along = [station.along_coast_km for station in stations if station.along_coast_km is not None]
    if coast.depth_m is not None:
        return coast.depth_m, f"depth {coast.depth_m:g} m as given"
    if coast.depth_along_coast and along and max(along) > min(along):
        positions, depths = zip(*coast.depth_along_coast, strict=True)
        hours = travel_time_h(positions, depths, min(along), max(along))
        speed = (max(along) - min(along)) / hours / 3.6
        depth = speed**2 / GRAVITY_M_PER_S2
        return depth, f"depth {depth:.0f} m, whose wave takes as long between the end gauges as the profile's"
    if coast.depth_cross_shore:
        depth = _trapped_depth(coast, latitude)
        return depth, f"depth {depth:.0f} m, the profile's mean weighted by the energy of the trapped wave"
    return None


def _trapped_depth(coast: CoastSpec, latitude: float) -> float:
    """Mean depth weighted with ``exp(-2 x |f|/c)``, the energy of a wave trapped at that depth's own scale.

    A long wave's squared speed is g times the depth averaged over where its energy is; the scale and the depth are
    found in turn. Beyond the profile the depth stays as at its end.
    """
    distance, depths = (np.array(column, dtype=np.float64) for column in zip(*coast.depth_cross_shore, strict=True))
    if np.any(depths <= 0) or np.any(np.diff(distance) <= 0):
        message = "depth_cross_shore wants increasing distances and positive depths"
        raise AnalysisError(message)
    slopes, depth = np.diff(depths) / np.diff(distance), float(depths[-1])
    for _ in range(_TURNS):  # a contraction: each turn shrinks the change by the shelf's share of the scale
        energy_km = 0.5 * KelvinWave(depth, latitude).rossby_radius_km
        # By parts, exactly: the depth where the profile begins, and its slopes weighted by the energy farther out.
        depth = float(depths[0] - energy_km * np.sum(slopes * np.diff(np.exp(-distance / energy_km))))
    return depth


def coast_bearing_deg(stations: list[Station]) -> float:
    """Compass bearing toward increasing `along_coast_km`, by regression on the gauges' places.

    Parameters
    ----------
    stations : list of Station
        Gauges with latitude, longitude and position along the coast.

    Returns
    -------
    float
        0 to 360, NaN where two distinct places are not known. [degrees]
    """
    known = [
        (s.along_coast_km, s.latitude_deg, s.longitude_deg)
        for s in stations
        if s.along_coast_km is not None and s.latitude_deg is not None and s.longitude_deg is not None
    ]
    if len(known) < 2:
        return float("nan")
    along, latitude, longitude = np.array(known, dtype=np.float64).T
    if np.ptp(along) == 0.0:
        return float("nan")
    along = along - along.mean()
    east = (np.unwrap(longitude, period=360.0) * math.cos(math.radians(latitude.mean()))) @ along
    north = latitude @ along
    return math.degrees(math.atan2(east, north)) % 360.0
