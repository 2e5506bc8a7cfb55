"""The table of datums."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from tidekit.datums.formulae import tide_type
from tidekit.datums.table import DatumTable
from tidekit.errors import AnalysisError


def a_table() -> DatumTable:
    return DatumTable(
        gauge="A",
        names=("MHW", "MLW"),
        height_m=np.array([1.0, -1.0]),
        height_sd_m=np.array([0.1, np.nan]),
        methods=("by eye", "by ear"),
    )


def test_look_up() -> None:
    table = a_table()
    assert_allclose(table.height("MLW"), -1.0)
    assert_allclose(table.height_sd("MHW"), 0.1)
    with pytest.raises(AnalysisError, match="no datum HAT; there are MHW, MLW"):
        table.height("HAT")


def test_arrays_are_read_only_copies() -> None:
    table = a_table()
    with pytest.raises(ValueError, match="read-only"):
        table.height_m[0] = 2.0


def test_lengths_must_agree() -> None:
    with pytest.raises(AnalysisError, match="methods has 1 entries for 2 datums"):
        DatumTable(gauge="A", names=("a", "b"), height_m=np.zeros(2), height_sd_m=np.zeros(2), methods=("x",))


@pytest.mark.parametrize(
    ("number", "name"),
    [
        (0.1, "semidiurnal"),
        (0.5, "mixed, mainly semidiurnal"),
        (2.0, "mixed, mainly diurnal"),
        (np.inf, "diurnal"),
        (np.nan, "unknown"),
    ],
)
def test_tide_types(number: float, name: str) -> None:
    """Courtier (1938), Defant (1961), bounds 0.25, 1.5 and 3.0 (from memory)."""
    assert tide_type(number) == name
