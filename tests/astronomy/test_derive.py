"""The script reproduces its table: a part of it, over a shorter span."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

pytest.importorskip("erfa", reason="pyerfa comes with the extra `test`")

from tidekit.astronomy.arguments import candidates
from tidekit.astronomy.derive import derive, slow_function, sun_pair, table_text
from tidekit.astronomy.kepler_sun import harmonic, sun_on_ellipse
from tidekit.astronomy.potential import potential_lines
from tidekit.astronomy.sky import Body

SHORT_SPAN_DAYS = 100 * 365.25
"""Two centuries part lines 80 years apart, which the degree-3 terdiurnal lines mostly are."""
SHORT_SPAN_M = 2e-6
"""What neighbours closer than that share differently in a shorter span; a hundredth of the printed digits."""


def test_a_part_of_the_table_is_reproduced() -> None:
    lines = potential_lines()
    part = (lines.degree == 3) & (lines.doodson[:, 0] == 3) & (np.abs(lines.amplitude_m) > 5e-5)
    table = {tuple(map(int, n)): a for n, a in zip(lines.doodson[part], lines.amplitude_m[part], strict=True)}
    found = {line.doodson: line.amplitude_m for line in derive(SHORT_SPAN_DAYS, wanted=[(3, 3)])}
    assert len(table) >= 15
    assert_allclose([found[number] for number in table], list(table.values()), atol=SHORT_SPAN_M, rtol=0)


ECCENTRICITY = 0.0167086
SERIES = 1e-3
"""The series of Hansen's coefficients is cut at the fourth power of the eccentricity, 3e-4 of its second."""


def test_the_suns_pairs_are_split_on_an_ellipse() -> None:
    """P1's companion of twice the perigee comes from K1's solar part, by (a/r)^3 alone.

    Hansen's coefficients of (a/r)^3: constant 1 + 3/2 e^2, second harmonic 9/4 e^2 on either side (Brouwer and
    Clemence, "Methods of Celestial Mechanics", 1961, chapter II, from memory).
    """
    ascension, declination, nearness = sun_on_ellipse()
    sun = Body(mass_over_earth=1.0, right_ascension_rad=ascension, declination_rad=declination, parallax=nearness)
    field = slow_function(sun, 2, 1)
    ratio = (harmonic(field, -2, 2) / harmonic(field, 0, 0)).real
    assert_allclose(ratio, 2.25 * ECCENTRICITY**2 / (1 + 1.5 * ECCENTRICITY**2), rtol=SERIES)
    pair = sun_pair((1, 1, -2, 0, 0, 0), 2)
    assert pair[(1, 1, -2, 0, 0, 0)] == 1.0
    assert_allclose(pair[(1, 1, -2, 0, 0, 2)], (harmonic(field, -2, 2) / harmonic(field, -2, 0)).real, rtol=SERIES)


def test_candidates_obey_the_symmetries() -> None:
    numbers = [number for group in candidates(2, 2, moon=True) for number in group]
    for tau, s, h, p, n_prime, p_s in numbers:
        # Back to Delaunay's angles: F's multiple is even for degree 2, Omega's at most 2.
        b, a = -p_s, -p
        d = b - h
        c = s - tau - a - d
        assert c % 2 == 0
        assert abs(c - n_prime) <= 2


def test_the_table_states_its_convention() -> None:
    text = table_text([])
    assert "made by python -m tidekit.astronomy.derive" in text
    assert "# epoch_centuries: 0.0" in text
