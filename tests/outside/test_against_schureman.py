"""Nodal factors against the published formulae.

Schureman (1940), Special Publication 98, and Doodson and Warburg (1941), "Admiralty Manual of Tides": both
from memory. The K2 constant of the first is remembered as 0.0981, which does not fit its other constants;
0.1006 does (0.0727 squared times 19.0444) and makes the mean of f cos u one.
"""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from tidekit.astronomy.longitudes import mean_longitudes_rad
from tidekit.constituents.modulation import nodal_factors, side_lines
from tidekit.constituents.schureman import schureman_factors

F_TOLERANCE = 0.003
U_TOLERANCE_DEG = 0.15
"""The bars of the published formulae, whose own two series differ by up to 0.003 and 0.13 degrees (OO1)."""

NODAL_CYCLE_H = np.linspace(-6 * 8766.0, 13 * 8766.0, 400)  # 1994 to 2013, a whole cycle of 18.6 years
NAMES = ["M2", "N2", "O1", "Q1", "K1", "K2", "J1", "Mf", "Mm"]


def node_only_factor(name: str, t_h: np.ndarray) -> np.ndarray:
    """Exact f exp(iu) without the lines of the perigee, which these formulae leave out."""
    differences, ratio, _ = side_lines(name)
    node_lines = (differences[:, 0] == 0) & (differences[:, 2] == 0)
    node = mean_longitudes_rad(t_h)[:, 4]
    return np.exp(1j * np.outer(node, differences[node_lines, 1])) @ ratio[node_lines]


@pytest.mark.parametrize("name", NAMES)
def test_side_lines_against_schureman(name: str) -> None:
    ours, published = node_only_factor(name, NODAL_CYCLE_H), schureman_factors(name, NODAL_CYCLE_H)
    assert_allclose(np.abs(ours), np.abs(published), atol=F_TOLERANCE, rtol=0)
    assert_allclose(np.rad2deg(np.angle(ours / published)), 0.0, atol=U_TOLERANCE_DEG)


DOODSON_WARBURG = {
    "Mm": ([1.0, -0.1300, 0.0013], []),
    "Mf": ([1.0429, 0.4135, -0.0040], [-23.74, 2.68, -0.38]),
    "O1": ([1.0089, 0.1871, -0.0147, 0.0014], [10.80, -1.34, 0.19]),
    "K1": ([1.0060, 0.1150, -0.0088, 0.0006], [-8.86, 0.68, -0.07]),
    "J1": ([1.0129, 0.1676, -0.0170, 0.0016], [-12.94, 1.34, -0.19]),
    "M2": ([1.0004, -0.0373, 0.0002], [-2.14]),
    "K2": ([1.0241, 0.2863, 0.0083, -0.0015], [-17.74, 0.68, -0.04]),
    "OO1": ([1.1027, 0.6504, 0.0317, -0.0014], [-36.68, 4.02, -0.57]),
}
SERIES_F, SERIES_U_DEG = 0.0035, 0.14
"""Largest differences known between the two published forms (OO1), with rounding."""


@pytest.mark.parametrize("name", list(DOODSON_WARBURG))
def test_published_formulae_against_the_series(name: str) -> None:
    cosines, sines = DOODSON_WARBURG[name]
    node = -mean_longitudes_rad(NODAL_CYCLE_H)[:, 4]
    factor = schureman_factors(name, NODAL_CYCLE_H)
    f = sum(c * np.cos(k * node) for k, c in enumerate(cosines))
    u = sum((c * np.sin(k * node) for k, c in enumerate(sines, 1)), np.zeros_like(node))
    assert_allclose(np.abs(factor), f, atol=SERIES_F, rtol=0)
    assert_allclose(np.rad2deg(np.angle(factor)), u, atol=SERIES_U_DEG)


L2_SERIES = 0.0156
"""The smallest term that the series of L2 keeps."""


def test_l2_against_its_series() -> None:
    """Doodson and Warburg's L2, with both angles of the perigee."""
    longitudes = mean_longitudes_rad(NODAL_CYCLE_H)
    p, node = longitudes[:, 3], -longitudes[:, 4]
    real = 1 - 0.2505 * np.cos(2 * p) - 0.1102 * np.cos(2 * p - node) - 0.0156 * np.cos(2 * p - 2 * node)
    real -= 0.0370 * np.cos(node)
    imaginary = -0.2505 * np.sin(2 * p) - 0.1102 * np.sin(2 * p - node) - 0.0156 * np.sin(2 * p - 2 * node)
    imaginary -= 0.0370 * np.sin(node)
    series = real + 1j * imaginary
    for factor in (nodal_factors(["L2"], NODAL_CYCLE_H)[:, 0], schureman_factors("L2", NODAL_CYCLE_H)):
        assert_allclose(np.abs(factor - series), 0.0, atol=L2_SERIES)
