"""Sums such as 2*M2 + S2: reading, writing, refusing."""

import pytest

from tidekit.constituents.makeup import format_makeup, parse_makeup
from tidekit.errors import ConstituentError


@pytest.mark.parametrize("text", ["2*M2 + S2", "M2 + S2 - N2", "- M2 + 2*S2", "4*M2"])
def test_a_sum_reads_back(text: str) -> None:
    assert format_makeup(parse_makeup(text)) == text


@pytest.mark.parametrize(
    ("text", "match"),
    [("", "empty make-up"), ("M2 S2", "cannot read"), ("M2 + ", "cannot read"), ("2*", "cannot read")],
)
def test_nonsense_is_refused(text: str, match: str) -> None:
    with pytest.raises(ConstituentError, match=match):
        parse_makeup(text)
