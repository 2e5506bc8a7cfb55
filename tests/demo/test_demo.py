"""The demonstration network: what the repository ships is what the script makes, and what it says of itself."""

import re
import tomllib
from pathlib import Path

import numpy as np
from numpy.testing import assert_allclose

from tidekit.demo.coast import GAUGES, true_constants, wave
from tidekit.demo.series import gauge_truth, make_series
from tidekit.demo.write import write_demo
from tidekit.records.network_file import read_network
from tidekit.records.source import open_gauge

SAMPLES = Path(__file__).parents[2] / "sample_series"
PRINTED_M = 0.00051  # exports have millimetres; another machine's mathematics may round one the other way
COORDINATE_DEG = 0.002  # places are laid out on a plane 70 km a step; 0.2 km


def test_the_shipped_network_is_what_the_script_makes(tmp_path: Path) -> None:
    for path in write_demo(tmp_path):
        made, shipped = path.read_text(), (SAMPLES / path.relative_to(tmp_path)).read_text()
        if made != shipped:  # allow a last digit, nothing else
            assert_allclose(numbers_in(made), numbers_in(shipped), atol=PRINTED_M, rtol=0)


def numbers_in(text: str) -> list[float]:
    return [float(number) for number in re.findall(r"-?\d+\.?\d*", text)]


def test_the_seed_decides(tmp_path: Path) -> None:
    one, same, other = make_series(1), make_series(1), make_series(2)
    assert all(np.array_equal(one[g].height_m, same[g].height_m, equal_nan=True) for g in one)
    assert not np.array_equal(one["dellisk"].height_m, other["dellisk"].height_m, equal_nan=True)


def test_the_truth_names_four_faults_at_four_gauges() -> None:
    truth = tomllib.loads((SAMPLES / "truth.toml").read_text())
    faults = {fault["kind"]: fault for fault in truth["fault"]}
    assert {kind: fault["value"] for kind, fault in faults.items()} == {
        "clock_offset": 11,
        "datum_step": 0.08,
        "unit_scale": 3.28084,
        "time_zone": 6,
    }
    assert len({fault["gauge"] for fault in truth["fault"]}) == 4
    assert len(gauge_truth(GAUGES[0])) == 0


def test_tides_are_a_kelvin_waves() -> None:
    """Amplitude exp(-x |f|/c) and lag speed times distance over c: Gill (1982), section 10.4."""
    near, far = true_constants(GAUGES[0]), true_constants(next(g for g in GAUGES if g.id == "tarvik"))
    m2 = near.names.index("M2")
    c = np.sqrt(9.81 * 60.0)
    f = 2 * 7.292115e-5 * np.sin(np.radians(41.2))
    assert_allclose(far.amplitude_m[m2] / near.amplitude_m[m2], np.exp(-118e3 * f / c))
    lag = 28.9841042 * 402e3 / c / 3600.0
    assert_allclose((far.phase_lag_deg[m2] - near.phase_lag_deg[m2]) % 360.0, lag % 360.0, atol=1e-5)
    assert wave().coast_side == "left"


def test_the_network_reads(tmp_path: Path) -> None:
    network = read_network(SAMPLES / "network.toml")
    assert len(network.gauges) == 10
    assert network.coast.side == "left"
    record = open_gauge(network.gauges[1])  # day first, decimal commas, UTC+6, missing marks
    assert record.ledger.adds_up
    assert record.ledger.flagged > 0
    assert str(record.heights.index[0]) == "2021-01-01 00:00:00+00:00"
    latitudes = [g.station.latitude_deg for g in network.gauges]
    assert all(latitude is not None and -45 < latitude < -38 for latitude in latitudes)
