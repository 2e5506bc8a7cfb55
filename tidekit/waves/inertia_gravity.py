"""Inertia-gravity (Poincare) waves and the channel that keeps them out.

References
----------
.. [1] Gill, A. E., "Atmosphere-Ocean Dynamics", Academic Press (1982), sections 8.2 and 10.5.
.. [2] Taylor, G. I., "Tidal oscillations in gulfs and rectangular basins", Proc. Lond. Math. Soc. (2) 20 (1921)
   148-181.
"""

from __future__ import annotations

import math

from tidekit.errors import AnalysisError
from tidekit.waves.kelvin import KelvinWave


def frequency_rad_per_s(wave: KelvinWave, wavenumber_rad_per_m: float) -> float:
    """Frequency of a free plane wave, ``sqrt(f^2 + g h k^2)``, never below the inertial. [radians per second]"""
    return math.hypot(wave.coriolis_rad_per_s, wave.speed_m_per_s * wavenumber_rad_per_m)


def wavelength_km(wave: KelvinWave, frequency: float) -> float:
    """Wavelength of a free plane wave of a frequency [radians per second]; infinite at and below f. [km]"""
    beyond = frequency**2 - wave.coriolis_rad_per_s**2
    return 2 * math.pi * wave.speed_m_per_s / math.sqrt(beyond) / 1e3 if beyond > 0 else math.inf


def critical_width_km(wave: KelvinWave, frequency: float, *, mode: int = 1) -> float:
    """Width of channel above which a cross-channel mode travels, ``n pi c / sqrt(w^2 - f^2)``.

    Parameters
    ----------
    wave : KelvinWave
        Depth and latitude of the channel.
    frequency : float
        Frequency w. [radians per second]
    mode : int
        Number n of the mode, from 1.

    Returns
    -------
    float
        Width; infinite at and below the inertial frequency, where only Kelvin waves travel. [km]

    Raises
    ------
    AnalysisError
        If the mode is below 1.
    """
    _check_mode(mode)
    return 0.5 * mode * wavelength_km(wave, frequency)


def evanescent_scale_km(wave: KelvinWave, frequency: float, width_km: float, *, mode: int = 1) -> float:
    """Distance over which a cross-channel mode that cannot travel falls to 1/e along the channel.

    Parameters
    ----------
    wave : KelvinWave
        Depth and latitude of the channel.
    frequency : float
        Frequency w. [radians per second]
    width_km : float
        Width W of the channel. [km]
    mode : int
        Number n of the mode, from 1.

    Returns
    -------
    float
        ``1 / sqrt((n pi / W)^2 - (w^2 - f^2) / c^2)``; infinite if the mode travels. [km]

    Raises
    ------
    AnalysisError
        If the width is not positive or the mode is below 1.
    """
    _check_mode(mode)
    if not width_km > 0:
        message = f"width is {width_km:g} km; wanted a positive number of kilometres"
        raise AnalysisError(message)
    across = mode * math.pi / (width_km * 1e3)
    beyond = across**2 - (frequency**2 - wave.coriolis_rad_per_s**2) / wave.speed_m_per_s**2
    return 1e-3 / math.sqrt(beyond) if beyond > 0 else math.inf


def _check_mode(mode: int) -> None:
    if mode < 1:
        message = f"mode is {mode}; cross-channel modes count from 1"
        raise AnalysisError(message)
