"""The tide at the gauges of a network, as arrays: what the wave fit works on."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from tidekit.constituents.catalogue import resolve, speeds_deg_per_h
from tidekit.constituents.constants import HarmonicConstants
from tidekit.records.station import Station

Float = NDArray[np.float64]

WAVE_CONSTITUENTS = ("M2", "S2", "N2", "K2", "K1", "O1", "P1", "Q1")
"""Constituents that serve for waves: astronomical, strong nearly everywhere, and spread over two bands."""
CLEAR_RATIO = 10.0
"""An amplitude serves where it is this many of its own standard deviations."""
FEW_SHARE = 0.5
"""A gauge with no more than this share of the constituents that the median gauge shows clearly is left out."""
UNKNOWN_SD = 0.01
"""Relative amplitude error, and phase error in radians, of constants that state none."""


@dataclass(frozen=True, eq=False, kw_only=True)
class GaugeTide:
    """One gauge: where it stands and its constants."""

    station: Station
    """Place; needs `along_coast_km` to enter the wave fit."""
    constants: HarmonicConstants
    """Harmonic constants."""

    @property
    def in_fit(self) -> bool:
        """Whether the gauge can enter the wave fit."""
        return self.station.open_coast and self.station.along_coast_km is not None


@dataclass(frozen=True, eq=False, kw_only=True)
class TideArrays:
    """Phase lags and amplitudes of k constituents at n gauges, arrays of shape (n, k) unless said."""

    ids: tuple[str, ...]
    """Gauge ids."""
    names: tuple[str, ...]
    """Constituents, in order of speed."""
    speeds_deg_per_h: Float
    """Speeds, shape (k,). [degrees per hour]"""
    along_km: Float
    """Positions along the coast, shape (n,). [km]"""
    offshore_km: Float
    """Distances offshore, shape (n,). [km]"""
    lag_deg: Float
    """Phase lags. [degrees]"""
    lag_sd_deg: Float
    """Their standard deviations. [degrees]"""
    amplitude_m: Float
    """Amplitudes. [m]"""
    log_amplitude_sd: Float
    """Relative standard deviations of the amplitudes."""

    def rows(self, rows: NDArray[np.int64]) -> TideArrays:
        """Some gauges only."""
        return TideArrays(
            ids=tuple(self.ids[row] for row in rows),
            names=self.names,
            speeds_deg_per_h=self.speeds_deg_per_h,
            along_km=self.along_km[rows],
            offshore_km=self.offshore_km[rows],
            lag_deg=self.lag_deg[rows],
            lag_sd_deg=self.lag_sd_deg[rows],
            amplitude_m=self.amplitude_m[rows],
            log_amplitude_sd=self.log_amplitude_sd[rows],
        )


def tide_arrays(gauges: Sequence[GaugeTide], *, constituents: Sequence[str] | None = None) -> TideArrays:
    """Collect what the wave fit needs from gauges that can enter it.

    Parameters
    ----------
    gauges : sequence of GaugeTide
        All gauges; those that cannot enter the fit are left out, and those that show few constituents clearly (a dead
        sensor, a table of one constituent) beside the others, which would leave the others none in common.
    constituents : sequence of str, optional
        Constituents to use, `WAVE_CONSTITUENTS` by default.

    Returns
    -------
    TideArrays
        Constituents that every gauge has, fitted or published (an inferred one carries no evidence of its own),
        well above their errors.
    """
    wanted = [resolve(name).name for name in (constituents or WAVE_CONSTITUENTS)]
    able = [gauge for gauge in gauges if gauge.in_fit]
    clear = [{name for name in wanted if _clear(gauge.constants, name)} for gauge in able]
    usual = float(np.median([len(names) for names in clear])) if able else 0.0
    chosen = [gauge for gauge, names in zip(able, clear, strict=True) if len(names) > FEW_SHARE * usual]
    names = [name for name in wanted if chosen and all(_clear(gauge.constants, name) for gauge in chosen)]
    names.sort(key=lambda name: resolve(name).speed_deg_per_h)
    return _stacked(chosen, names)


def _stacked(gauges: Sequence[GaugeTide], names: Sequence[str]) -> TideArrays:
    tables = [gauge.constants.select(names) for gauge in gauges]
    shape = (len(gauges), len(names))

    def stack(field: str) -> Float:
        return np.array([getattr(table, field) for table in tables], dtype=np.float64).reshape(shape)

    amplitude = stack("amplitude_m")
    relative = stack("amplitude_sd_m") / amplitude
    lag_sd = stack("phase_lag_sd_deg")
    return TideArrays(
        ids=tuple(gauge.station.id for gauge in gauges),
        names=tuple(names),
        speeds_deg_per_h=speeds_deg_per_h(names),
        along_km=np.array([gauge.station.along_coast_km for gauge in gauges], dtype=np.float64),
        offshore_km=np.array([gauge.station.offshore_km or 0.0 for gauge in gauges], dtype=np.float64),
        lag_deg=stack("phase_lag_deg"),
        lag_sd_deg=np.where(np.isfinite(lag_sd), lag_sd, np.rad2deg(UNKNOWN_SD)),
        amplitude_m=amplitude,
        log_amplitude_sd=np.where(np.isfinite(relative), relative, UNKNOWN_SD),
    )


def _clear(constants: HarmonicConstants, name: str) -> bool:
    if name not in constants.names:
        return False
    row = constants.names.index(name)
    spread = constants.amplitude_sd_m[row]
    amplitude = constants.amplitude_m[row]
    loud = amplitude > CLEAR_RATIO * spread if np.isfinite(spread) else amplitude > 0.0
    return constants.basis[row] != "inferred" and bool(loud)
