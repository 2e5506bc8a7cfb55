"""Two opposed Kelvin waves in a channel: their amphidromes.

References
----------
.. [1] Taylor, G. I., "Tidal oscillations in gulfs and rectangular basins", Proc. Lond. Math. Soc. (2) 20 (1921)
   148-181.
.. [2] Hendershott, M. C. and Speranza, A., "Co-oscillating tides in long, narrow bays; the Taylor problem
   revisited", Deep-Sea Res. 18 (1971) 959-980.
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import ArrayLike, NDArray

from tidekit.errors import AnalysisError
from tidekit.waves.kelvin import KelvinWave


def amphidrome_spacing_km(wave: KelvinWave, frequency: float) -> float:
    """Distance between amphidromes along the channel, half a Kelvin wavelength ``pi c / w``. [km]"""
    return math.pi * wave.speed_m_per_s / frequency / 1e3


def amphidrome_offset_km(wave: KelvinWave, reflection: float) -> float:
    """Distance of the amphidromes from mid-channel toward the reflected wave's coast, ``-(c / 2|f|) ln(alpha)``.

    Parameters
    ----------
    wave : KelvinWave
        Depth and latitude.
    reflection : float
        Amplitude alpha of the reflected wave over the incident one's, 0 to 1.

    Returns
    -------
    float
        Distance; beyond half the width the amphidrome is virtual, on land. [km]

    Raises
    ------
    AnalysisError
        If the reflection is not above 0 and at most 1.
    """
    if not 0.0 < reflection <= 1.0:
        message = f"reflection is {reflection:g}; wanted above 0 and at most 1"
        raise AnalysisError(message)
    return 0.5 * wave.rossby_radius_km * math.log(1.0 / reflection)  # 0, not -0, for equal waves


def opposed_waves_m(
    wave: KelvinWave, frequency: float, along_km: ArrayLike, across_km: ArrayLike, *, reflection: float = 1.0
) -> NDArray[np.complex128]:
    """Complex amplitude of an incident and a reflected Kelvin wave, each of amplitude 1 and alpha in mid-channel.

    Parameters
    ----------
    wave : KelvinWave
        Depth and latitude.
    frequency : float
        Frequency. [radians per second]
    along_km, across_km : array-like of shapes that broadcast
        Position along the incident wave's travel, and from mid-channel toward the reflected wave's coast. [km]
    reflection : float
        Amplitude alpha of the reflected wave.

    Returns
    -------
    ndarray of complex, broadcast shape
        Height is the real part of it times ``exp(-i w t)``; zero at an amphidrome. [m]
    """
    phase = np.asarray(along_km) * 1e3 * frequency / wave.speed_m_per_s
    decay = np.asarray(across_km) / wave.rossby_radius_km
    return np.asarray(np.exp(1j * phase - decay) + reflection * np.exp(-1j * phase + decay))
