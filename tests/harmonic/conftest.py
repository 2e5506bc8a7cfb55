"""The oracle: plain least squares, row by row, with exact f and u; and gaps as gauges have them."""

from collections.abc import Callable

import numpy as np
import pytest
from numpy.typing import NDArray

from tidekit.harmonic.plan import Plan

Array = NDArray[np.float64]
Oracle = Callable[[Plan, float, Array, Array], Array]
Gaps = Callable[[int, float, int], NDArray[np.bool_]]


def design(plan: Plan, reference_h: float, t_h: Array) -> Array:
    """Real design matrix of a plan from the exact columns, in the order of its parameter names."""
    exact = plan.columns(reference_h).at(t_h)
    return exact.view(np.float64) @ plan.mixing


@pytest.fixture(scope="session")
def oracle() -> Oracle:
    """Least squares on a ready-made design matrix."""
    return lambda plan, reference_h, t_h, y: np.linalg.lstsq(design(plan, reference_h, t_h), y, rcond=None)[0]


@pytest.fixture(scope="session")
def gaps() -> Gaps:
    """Which of n samples are left when about a part of them is missing in runs of a length."""

    def keep(count: int, part: float, run: int) -> NDArray[np.bool_]:
        kept = np.ones(count, dtype=np.bool_)
        for start in np.random.default_rng(5).integers(0, count - run, round(count * part / run)):
            kept[start : start + run] = False
        return kept

    return keep
