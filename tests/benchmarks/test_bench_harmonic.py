"""The analyser against plain least squares on a ready-made design matrix, small in the test run.

``python tests/benchmarks/test_bench_harmonic.py 20`` takes twenty years of hourly heights with gaps in runs of 5 % and
prints medians of several runs and their ratios; set OMP_NUM_THREADS to state the threads of the linear algebra.
"""

from __future__ import annotations

import statistics
import sys
import time
from collections.abc import Callable

import numpy as np
import statsmodels.api
from numpy.testing import assert_allclose

from tidekit.constituents.modulation import carriers
from tidekit.constituents.resolution import resolvable
from tidekit.harmonic.analysis import analyse

MICROMETRE = 1e-6
"""The bar: the fast path's coefficients against the row-by-row fit with exact f and u."""


def record(years: float, seed: int = 1) -> tuple[tuple[str, ...], np.ndarray, np.ndarray, np.ndarray]:
    """Constituents, times, heights, and the row-by-row design matrix of a made record."""
    random = np.random.default_rng(seed)
    t_h = -80000.0 + np.arange(round(years * 8766.0))
    keep = np.ones(len(t_h), dtype=bool)
    while keep.mean() > 0.95:
        start = int(random.integers(0, len(t_h)))
        keep[start : start + int(random.integers(10, 200))] = False
    t_h = t_h[keep]
    names = resolvable(365.0 * 24.0)[-68:]
    waves = carriers(names, t_h)
    design = np.column_stack([np.ones(len(t_h)), waves.real, -waves.imag])
    truth = random.normal(0.0, 0.1, design.shape[1])
    return names, t_h, design @ truth + random.normal(0.0, 0.05, len(t_h)), design


def median_s(work: Callable[[], object], runs: int) -> float:
    """Median seconds of several runs after one that does not count."""
    work()
    seconds = []
    for _ in range(runs):
        began = time.perf_counter()
        work()
        seconds.append(time.perf_counter() - began)
    return statistics.median(seconds)


def measure(years: float, runs: int) -> dict[str, float]:
    """Medians of the fit with covariance, of statsmodels' OLS and of numpy's normal matrix; and the largest misfit."""
    names, t_h, height_m, design = record(years)
    fit = analyse(t_h, height_m, constituents=names)
    plain = np.linalg.lstsq(design, height_m, rcond=None)[0]
    phasors = plain[1 : 1 + len(names)] + 1j * plain[1 + len(names) :]
    found = fit.constants.select(names).phasors_m
    return {
        "fit with covariance [s]": median_s(lambda: analyse(t_h, height_m, constituents=names), runs),
        "statsmodels OLS [s]": median_s(
            lambda: statsmodels.api.OLS(height_m, design).fit().cov_params(), max(runs // 3, 1)
        ),
        "numpy X'X [s]": median_s(lambda: design.T @ design, runs),
        "largest misfit of a phasor [m]": float(np.abs(found - phasors).max()),
    }


def test_the_fit_agrees_with_plain_least_squares() -> None:
    assert_allclose(measure(1.0, 1)["largest misfit of a phasor [m]"], 0.0, atol=MICROMETRE)


if __name__ == "__main__":
    figures = measure(float(sys.argv[1]) if len(sys.argv) > 1 else 1.0, 5)
    for what, figure in figures.items():
        print(f"{what:<34}{figure:12.4g}")
    ours, ols, gram = (figures[name] for name in list(figures)[:3])
    print(f"OLS over fit {ols / ours:.1f}, X'X over fit {gram / ours:.2f}")
