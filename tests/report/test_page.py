"""The page: text of input files stays text, pictures have names, empty networks have words."""

import re
from html.parser import HTMLParser
from pathlib import Path

import numpy as np
import pytest
from matplotlib.figure import Figure
from numpy.testing import assert_allclose

from tidekit.audit.execute import run_audit
from tidekit.quality.findings import UNITS
from tidekit.records.network_file import read_network
from tidekit.report.figures_wave import draw_phase_along_coast
from tidekit.report.page import report_page
from tidekit.report.style import LAND, MUTED, OKABE_ITO, spread_labels
from tidekit.report.words import ADVICE, KINDS

NASTY = '<script>alert(1)</script> & \\"Sons\\"'


@pytest.fixture(scope="module")
def page(tmp_path_factory: pytest.TempPathFactory) -> str:
    """Four gauges of one wave, all by the same nasty name."""
    tmp_path = tmp_path_factory.mktemp("page")
    rows = "M2,1.0,{}\nS2,0.4,{}\nN2,0.2,{}\nK1,0.3,{}\nO1,0.2,{}\n"
    text = f'[network]\nname = "{NASTY}"\n[coast]\nside = "left"\ndepth_m = 60.0\n'
    for n, km in enumerate((0.0, 70.0, 150.0, 260.0)):
        lags = [round(28.98 * km / 87.34, 3)] * 3 + [round(15.0 * km / 87.34, 3)] * 2
        (tmp_path / f"{n}.csv").write_text("constituent,amplitude_m,phase_lag_deg\n" + rows.format(*lags))
        text += (
            f'[[gauge]]\nid = "g{n}"\nname = "{NASTY}"\nconstants = "{n}.csv"\n'
            f"along_coast_km = {km}\nlatitude = {-41 + km / 111}\nlongitude = 88.0\n"
        )
    (tmp_path / "network.toml").write_text(text)
    return report_page(run_audit(read_network(tmp_path / "network.toml")))


def test_names_of_the_input_are_text(page: str) -> None:
    assert "<script" not in page
    assert "&lt;script&gt;alert(1)&lt;/script&gt; &amp; &quot;Sons&quot;" in page


def test_every_picture_has_a_name_and_no_two_share_an_id(page: str) -> None:
    assert page.count("<svg ") == len(re.findall(r'<svg [^>]*aria-label="[^"]+"', page)) > 3
    assert page.count("<svg ") == page.count(">not for navigation<")
    ids = re.findall(r'\bid="([^"]+)"', page)
    assert len(ids) == len(set(ids))


def test_the_caution_stands_first_and_last(page: str) -> None:
    places = [found.start() for found in re.finditer("Not for navigation", page)]
    assert len(places) == 2
    assert places[0] < page.index("<section") < page.index("<h2>The run</h2>") < places[1]


def test_the_page_is_well_formed(page: str) -> None:
    """Every element that is opened is closed, in order; Python's own HTML parser reads it."""
    reader = Reader()
    reader.feed(page)
    reader.close()
    assert reader.open == []
    assert reader.headers_without_scope == 0


class Reader(HTMLParser):
    VOID = ("meta", "br", "img", "link", "hr")

    def __init__(self) -> None:
        super().__init__()
        self.open: list[str] = []
        self.headers_without_scope = 0

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.headers_without_scope += tag == "th" and "scope" not in dict(attrs)
        if tag not in self.VOID:
            self.open.append(tag)

    def handle_endtag(self, tag: str) -> None:
        assert self.open.pop() == tag


def test_links_lead_somewhere(page: str) -> None:
    targets = set(re.findall(r'<a href="#([^"]+)"', page))
    assert targets <= set(re.findall(r'\bid="([^"]+)"', page))


def test_every_kind_of_finding_has_words() -> None:
    assert set(KINDS) == set(ADVICE) == set(UNITS)


def test_labels_keep_apart_and_in_order() -> None:
    """Least squares under an order: two points 0.04 apart that want 0.1 move 0.03 each, by symmetry."""
    assert_allclose(spread_labels(np.array([0.0, 0.04, 1.0]), 0.1), [-0.03, 0.07, 1.0], atol=1e-12)
    assert_allclose(spread_labels(np.array([0.0, 1.0]), 0.1), [0.0, 1.0])
    crowded = spread_labels(np.array([0.0, 0.01, 0.02, 0.15, 1.0]), 0.1)
    assert np.diff(crowded).min() >= 0.1 - 1e-12
    assert len(spread_labels(np.array([]), 0.1)) == 0


def luminance(colour: str) -> float:
    """Relative luminance of WCAG 2.1."""
    parts = [int(colour[n : n + 2], 16) / 255 for n in (1, 3, 5)]
    linear = [part / 12.92 if part <= 0.04045 else ((part + 0.055) / 1.055) ** 2.4 for part in parts]
    return float(np.dot(linear, [0.2126, 0.7152, 0.0722]))


def test_small_text_has_contrast() -> None:
    """WCAG 2.1, success criterion 1.4.3: 4.5 to 1 for text; 1.4.11: 3 to 1 for what graphics need."""
    assert 1.05 / (luminance(MUTED) + 0.05) >= 4.5
    assert (luminance(LAND) + 0.05) / (luminance("#000000") + 0.05) >= 4.5  # names that stand on land
    assert min(1.05 / (luminance(colour) + 0.05) for colour in OKABE_ITO[:4]) >= 2.5


def test_a_network_without_a_wave_has_words_in_its_picture(tmp_path: Path) -> None:
    (tmp_path / "a.csv").write_text("constituent,amplitude_m,phase_lag_deg\nM2,1.0,40\nK1,0.3,80\n")
    (tmp_path / "network.toml").write_text(
        '[network]\nname = "n"\n[coast]\nside = "left"\n[[gauge]]\nid = "a"\nconstants = "a.csv"\n'
    )
    audit = run_audit(read_network(tmp_path / "network.toml"))
    axes = draw_phase_along_coast(audit.measure, Figure().subplots())
    assert "no distance to travel" in axes.texts[0].get_text()
    assert "cannot decide" in report_page(audit)
