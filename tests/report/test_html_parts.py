"""Pieces of HTML: what they show, and that input stays text."""

import math

import pandas as pd
import pytest

from tidekit.quality.findings import Finding
from tidekit.report.html_parts import cell, sentence, table
from tidekit.report.words import size_in_words


@pytest.mark.parametrize(
    ("value", "form", "shown"),
    [
        (1.23456, ".3f", "1.235"),
        (-0.5, ".1f", "−0.5"),
        (0.9907, ".1%", "99.1%"),
        (float("nan"), ".3f", ""),
        (float("inf"), ".3f", "no limit"),
        (None, "text", ""),
        ("<b>&", "text", "&lt;b&gt;&amp;"),
    ],
)
def test_cells(value: object, form: str, shown: str) -> None:
    assert cell(value, form) == shown


def test_tables_escape_and_link() -> None:
    frame = pd.DataFrame({"name": ["<i>", "b"], "x": [1.0, 2.0]})
    text = table(frame, [("name", "<head>", "text"), ("x", "x", ".1f")], caption='"c"', links={"<i>": "g"})
    assert '<a href="#g">&lt;i&gt;</a>' in text
    assert '<th scope="row" class="text">b</th><td>2.0</td>' in text
    assert "&lt;head&gt;" in text
    assert 'aria-label="&quot;c&quot;"' in text


def test_sentences_end_once() -> None:
    assert sentence("the end") == "The end."
    assert sentence("The end.") == "The end."


@pytest.mark.parametrize(
    ("kind", "value", "sd", "shown"),
    [
        ("datum_step", 0.07886, 0.0076, "+0.0789 ± 0.0076 m"),
        ("time_zone", 5.995, 0.0152, "+5.995 ± 0.015 h"),
        ("unit_scale", 3.276, 0.0429, "3.276 ± 0.043"),
        ("clock_offset", -123.4, 31.0, "-123 ± 31 min"),
        ("sensor_flat", 7.0, math.nan, "+7 h"),
        ("inverted", 1.0, math.nan, ""),
        ("coverage", 0.5, math.nan, "50 %"),
        ("coverage", math.nan, math.nan, ""),
    ],
)
def test_sizes_have_the_digits_of_their_error(kind: str, value: float, sd: float, shown: str) -> None:
    finding = Finding(gauge="a", kind=kind, value=value, value_sd=sd, severity="error", evidence="e")
    assert size_in_words(finding) == shown
