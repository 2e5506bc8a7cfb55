"""Constants written and read back, and tables that are wrong."""

from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from numpy.testing import assert_allclose

from tidekit.constituents.constants import HarmonicConstants
from tidekit.constituents.constants_table import COLUMNS, read_constants, write_constants
from tidekit.errors import ConstituentError, InputError

ROUND_TRIP = 1e-12  # CSV writes the shortest text that reads back to the same double; Z0 takes a cosine


def constants() -> HarmonicConstants:
    return HarmonicConstants(
        names=("M2", "nu2", "2MS6"),
        amplitude_m=np.array([1.0, 0.1, 0.02]),
        phase_lag_deg=np.array([10.5, 359.9, 180.0]),
        amplitude_sd_m=np.array([0.001, 0.002, np.nan]),
        phase_lag_sd_deg=np.array([0.1, 0.9, np.nan]),
        basis=("fitted", "fitted", "inferred"),
        mean_level_m=-0.25,
        mean_level_sd_m=0.01,
        vertical_reference="staff zero, 2019",
    )


def test_constants_read_back(tmp_path: Path) -> None:
    path = tmp_path / "constants.csv"
    write_constants(constants(), path, gauge="a")
    back = read_constants(path)
    table = pd.read_csv(path, keep_default_na=False)
    assert tuple(table.columns) == COLUMNS
    assert table["makeup"].tolist() == ["", "", "", "2*M2 + S2"]
    assert (back.names, back.basis, back.nodal) == (constants().names, constants().basis, "exact")
    assert back.vertical_reference == "staff zero, 2019"
    assert_allclose(back.phasors_m, constants().phasors_m, rtol=ROUND_TRIP)
    assert_allclose(back.amplitude_sd_m, constants().amplitude_sd_m)
    assert_allclose([back.mean_level_m, back.mean_level_sd_m], [-0.25, 0.01], rtol=ROUND_TRIP)


@pytest.mark.parametrize(
    ("text", "match"),
    [
        ("", "no rows of constants"),
        ("constituent,amplitude_m\nM2,1\n", r"x\.csv:1: columns are"),
        ("constituent,amplitude_m,phase_lag_deg\nM2,one,3\n", r"x\.csv:2: amplitude_m is 'one'"),
        ("# a comment\nconstituent,amplitude_m,phase_lag_deg\nM2,-1,3\n", r"x\.csv:3: amplitude_m is '-1'"),
        ("constituent,amplitude_m,phase_lag_deg\nM2,1,3\nQQ7,1,3\n", r"x\.csv:3: unknown constituent"),
        (
            "constituent,amplitude_m,phase_lag_deg\nM2,1,3\nM2,1,3\n",
            r"x\.csv:3: M2 stands in the table twice",
        ),
        ("constituent,amplitude_m,phase_lag_deg\nM2,1\n", r"x\.csv:2: 2 cells"),
        (
            "constituent,amplitude_m,phase_lag_deg,speed_deg_per_h\nM2,1,3,30\n",
            r"x\.csv:2: M2 has the speed 30",
        ),
        (
            "gauge,constituent,amplitude_m,phase_lag_deg\na,M2,1,3\nb,M2,1,3\n",
            "name a gauge; the table has a, b",
        ),
    ],
)
def test_wrong_tables_are_named(tmp_path: Path, text: str, match: str) -> None:
    path = tmp_path / "x.csv"
    path.write_text(text)
    with pytest.raises(InputError, match=match):
        read_constants(path)


def test_a_missing_table_is_named(tmp_path: Path) -> None:
    with pytest.raises(InputError, match=r"none\.csv: cannot read this table of constants"):
        read_constants(tmp_path / "none.csv")


def test_arrays_must_agree() -> None:
    with pytest.raises(ConstituentError, match="amplitude_m has 1 entries for 2 constituents"):
        HarmonicConstants(
            names=("M2", "S2"),
            amplitude_m=np.ones(1),
            phase_lag_deg=np.ones(2),
            amplitude_sd_m=np.ones(2),
            phase_lag_sd_deg=np.ones(2),
            basis=("fitted", "fitted"),
        )


def test_arrays_cannot_be_changed() -> None:
    with pytest.raises(ValueError, match="read-only"):
        constants().amplitude_m[0] = 2.0


def test_selecting_what_is_not_there_is_an_error() -> None:
    assert constants().select(["nu2"]).names == ("nu2",)
    with pytest.raises(ConstituentError, match="no constants of S2"):
        constants().select(["S2"])
