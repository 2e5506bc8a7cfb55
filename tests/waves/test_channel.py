"""Amphidromes of opposed Kelvin waves: found by searching the summed field (scipy), not by the formula."""

import math

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.optimize import minimize

from tidekit.errors import AnalysisError
from tidekit.waves.channel import amphidrome_offset_km, amphidrome_spacing_km, opposed_waves_m
from tidekit.waves.kelvin import KelvinWave
from tidekit.waves.rotation import angular_speed_rad_per_s

M2 = angular_speed_rad_per_s(28.9841042)
SEARCH_KM = 1e-2
"""What the minimiser reaches of a cone's tip, against distances of tens of km."""


def amphidrome(wave: KelvinWave, reflection: float, near_km: float) -> tuple[float, float]:
    def amplitude(place: np.ndarray) -> float:
        return float(abs(opposed_waves_m(wave, M2, place[0], place[1], reflection=reflection)))

    found = minimize(amplitude, [near_km, 5.0], method="Nelder-Mead", options={"xatol": 1e-4, "fatol": 1e-9})
    assert found.fun < 1e-5
    return float(found.x[0]), float(found.x[1])


@pytest.mark.parametrize("reflection", [1.0, 0.8, 0.5])
@pytest.mark.parametrize("latitude_deg", [55.0, -55.0])
def test_amphidromes_lie_where_the_field_vanishes(latitude_deg: float, reflection: float) -> None:
    wave = KelvinWave(74.0, latitude_deg)
    quarter = amphidrome_spacing_km(wave, M2) / 2
    first, second = amphidrome(wave, reflection, 0.9 * quarter), amphidrome(wave, reflection, 3.1 * quarter)
    assert_allclose(second[0] - first[0], amphidrome_spacing_km(wave, M2), atol=SEARCH_KM)
    assert_allclose([first[1], second[1]], amphidrome_offset_km(wave, reflection), atol=SEARCH_KM)


def test_each_wave_is_strongest_at_its_own_coast() -> None:
    wave, width = KelvinWave(74.0, 55.0), 400.0
    along = np.linspace(0.0, 2 * amphidrome_spacing_km(wave, M2), 721)  # one wavelength: the mean square sees both
    incident_side, reflected_side = (
        np.sqrt(np.mean(np.abs(opposed_waves_m(wave, M2, along[:-1], across, reflection=0.5)) ** 2))
        for across in (-width / 2, width / 2)
    )
    decay = math.exp(width / wave.rossby_radius_km)
    assert_allclose(incident_side**2, decay + 0.25 / decay, rtol=1e-9)
    assert_allclose(reflected_side**2, 1 / decay + 0.25 * decay, rtol=1e-9)


@pytest.mark.parametrize("reflection", [0.0, 1.2, math.nan])
def test_reflection_is_a_share(reflection: float) -> None:
    with pytest.raises(AnalysisError, match="above 0 and at most 1"):
        amphidrome_offset_km(KelvinWave(50.0, 45.0), reflection)
