"""Networks made from wave theory, with noise and faults of known size: what the network room is tried on."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace

import numpy as np
from numpy.typing import NDArray

from tidekit.constituents.catalogue import speeds_deg_per_h
from tidekit.constituents.constants import HarmonicConstants
from tidekit.network.gauges import GaugeTide
from tidekit.network.measure import NetworkMeasure, measure_network
from tidekit.records.network import AuditSettings, CoastSpec
from tidekit.records.station import Station
from tidekit.waves.kelvin import KelvinWave

NAMES = ("M2", "S2", "N2", "K2", "K1", "O1", "P1", "Q1")
AMPLITUDE_M = np.array([0.81, 0.29, 0.16, 0.08, 0.22, 0.17, 0.07, 0.03])
LAG_DEG = np.array([302.0, 339.0, 281.0, 341.0, 77.0, 48.0, 74.0, 31.0])
"""The tide where the coast begins; invented."""


@dataclass(frozen=True, kw_only=True)
class Fault:
    """What is wrong with one gauge."""

    late_h: float = 0.0
    """Recorded times less true ones. [h]"""
    scale: float = 1.0
    """Recorded over true height; negative for a record upside down."""


@dataclass(frozen=True, kw_only=True)
class Coast:
    """A coast and the gauges along it."""

    along_km: NDArray[np.float64]
    """Positions. [km]"""
    offshore_km: NDArray[np.float64]
    """Distances offshore. [km]"""
    depth_m: float = 60.0
    latitude_deg: float = -41.2
    """Depth and latitude; the wave runs toward increasing positions with the coast on its proper side."""
    delay_scatter_min: float = 0.5
    """Standard deviation of what each place adds to the wave's arrival. [minutes]"""
    amplitude_scatter: float = 0.01
    """The same for relative amplitude."""
    noise_m: float = 0.001
    """Error of each constituent's amplitude, in any direction of its phasor. [m]"""
    names: tuple[str, ...] = NAMES
    faults: Mapping[int, Fault] = field(default_factory=dict)
    """Faults by gauge."""

    @property
    def wave(self) -> KelvinWave:
        return KelvinWave(self.depth_m, self.latitude_deg)

    @property
    def spec(self) -> CoastSpec:
        return CoastSpec(side=self.wave.coast_side, depth_m=self.depth_m)

    def gauges(self, random: np.random.Generator) -> list[GaugeTide]:
        """One draw of the gauges' constants."""
        return [self._gauge(n, random) for n in range(len(self.along_km))]

    def measure(self, random: np.random.Generator, settings: AuditSettings | None = None) -> NetworkMeasure:
        """One draw, measured."""
        return measure_network(self.gauges(random), self.spec, settings or AuditSettings())

    def _gauge(self, n: int, random: np.random.Generator) -> GaugeTide:
        rows = [NAMES.index(name) for name in self.names]
        speeds, fault = speeds_deg_per_h(self.names), self.faults.get(n, Fault())
        delay_h = self.along_km[n] * 1e3 / self.wave.speed_m_per_s / 3600.0
        delay_h += random.normal(0.0, self.delay_scatter_min / 60.0) if self.delay_scatter_min else 0.0
        # A clock that runs late shows every event late, which is a larger phase lag.
        lag = np.deg2rad(LAG_DEG[rows] + speeds * (delay_h + fault.late_h))
        local = np.exp(random.normal(0.0, self.amplitude_scatter)) if self.amplitude_scatter else 1.0
        amplitude = AMPLITUDE_M[rows] * local * self.wave.amplitude_ratio(self.offshore_km[n])
        noise = self.noise_m * (random.standard_normal(len(rows)) + 1j * random.standard_normal(len(rows)))
        phasor = fault.scale * (amplitude * np.exp(-1j * lag) + noise)
        sd = abs(fault.scale) * self.noise_m
        return GaugeTide(
            station=Station(
                id=f"g{n}",
                latitude_deg=self.latitude_deg + (self.along_km[n] - self.along_km.mean()) / 111.2,
                longitude_deg=88.0,
                along_coast_km=float(self.along_km[n]),
                offshore_km=float(self.offshore_km[n]),
            ),
            constants=HarmonicConstants(
                names=self.names,
                amplitude_m=np.abs(phasor),
                phase_lag_deg=np.mod(-np.rad2deg(np.angle(phasor)), 360.0),
                amplitude_sd_m=np.full(len(rows), sd),
                phase_lag_sd_deg=np.rad2deg(sd / np.abs(phasor)),
                basis=("fitted",) * len(rows),
            ),
        )


def some_coast(random: np.random.Generator, count: int, **options: float) -> Coast:
    """A coast of `count` gauges at uneven places 40 to 110 km apart, two of them offshore."""
    along = np.cumsum(random.uniform(40.0, 110.0, count))
    offshore = np.zeros(count)
    offshore[random.choice(count, 2, replace=False)] = random.uniform(40.0, 150.0, 2)
    return replace(Coast(along_km=along - along[0], offshore_km=offshore), **options)
