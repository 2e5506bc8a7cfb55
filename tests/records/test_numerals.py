"""Numbers from bytes, against Python's own reading (correctly rounded, IEEE 754)."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from tidekit.records.cutting import as_matrix
from tidekit.records.numerals import read_numbers


def numbers(texts: list[str], decimal: str = ".") -> list[float]:
    return list(read_numbers(as_matrix([text.encode() for text in texts]), decimal).tolist())


@given(
    st.lists(
        st.one_of(
            st.floats(-1e6, 1e6).map(lambda x: f"{x:.4f}"),
            st.floats(allow_nan=False, allow_infinity=False).map(repr),
            st.integers(-(10**20), 10**20).map(str),
            st.decimals(-100, 100, places=12).map(str),
        ),
        min_size=1,
        max_size=50,
    )
)
@settings(max_examples=150, deadline=None)
def test_same_bits_as_python(texts: list[str]) -> None:
    assert numbers(texts) == [float(text) for text in texts]


@pytest.mark.parametrize(
    "text", ["", "-", "+", ".", "1.2.3", "1-2", "1 2", "0x10", "1_0", "1,5", "one", "--1", "1e", "12:00"]
)
def test_no_number(text: str) -> None:
    assert np.isnan(numbers(["1.5", text])).tolist() == [False, True]


def test_decimal_comma_and_thousands() -> None:
    assert numbers(["1,5", "-0,25", "1.234,5", "12.345.678,9"], ",") == [1.5, -0.25, 1234.5, 12345678.9]
    assert numbers(["1,234.5", "-12,345.0"]) == [1234.5, -12345.0]


@pytest.mark.parametrize(
    ("text", "decimal"), [("1.5", ","), ("1.234", ","), ("1,234", "."), ("1,23.5", "."), ("12.34,5", ",")]
)
def test_a_mark_that_may_mean_two_things_is_no_number(text: str, decimal: str) -> None:
    assert np.isnan(numbers([text], decimal)).all()


def test_a_cell_too_wide_is_no_number() -> None:
    assert np.isnan(numbers(["1." + "0" * 60])).all()
