"""The lines fitted along a coast: delay against distance, and level of the amplitudes against distance.

Distances along the coast are taken from the middle gauge, so that what is known beforehand of a level does not depend
on where a coast's kilometres begin.
"""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from tidekit.network.agreement import Prior, Scatter
from tidekit.network.coast import CoastTheory
from tidekit.network.delays import SEARCH_H, Delay, joint_delay, wrapped_deg
from tidekit.network.gauges import TideArrays
from tidekit.network.robust_line import RobustFit, plain_fit, robust_fit

Float = NDArray[np.float64]
Mask = NDArray[np.bool_]

DELAY_SCATTER = Scatter(
    floor=1.0 / math.sqrt(12.0) / 60.0, below=3.0 / 60.0, above=20.0 / 60.0, reach=26.0, usual=1.0 / 60.0
)
"""Of delays [h]. Floor: times stamped to the minute scatter by its rectangular law. A bay, a harbour or a strait makes
the tide late by tens of minutes and nothing makes it early; usual is a minute (common practice, no source). Zones span
-12 to +14 h."""
LEVEL_SCATTER = Scatter(floor=0.005, below=0.15, above=0.15, reach=math.log(1e3), usual=0.02)
"""Of log amplitudes: half a per cent at least, two usually; a bay may take or add a sixth (common practice, no source);
the wrong units of a record differ by a factor of a thousand at most."""
JUDGING_FREEDOM = 2
"""Gauges' worth of belief in the usual scatter where a gauge is judged: the few others alone could never tell (common
practice, no source)."""
_SLOWEST_KM_PER_H = 18.0
"""Slowest long wave that is sought: 5 m/s, in water 2.5 m deep. [km/h]"""
_LEVEL_SD_H = 24.0
_TREND_SD = 1.0
"""Amplitudes change along a coast by a factor of e in a thousand km, one standard deviation (common practice, no
source)."""
_DECAY_SD = 0.01
"""Decay offshore where theory is silent: a trapping scale of 100 km, either way. [1/km]"""
LOOSE_SHARE, SHELF_SHARE = 1.0, 0.25
"""Parts of the theory's slowness and decay offshore that may be otherwise, one standard deviation: where they are
measured, so that theory speaks only where two readings of the gauges are as good as each other, and where a gauge is
judged by the decay (common practice, no source)."""


def gauge_delays(tides: TideArrays) -> tuple[Delay, ...]:
    """Delay of each gauge against the one whose phases the others match best, so that no broken one is the measure."""
    far = float(np.ptp(tides.along_km)) / _SLOWEST_KM_PER_H
    search = max(SEARCH_H, DELAY_SCATTER.reach + far)
    table = [_delays_against(tides, reference, search) for reference in range(len(tides.ids))]
    matches = [float(np.median([delay.log_likelihood for delay in row])) for row in table]
    return table[int(np.argmax(matches))]


def _delays_against(tides: TideArrays, reference: int, search_h: float) -> tuple[Delay, ...]:
    # Only a gauge's own errors: those of the reference shift all alike, and the line's level takes them up.
    return tuple(
        joint_delay(lag - tides.lag_deg[reference], sd, tides.speeds_deg_per_h, search_h=search_h)
        for lag, sd in zip(tides.lag_deg, tides.lag_sd_deg, strict=True)
    )


def delay_design(along_km: Float) -> Float:
    """Columns of the line of delays, shape (n, 2): level, and km from the middle gauge."""
    return np.column_stack([np.ones(len(along_km)), along_km - np.median(along_km)])


def delay_prior(theory: CoastTheory | None) -> Prior:
    """What is known of the line of delays beforehand: the Kelvin wave's slowness, loosely, or next to none."""
    slowness, sd = 0.0, 1.0 / _SLOWEST_KM_PER_H
    if theory is not None:
        slowness = theory.sense / (3.6 * theory.wave.speed_m_per_s)
        sd = LOOSE_SHARE * abs(slowness)
    return Prior(mean=np.array([0.0, slowness]), sd=np.array([_LEVEL_SD_H, sd]))


def fit_delays(design: Float, delays: tuple[Delay, ...], prior: Prior, *, belief: int = 0) -> RobustFit:
    """Line of delay [h] against distance [km]: coefficients are the middle gauge's delay and slowness."""
    values = np.array([delay.delay_h for delay in delays])
    own_sd = np.array([delay.delay_sd_h for delay in delays])
    return robust_fit(design, values, own_sd, scatter=replace(DELAY_SCATTER, usual_freedom=belief), prior=prior)


def constituent_line(tides: TideArrays, delays: tuple[Delay, ...], used: Mask, column: int, prior: Prior) -> RobustFit:
    """Line of one constituent's own delays, unwrapped beside the joint ones, over the gauges that agree."""
    speed = tides.speeds_deg_per_h[column]
    own = joint_h(delays) + unexplained_deg(tides, delays)[:, column] / speed
    return plain_fit(
        delay_design(tides.along_km),
        own,
        tides.lag_sd_deg[:, column] / speed,
        used,
        scatter=DELAY_SCATTER,
        prior=prior,
    )


def joint_h(delays: tuple[Delay, ...]) -> Float:
    """Delays as an array, shape (n,). [h]"""
    return np.array([delay.delay_h for delay in delays])


def unexplained_deg(tides: TideArrays, delays: tuple[Delay, ...]) -> Float:
    """Phase lags less the joint delays and less the reference's own, wrapped, shape (n, k). [degrees]"""
    steady = tides.lag_deg - np.outer(joint_h(delays), tides.speeds_deg_per_h)
    middle = np.rad2deg(np.angle(np.exp(1j * np.deg2rad(steady)).sum(axis=0)))
    return wrapped_deg(steady - middle)


def level_design(along_km: Float, offshore_km: Float) -> Float:
    """Columns of `fit_levels`, shape (n, 3): level, thousands of km from the middle gauge, km offshore."""
    return np.column_stack([delay_design(along_km) * [1.0, 1e-3], offshore_km])


def level_prior(theory: CoastTheory | None, share: float) -> Prior:
    """What is known of amplitudes beforehand: where there is a theory its decay offshore, but for a share of it."""
    decay, decay_sd = 0.0, _DECAY_SD
    if theory is not None:
        decay = -1.0 / theory.wave.rossby_radius_km
        decay_sd = share * abs(decay)
    return Prior(mean=np.array([0.0, 0.0, decay]), sd=np.array([LEVEL_SCATTER.reach, _TREND_SD, decay_sd]))


def fit_levels(
    tides: TideArrays, design: Float, prior: Prior, column: int | None = None, *, belief: int = 0
) -> RobustFit:
    """Log amplitude of a constituent, or the mean over all, on a constant, distance along, and distance offshore.

    The slope along the coast stands for friction and changing depth.
    """
    columns = np.arange(len(tides.names)) if column is None else np.array([column])
    logs = np.log(tides.amplitude_m[:, columns])
    values = np.mean(logs - np.median(logs, axis=0), axis=1)
    sd = np.sqrt(np.sum(tides.log_amplitude_sd[:, columns] ** 2, axis=1)) / len(columns)
    return robust_fit(design, values, sd, scatter=replace(LEVEL_SCATTER, usual_freedom=belief), prior=prior)
