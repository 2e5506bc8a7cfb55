"""Whether constituents travel at one speed: uniform probabilities where they do, a name where one does not."""

from dataclasses import replace

import numpy as np
import pytest
import scipy.stats
from numpy.testing import assert_allclose

from tests.network.simulate import Coast, Fault
from tidekit.network.dispersion import DISPERSION_LEVEL, Dispersion, dispersion
from tidekit.network.gauges import TideArrays, tide_arrays
from tidekit.network.lines import gauge_delays

COAST = Coast(along_km=np.array([0.0, 90.0, 150.0, 260.0, 330.0, 420.0, 510.0, 600.0]), offshore_km=np.zeros(8))
SLOWNESS = 1.0 / (3.6 * COAST.wave.speed_m_per_s)


def tried(coast: Coast, seed: int, *, slower: tuple[str, float] = ("M2", 0.0)) -> Dispersion:
    tides: TideArrays = tide_arrays(coast.gauges(np.random.default_rng(seed)))
    column, extra = tides.names.index(slower[0]), slower[1] * SLOWNESS * tides.along_km
    lag = tides.lag_deg.copy()
    lag[:, column] += extra * tides.speeds_deg_per_h[column]
    tides = replace(tides, lag_deg=lag % 360.0)
    return dispersion(tides, gauge_delays(tides), np.ones(8, dtype=bool), SLOWNESS)


def test_probabilities_are_uniform_without_dispersion() -> None:
    # Places that scatter by ten minutes say nothing of dispersion: all constituents share them.
    coast = replace(COAST, delay_scatter_min=10.0)
    p = [tried(coast, seed).p for seed in range(150)]
    assert scipy.stats.kstest(p, "uniform").pvalue > 0.01


@pytest.mark.parametrize("name", ["K1", "S2", "M2"])
def test_a_constituent_of_another_speed_is_named(name: str) -> None:
    found = tried(COAST, 3, slower=(name, 0.2))
    assert found.p < DISPERSION_LEVEL
    if name != "M2":  # the strongest is the measure of the others
        assert found.name == name
        assert_allclose(found.spread, 0.2, atol=0.03)


def test_a_wrong_clock_is_no_dispersion() -> None:
    assert tried(replace(COAST, faults={2: Fault(late_h=6.0)}), 4).p > DISPERSION_LEVEL


def test_little_cannot_be_tested() -> None:
    tides = tide_arrays(COAST.gauges(np.random.default_rng(1)))
    two = np.zeros(8, dtype=bool)
    two[:2] = True
    assert np.isnan(dispersion(tides, gauge_delays(tides), two, SLOWNESS).p)
    alone = tide_arrays(COAST.gauges(np.random.default_rng(1)), constituents=["M2"])
    assert np.isnan(dispersion(alone, gauge_delays(alone), np.ones(8, dtype=bool), SLOWNESS).p)
