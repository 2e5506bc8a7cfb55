"""Names, spellings and compounds."""

from itertools import pairwise

import pytest
from numpy.testing import assert_allclose

from tidekit.constituents.catalogue import catalogue, resolve, resolve_names, speeds_deg_per_h
from tidekit.errors import ConstituentError

ROUNDING = 1e-12


def test_the_catalogue_is_in_order_of_speed() -> None:
    speeds = speeds_deg_per_h(catalogue())
    assert len(speeds) >= 75
    assert all(b >= a for a, b in pairwise(speeds))


@pytest.mark.parametrize(
    ("written", "name"),
    [
        ("NU2", "nu2"),
        ("MU2", "mu2"),
        ("LAM2", "lambda2"),
        ("LAMBDA2", "lambda2"),
        ("RHO", "rho1"),
        ("SSA", "Ssa"),
        ("m2", "M2"),
        ("MSF", "MSf"),
        ("2(ms)8", "2(MS)8"),
        (" M2 ", "M2"),
        ("NO1", "M1"),
    ],
)
def test_agency_spellings(written: str, name: str) -> None:
    assert resolve(written).name == name


def test_every_name_resolves_to_itself() -> None:
    assert tuple(resolve(name).name for name in catalogue()) == catalogue()
    assert tuple(resolve(name.upper()).name for name in catalogue()) == catalogue()


def test_a_sum_takes_speed_and_phase_from_its_parts() -> None:
    made = resolve("3*M2 + 2*N2")
    assert made.makeup == "3*M2 + 2*N2"
    parts = speeds_deg_per_h(["M2", "N2"])
    assert_allclose(made.speed_deg_per_h, 3 * parts[0] + 2 * parts[1], rtol=ROUNDING)
    assert resolve("2*M2 - K1").phase_quarter == -1  # K1 has +1, and it is subtracted


def test_a_sum_with_a_compound_in_it_is_taken_apart() -> None:
    assert resolve("M4 + S2").name == "2MS6"
    assert resolve("M4 - M2").name == "M2"


@pytest.mark.parametrize(
    ("name", "match"),
    [
        ("XX9", "unknown constituent"),
        ("M2 - M2", "adds up to nothing"),
        ("M2 + XX9", "unknown"),
        ("2*M2 + -", "cannot read"),
    ],
)
def test_unknown_names_are_refused(name: str, match: str) -> None:
    with pytest.raises(ConstituentError, match=match):
        resolve(name)


def test_a_sum_of_nothing_or_of_negative_speed_is_refused() -> None:
    with pytest.raises(ConstituentError, match="adds up to nothing"):
        resolve("M2 + S2 - M2 - S2")
    with pytest.raises(ConstituentError, match="no positive speed"):
        resolve("M2 + K1 - 2*S2")


def test_a_constituent_is_named_once() -> None:
    assert resolve_names(["nu2", "M2"]) == ("nu2", "M2")
    with pytest.raises(ConstituentError, match="nu2 named more than once"):
        resolve_names(["NU2", "nu2"])
