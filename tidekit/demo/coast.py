"""The invented coast of the demonstration: its wave, its gauges, its faults.

Nothing here exists. The coast faces east in the southern hemisphere, so a boundary wave runs north along it with
the land on its left.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from tidekit.constituents.catalogue import resolve, speeds_deg_per_h
from tidekit.constituents.constants import HarmonicConstants
from tidekit.records.coast_line import km_per_degree
from tidekit.waves.kelvin import KelvinWave

START_LATITUDE_DEG, START_LONGITUDE_DEG, BEARING_DEG = -44.0, 88.0, 14.0
DEPTH_M = 60.0
MEAN_LATITUDE_DEG = -41.2

# Amplitude [m] and Greenwich phase lag [degrees] at the coast where it begins; invented.
TIDE = {
    "Sa": (0.062, 40.0),
    "Ssa": (0.018, 110.0),
    "Mm": (0.009, 190.0),
    "MSf": (0.006, 25.0),
    "Mf": (0.014, 170.0),
    "2Q1": (0.005, 22.0),
    "Q1": (0.034, 31.0),
    "rho1": (0.007, 33.0),
    "O1": (0.172, 48.0),
    "M1": (0.010, 63.0),
    "P1": (0.071, 74.0),
    "S1": (0.006, 210.0),
    "K1": (0.218, 77.0),
    "J1": (0.012, 96.0),
    "OO1": (0.007, 118.0),
    "2N2": (0.021, 250.0),
    "mu2": (0.023, 262.0),
    "N2": (0.158, 281.0),
    "nu2": (0.031, 284.0),
    "M2": (0.812, 302.0),
    "lambda2": (0.007, 318.0),
    "L2": (0.022, 322.0),
    "T2": (0.017, 337.0),
    "S2": (0.286, 339.0),
    "K2": (0.079, 341.0),
    "MK3": (0.006, 150.0),
    "MN4": (0.009, 71.0),
    "M4": (0.024, 96.0),
    "MS4": (0.015, 133.0),
    "2MS6": (0.006, 12.0),
    "M6": (0.007, 340.0),
}


@dataclass(frozen=True)
class DemoGauge:
    """One gauge of the invented coast, and what is wrong with its export."""

    id: str
    name: str
    along_km: float
    offshore_km: float = 0.0
    layout: str = "commas"
    reference: str = "staff zero"
    mean_m: float = 1.5
    clock_min: float = 0.0
    """Recorded times later than the truth. [minutes]"""
    zone_h: float = 0.0
    """Hours by which the export's clock runs ahead of the zone it declares. [h]"""
    scale: float = 1.0
    """Recorded height over true height."""
    step_m: float = 0.0
    """Level after the step less the level before it. [m]"""

    @property
    def place_deg(self) -> tuple[float, float]:
        """Latitude and longitude, by steps along the coast's bearing and across it. [degrees]"""
        bearing = np.radians(BEARING_DEG)
        north = self.along_km * np.cos(bearing) - self.offshore_km * np.sin(bearing)
        east = self.along_km * np.sin(bearing) + self.offshore_km * np.cos(bearing)
        latitude = START_LATITUDE_DEG + north / km_per_degree(MEAN_LATITUDE_DEG)[0]
        longitude = START_LONGITUDE_DEG + east / km_per_degree(0.5 * (START_LATITUDE_DEG + latitude))[1]
        return round(float(latitude), 4), round(float(longitude), 4)


GAUGES = (
    DemoGauge("avelhead", "Avelhead", 0.0, mean_m=1.71),
    DemoGauge("brenmoor", "Brenmoor Quay", 78.0, layout="semicolons", mean_m=2.02),
    DemoGauge("corvath", "Corvath", 171.0, mean_m=1.64, clock_min=11.0),
    DemoGauge("dellisk", "Dellisk", 246.0, layout="semicolons", mean_m=1.88),
    DemoGauge("eskarra", "Eskarra", 342.0, mean_m=1.55, step_m=0.08),
    DemoGauge("ferrowby", "Ferrowby", 431.0, layout="semicolons", mean_m=1.79, scale=1 / 0.3048),
    DemoGauge("gallenholm", "Gallenholm", 524.0, mean_m=1.93),
    DemoGauge("hathmar", "Hathmar", 618.0, mean_m=1.60, zone_h=6.0),
    DemoGauge("ossel", "Ossel Bank", 210.0, 62.0, reference="sensor zero", mean_m=14.2),
    DemoGauge("tarvik", "Tarvik Shoal", 402.0, 118.0, layout="semicolons", reference="sensor zero", mean_m=21.6),
)


def wave() -> KelvinWave:
    """The Kelvin wave that makes the tide of this coast."""
    return KelvinWave(DEPTH_M, MEAN_LATITUDE_DEG)


def true_constants(gauge: DemoGauge) -> HarmonicConstants:
    """Constants of the tide at a gauge: the wave carries them along the coast and decays away from it."""
    kelvin, names = wave(), tuple(TIDE)
    amplitude, lag = np.array(list(TIDE.values())).T
    # Long-period tides are the weather's and the same everywhere; the rest is the wave.
    carried = np.array([resolve(name).species > 0 for name in names])
    travelled = np.array([kelvin.lag_deg(gauge.along_km, speed) for speed in speeds_deg_per_h(names)])
    nan = np.full(len(names), np.nan)
    return HarmonicConstants(
        names=names,
        amplitude_m=np.where(carried, amplitude * kelvin.amplitude_ratio(gauge.offshore_km), amplitude),
        phase_lag_deg=np.mod(lag + np.where(carried, travelled, 0.0), 360.0),
        amplitude_sd_m=nan,
        phase_lag_sd_deg=nan,
        basis=("published",) * len(names),
        mean_level_m=gauge.mean_m,
    )
