"""Arguments and modulation: conventions, compounds, calendar years."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from tidekit.astronomy.longitudes import mean_longitudes_rad
from tidekit.astronomy.timescales import hours_from_datetime64
from tidekit.constituents.catalogue import catalogue, resolve
from tidekit.constituents.modulation import arguments_rad, carriers, mid_year_h, nodal_factors
from tidekit.errors import ConstituentError

ROUNDING = 1e-9  # arguments reach 1e7 radians over a century: double precision leaves 1e-9

# V in the hour angle T of the mean Sun (15 t + 180 degrees) and s, h, p, p_s, with degrees added:
# Schureman (1940) Table 2, from memory.
SCHUREMAN_V = {
    "M2": (2, -2, 2, 0, 0, 0),
    "S2": (2, 0, 0, 0, 0, 0),
    "N2": (2, -3, 2, 1, 0, 0),
    "K2": (2, 0, 2, 0, 0, 0),
    "nu2": (2, -3, 4, -1, 0, 0),
    "mu2": (2, -4, 4, 0, 0, 0),
    "2N2": (2, -4, 2, 2, 0, 0),
    "lambda2": (2, -1, 0, 1, 0, 180),
    "L2": (2, -1, 2, -1, 0, 180),
    "T2": (2, 0, -1, 0, 1, 0),
    "R2": (2, 0, 1, 0, -1, 180),
    "K1": (1, 0, 1, 0, 0, -90),
    "O1": (1, -2, 1, 0, 0, 90),
    "P1": (1, 0, -1, 0, 0, 90),
    "Q1": (1, -3, 1, 1, 0, 90),
    "2Q1": (1, -4, 1, 2, 0, 90),
    "rho1": (1, -3, 3, -1, 0, 90),
    "J1": (1, 1, 1, -1, 0, -90),
    "OO1": (1, 2, 1, 0, 0, -90),
    "S1": (1, 0, 0, 0, 0, 0),
    "M3": (3, -3, 3, 0, 0, 0),
    "Mm": (0, 1, 0, -1, 0, 0),
    "Mf": (0, 2, 0, 0, 0, 0),
    "MSf": (0, 2, -2, 0, 0, 0),
    "Sa": (0, 0, 1, 0, 0, 0),
    "Ssa": (0, 0, 2, 0, 0, 0),
}


@pytest.mark.parametrize("name", list(SCHUREMAN_V))
def test_arguments_are_the_trades(name: str) -> None:
    t_h = np.linspace(-5e5, 3e5, 50)
    numbers = np.array(SCHUREMAN_V[name], dtype=float)
    tau, s, h, p, _, p_s = mean_longitudes_rad(t_h).T
    mean_sun = tau + s - h + np.pi
    expected = np.stack([mean_sun, s, h, p, p_s, np.full_like(s, np.pi / 180)], axis=1) @ numbers
    difference = np.exp(1j * (arguments_rad([name], t_h)[:, 0] - expected))
    assert_allclose(difference, 1.0, atol=ROUNDING)


def test_compounds_multiply_their_parts() -> None:
    t_h = np.linspace(0.0, 2e5, 20)
    m2, s2, k1, double, difference = nodal_factors(["M2", "S2", "K1", "2MS6", "2*M2 - K1"], t_h).T
    assert_allclose(double, m2**2 * s2, atol=ROUNDING)
    assert_allclose(np.abs(difference), np.abs(m2) ** 2 * np.abs(k1), atol=ROUNDING)
    assert_allclose(np.angle(difference), np.angle(m2**2 / k1), atol=ROUNDING)


def test_the_weathers_constituents_have_no_modulation() -> None:
    assert_allclose(nodal_factors(["Sa", "S1"], np.linspace(0, 2e5, 9)), 1.0, rtol=0, atol=0)


def test_every_constituent_has_a_modulation_in_both_conventions() -> None:
    t_h = np.linspace(-8e5, 2e5, 300)
    for nodal in ("exact", "mid_year"):
        modulus = np.abs(nodal_factors(catalogue(), t_h, nodal=nodal)).mean(axis=0)
        doubtful = [n for n, f in zip(catalogue(), modulus, strict=True) if not 0.9 < f < 1.15]
        # The published f of M1 averages near 1.5, as its coefficient counts one of its two sides.
        assert [n for n in doubtful if resolve(n).species < 2 and n not in ("M1", "OO1", "SO1")] == []


def test_mid_year_is_held_through_a_calendar_year() -> None:
    days = np.arange("2015-12-25", "2016-01-08", dtype="datetime64[D]")
    factor = nodal_factors(["O1"], hours_from_datetime64(days), nodal="mid_year")[:, 0]
    assert len(np.unique(factor)) == 2
    middle = hours_from_datetime64(np.array(["2016-07-02T00:00"], dtype="datetime64[us]"))
    assert_allclose(mid_year_h(middle + 100.0), middle)  # 2016 is a leap year: its middle is 2 July 0 h


def test_carriers_join_both() -> None:
    t_h = np.array([12345.6])
    names = ["K1", "M4"]
    expected = nodal_factors(names, t_h) * np.exp(1j * arguments_rad(names, t_h))
    assert_allclose(carriers(names, t_h), expected, rtol=ROUNDING)


def test_an_unknown_convention_is_refused() -> None:
    with pytest.raises(ConstituentError, match="unknown nodal convention 'monthly'"):
        nodal_factors(["M2"], np.zeros(1), nodal="monthly")  # type: ignore[arg-type]
