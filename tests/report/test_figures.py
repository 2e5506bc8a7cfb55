"""Figures show what the results say: the right points, marks, slopes and words."""

import re

import numpy as np
import pytest
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from numpy.testing import assert_allclose

from tests.network.simulate import Coast, Fault
from tidekit.network.measure import NetworkMeasure
from tidekit.quality.steps import Step
from tidekit.records.network import CoastSpec
from tidekit.records.station import Station
from tidekit.report.figures_faults import draw_gain_fingerprint, draw_phase_fingerprint, draw_step
from tidekit.report.figures_map import draw_map
from tidekit.report.figures_wave import draw_amplitude_across, draw_phase_along_coast

C_M_PER_S = np.sqrt(9.81 * 60.0)  # long-wave speed over 60 m, Gill (1982), section 5.6
M2_DEG_PER_H = 28.9841042  # Schureman (1940), table 2
PLACE_MIN = 0.4  # places scatter by 0.1 min, the line through them by less: four deviations
SCATTER = 0.02  # relative; the coast below is noisy by a thousandth, its gauges by less


@pytest.fixture
def axes() -> Axes:
    return Figure().subplots()


@pytest.fixture(scope="module")
def measure() -> NetworkMeasure:
    """Ten gauges of a nearly exact wave, two offshore, one late by 12 minutes, one in feet."""
    coast = Coast(
        along_km=np.array([0.0, 70.0, 150.0, 210.0, 300.0, 390.0, 470.0, 560.0, 180.0, 420.0]),
        offshore_km=np.array([0.0] * 8 + [60.0, 120.0]),
        delay_scatter_min=0.1,
        amplitude_scatter=0.002,
        noise_m=0.0002,
        faults={2: Fault(late_h=0.2), 5: Fault(scale=1 / 0.3048)},
    )
    return coast.measure(np.random.default_rng(7))


def texts(axes: Axes) -> str:
    return " ".join([axes.get_title(loc="left"), *(text.get_text() for text in axes.texts)])


def test_phase_lags_rise_by_speed_over_wave_speed(measure: NetworkMeasure, axes: Axes) -> None:
    draw_phase_along_coast(measure, axes)
    slopes = {}
    for line in axes.lines:
        x, y = (np.asarray(values, dtype=float) for values in line.get_data())
        if len(x) == 40:  # the fitted lines; points have one marker a gauge
            slopes[line.get_color()] = float(np.ptp(y) / np.ptp(x))
    colour = next(text.get_color() for text in axes.texts if text.get_text() == "M2")
    assert_allclose(slopes[colour], M2_DEG_PER_H * 1e3 / 3600.0 / C_M_PER_S, rtol=SCATTER)
    assert len(slopes) == 5


def test_gauges_off_the_wave_are_hollow_and_named(measure: NetworkMeasure, axes: Axes) -> None:
    draw_phase_along_coast(measure, axes)
    hollow = [line for line in axes.lines if line.get_markerfacecolor() == "white"]
    assert {float(np.asarray(line.get_xdata())[0]) for line in hollow} == {150.0}
    assert "g2" in texts(axes)


def test_amplitudes_fall_as_the_theory_says(measure: NetworkMeasure, axes: Axes) -> None:
    """exp(-x |f|/c): Gill (1982), section 10.4, with f = 2 omega sin(latitude)."""
    draw_amplitude_across(measure, axes)
    f = 2 * 7.292115e-5 * np.sin(np.radians(41.2))
    curve = next(line for line in axes.lines if line.get_label() == "exp(-x f/c)")
    x, y = (np.asarray(values, dtype=float) for values in curve.get_data())
    # The theory's latitude is the mean of the gauges', a quarter degree from the coast's.
    assert_allclose(y, np.exp(-1e3 * x * f / C_M_PER_S), rtol=0.01)
    points = [line for line in axes.lines if len(np.atleast_1d(line.get_xdata())) == 9]
    assert len(points) == 5
    for line in points:
        far, ratio = np.asarray(line.get_xdata(), dtype=float), np.asarray(line.get_ydata(), dtype=float)
        assert_allclose(ratio, np.exp(-1e3 * far * f / C_M_PER_S), rtol=SCATTER)
    assert "beyond: g5" in texts(axes)


def test_fingerprints_tell_a_clock_from_a_unit(measure: NetworkMeasure, axes: Axes) -> None:
    late, feet = measure.fingerprints[2], measure.fingerprints[5]
    assert (late.gauge, feet.gauge) == ("g2", "g5")
    (minutes,) = re.findall(r"clock ([+-][\d.]+) min", texts(draw_phase_fingerprint(late, axes)))
    assert_allclose(float(minutes), 12.0, atol=PLACE_MIN)
    for print_, gain in ((late, 1.0), (feet, 1 / 0.3048)):
        (shown,) = re.findall(r"gain ([\d.]+)", texts(draw_gain_fingerprint(print_, Figure().subplots())))
        assert_allclose(float(shown), gain, rtol=SCATTER)


def test_a_step_is_drawn_at_its_day_and_size(axes: Axes) -> None:
    days = np.arange(8000, 8100)
    level = np.where(days >= 8040, 0.08, 0.0)
    draw_step(days, level, (Step(8040, 0.08, 0.01),), axes)
    assert "+8.0 cm" in texts(axes)
    assert "2022-01-05" in texts(axes)  # 8040 days after 2000-01-01, by the calendar
    levels = [float(np.asarray(line.get_ydata())[0]) for line in axes.lines if line.get_color() == "black"]
    assert_allclose(levels, [0.0, 8.0])


def stations() -> list[Station]:
    places = [("a", -44.0, 88.0, 0.0), ("b", -43.0, 88.3, 110.0), ("c", -42.0, 88.6, 220.0)]
    return [
        Station(id=n, latitude_deg=lat, longitude_deg=lon, along_coast_km=km, offshore_km=0.0)
        for n, lat, lon, km in places
    ]


def test_the_map_is_in_true_proportion(axes: Axes) -> None:
    """A degree of longitude is shorter by the cosine of the latitude, but for the ellipsoid's third of a per cent."""
    draw_map(stations(), CoastSpec(side="left"), set(), axes)
    assert_allclose(axes.get_aspect(), 1.0 / np.cos(np.radians(43.0)), rtol=0.004)


@pytest.mark.parametrize(("side", "west"), [("left", True), ("right", False)])
def test_the_land_lies_on_its_side(side: str, west: bool, axes: Axes) -> None:
    """Looking north along the coast the land on the left is in the west."""
    draw_map(stations(), CoastSpec(side="left" if side == "left" else "right"), set(), axes)
    land = axes.patches[0].get_path()
    assert land.contains_point((87.5 if west else 89.5, -43.0))
    assert not land.contains_point((89.5 if west else 87.5, -43.0))


def test_faulty_gauges_have_crosses(axes: Axes) -> None:
    draw_map(stations(), CoastSpec(side="left"), {"b"}, axes)
    assert [line.get_marker() for line in axes.lines if line.get_marker() != "None"] == ["o", "X", "o"]


def test_a_map_across_the_date_line_is_one_piece(axes: Axes) -> None:
    across = [
        Station(id="e", latitude_deg=-44.0, longitude_deg=179.5, along_coast_km=0.0),
        Station(id="w", latitude_deg=-43.5, longitude_deg=-179.8, along_coast_km=80.0),
    ]
    draw_map(across, CoastSpec(side="left"), set(), axes)
    assert np.ptp(axes.get_xlim()) < 5.0


def test_a_network_without_places_says_so(axes: Axes) -> None:
    draw_map([Station(id="a")], CoastSpec(side="left"), set(), axes)
    assert "no gauge gives latitude and longitude" in texts(axes)
