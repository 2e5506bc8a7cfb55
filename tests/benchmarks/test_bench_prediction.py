"""How fast predictions are: each against the plain way to the same numbers, run small in every test run."""

import time
from collections.abc import Callable

import numpy as np
from numpy.testing import assert_allclose

from tidekit.constituents.catalogue import catalogue, speeds_deg_per_h
from tidekit.constituents.constants import HarmonicConstants
from tidekit.constituents.modulation import carriers
from tidekit.prediction.heights import predict_heights
from tidekit.prediction.turning_points import turning_points

NAMES = catalogue()[:68]
HOURS_OF_19_YEARS = 19 * 8766.0
BLOCK_TOLERANCE_M = 5e-5
"""Some 3e-5 m was measured, for amplitudes that add up to 8 m; see `BLOCK_H`."""


def constants_of(names: tuple[str, ...]) -> HarmonicConstants:
    rng = np.random.default_rng(3)
    unknown = np.full(len(names), np.nan)
    return HarmonicConstants(
        names=names,
        # Fast constituents small, as in nature: otherwise every tide has many waters.
        amplitude_m=rng.uniform(0.1, 0.3, len(names)) / np.maximum(speeds_deg_per_h(names) / 15.0, 1.0) ** 3,
        phase_lag_deg=rng.uniform(0.0, 360.0, len(names)),
        amplitude_sd_m=unknown,
        phase_lag_sd_deg=unknown,
        basis=("fitted",) * len(names),
    )


def seconds(work: Callable[[], object]) -> float:
    """Best of three, as the machine may be busy."""
    best = np.inf
    for _ in range(3):
        start = time.perf_counter()
        work()
        best = min(best, time.perf_counter() - start)
    return best


def test_heights_against_the_plain_sum() -> None:
    """Three months at 6 minutes, 68 constituents: at least 4 times as fast (11 times was measured)."""
    constants, t_h = constants_of(NAMES), np.arange(0.0, 2200.0, 0.1)

    def plain() -> np.ndarray:
        return np.asarray((carriers(constants.names, t_h) @ constants.phasors_m).real)

    assert_allclose(predict_heights(constants, t_h), plain(), atol=BLOCK_TOLERANCE_M, rtol=0)
    assert seconds(plain) > 4 * seconds(lambda: predict_heights(constants, t_h))


def test_turning_points_against_dense_heights() -> None:
    """A year, 68 constituents: roots cost less than heights every 10 s, which know times to 10 s only.

    They cost as much as heights every minute (0.07 s).
    """
    constants = constants_of(NAMES)
    t_h = np.arange(0.0, 8766.0, 1 / 360)
    roots = seconds(lambda: turning_points(constants, 0.0, 8766.0))
    assert roots < seconds(lambda: predict_heights(constants, t_h))


def test_a_nodal_cycle_of_turning_points() -> None:
    """19 years, 68 constituents, in a couple of seconds."""
    constants = constants_of(NAMES)
    start = time.perf_counter()
    points = turning_points(constants, 0.0, HOURS_OF_19_YEARS)
    assert len(points) > 2 * 19 * 353
    assert time.perf_counter() - start < 10.0  # a busy machine; 0.8 s was measured
