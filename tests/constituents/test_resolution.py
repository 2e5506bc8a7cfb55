"""What a record can tell apart. Synodic periods: Schureman (1940), figures computed from published speeds."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from tidekit.constituents.constants import HarmonicConstants
from tidekit.constituents.resolution import (
    equilibrium_companions,
    reference_companions,
    resolvable,
    synodic_period_h,
)
from tidekit.errors import AnalysisError

DAY_H = 24.0
PRINTED_DAYS = 5e-4  # half the last digit of the periods below
PRINTED_RATIO = 1e-3  # Doodson's coefficients give four digits; masses have moved by 8e-4 since


@pytest.mark.parametrize(
    ("first", "second", "days"),
    [
        ("M2", "S2", 14.765),
        ("M2", "N2", 27.555),
        ("O1", "K1", 13.661),
        ("K1", "P1", 182.621),
        ("S2", "K2", 182.621),
        ("S2", "T2", 365.260),
        ("N2", "nu2", 205.892),
        ("2N2", "mu2", 205.892),
        ("K2", "T2", 121.749),
    ],
)
def test_synodic_periods(first: str, second: str, days: float) -> None:
    assert_allclose(synodic_period_h(first, second) / DAY_H, days, atol=PRINTED_DAYS)


def test_a_calendar_year_parts_the_solar_group() -> None:
    names = resolvable(365 * DAY_H)
    assert {"S2", "T2", "R2", "K2", "K1", "P1", "S1", "pi1", "psi1", "phi1", "Sa", "N2", "nu2"} <= set(names)
    assert not {"MP1", "2MK3"} <= set(names) or "tau1" not in names  # equal speeds cannot both stand


def test_no_two_of_a_choice_are_closer_than_asked() -> None:
    for days in (3, 15, 29, 60, 190, 365):
        names = resolvable(days * DAY_H)
        periods = [synodic_period_h(a, b) for a in names for b in names if a != b]
        assert max(periods, default=0.0) <= days * DAY_H / 0.99


def test_longer_records_resolve_more() -> None:
    counts = [len(resolvable(days * DAY_H)) for days in (2, 15, 29, 190, 365)]
    assert counts == sorted(counts)
    assert counts[0] >= 2
    assert counts[-1] >= 60


def test_sampling_bounds_the_choice() -> None:
    # Two samples a cycle: at a step of 6.5 h nothing faster than 27.7 deg/h can be seen.
    names = resolvable(365 * DAY_H, step_h=6.5)
    assert "O1" in names
    assert "M2" not in names


def test_too_short_is_said() -> None:
    with pytest.raises(AnalysisError, match="too short for any constituent"):
        resolvable(6.0)


def test_equilibrium_companions_have_the_published_ratios() -> None:
    """Ratios of Doodson's (1921) coefficients, from memory: P1/K1 .3309, K2/S2 .2721, T2/S2 .0586, nu2/N2 .1900."""
    fitted = resolvable(30 * DAY_H)
    found = {c.name: c for c in equilibrium_companions(fitted, 30 * DAY_H)}
    for name, main, ratio in [
        ("P1", "K1", 0.3309),
        ("K2", "S2", 0.2721),
        ("T2", "S2", 0.0586),
        ("nu2", "N2", 0.1900),
    ]:
        assert found[name].from_name == main
        assert_allclose(found[name].amplitude_ratio, ratio, atol=PRINTED_RATIO)
    assert not set(found) & set(fitted)


def test_companions_of_a_reference_gauge() -> None:
    nan = np.full(2, np.nan)
    reference = HarmonicConstants(
        names=("K1", "P1"),
        amplitude_m=np.array([0.5, 0.15]),
        phase_lag_deg=np.array([10.0, 7.0]),
        amplitude_sd_m=nan,
        phase_lag_sd_deg=nan,
        basis=("published", "published"),
    )
    (companion,) = reference_companions(["P1"], ["M2", "K1"], reference, source="control")
    assert (companion.from_name, companion.source) == ("K1", "control")
    assert_allclose([companion.amplitude_ratio, companion.lag_difference_deg], [0.3, -3.0])
    with pytest.raises(AnalysisError, match="cannot infer K2 from control"):
        reference_companions(["K2"], ["S2"], reference, source="control")
