"""Known faults put into the constants of five real gauges: a coast of bays and straits that no made network imitates.

The records are raw exports of 2006 of NOAA and the Canadian Hydrographic Service.
"""

from dataclasses import replace

import numpy as np
import pytest

from tests.outside.test_pacific_coast_audit import GAUGES, REAL, network_text
from tidekit.constituents.catalogue import speeds_deg_per_h
from tidekit.harmonic.analysis import analyse_record
from tidekit.network.gauges import GaugeTide
from tidekit.network.measure import NetworkMeasure, measure_network
from tidekit.records.network import Network
from tidekit.records.network_file import read_network
from tidekit.records.source import open_gauge

pytestmark = pytest.mark.skipif(not REAL.is_dir(), reason="the real records at ../shared/real are not here")

OPEN = [gauge for gauge, place in GAUGES.items() if place[3]]
JUDGED = ["toke_point", "neah_bay", "bamfield", "winter_harbour"]
"""Beside Tofino the other four do not agree three and three, so that Tofino cannot be judged."""


@pytest.fixture(scope="module")
def network(tmp_path_factory: pytest.TempPathFactory) -> Network:
    path = tmp_path_factory.mktemp("coast") / "network.toml"
    path.write_text(network_text(2006))
    return read_network(path)


@pytest.fixture(scope="module")
def tides(network: Network) -> list[GaugeTide]:
    return [
        GaugeTide(station=entry.station, constants=analyse_record(open_gauge(entry)).constants)
        for entry in network.gauges
        if entry.station.open_coast
    ]


def with_fault(
    tides: list[GaugeTide], network: Network, gauge: str, *, late_h: float = 0.0, scale: float = 1.0
) -> NetworkMeasure:
    """The network with one gauge's times recorded late and its heights times a factor."""
    row, faulty = OPEN.index(gauge), list(tides)
    constants = tides[row].constants
    lag = constants.phase_lag_deg + late_h * speeds_deg_per_h(constants.names) + (180.0 if scale < 0 else 0.0)
    faulty[row] = replace(
        tides[row],
        constants=replace(
            constants,
            phase_lag_deg=np.mod(lag, 360.0),
            amplitude_m=abs(scale) * constants.amplitude_m,
            amplitude_sd_m=abs(scale) * constants.amplitude_sd_m,
        ),
    )
    return measure_network(faulty, network.coast, network.settings)


def errors(measure: NetworkMeasure) -> list[tuple[str, str]]:
    return [(finding.gauge, finding.kind) for finding in measure.findings if finding.severity == "error"]


@pytest.mark.parametrize("gauge", JUDGED)
@pytest.mark.parametrize(
    ("late_h", "scale", "kind", "size"),
    [
        # Pacific standard time taken as UTC, and the other way round.
        (-8.0, 1.0, "time_zone", -8.0),
        (8.0, 1.0, "time_zone", 8.0),
        (0.0, 1.0 / 0.3048, "unit_scale", 1.0 / 0.3048),
        (0.0, -1.0, "inverted", 1.0),
    ],
)
def test_a_gross_fault_is_named_at_its_gauge_alone(
    gauge: str, late_h: float, scale: float, kind: str, size: float, tides: list[GaugeTide], network: Network
) -> None:
    measure = with_fault(tides, network, gauge, late_h=late_h, scale=scale)
    assert errors(measure) == [(gauge, kind)]
    (found,) = (finding for finding in measure.findings if finding.severity == "error")
    # Toke Point lies in a bay that makes its tide 50 minutes late, whatever its clock does.
    assert np.isnan(found.value_sd) or abs(found.value - size) < 3.5 * found.value_sd
    assert np.sign(found.value) == np.sign(size)
    assert measure.propagation.verdict.word == "undetermined"


@pytest.mark.parametrize("gauge", OPEN)
@pytest.mark.parametrize("late_min", [-11.0, 0.0, 11.0])
def test_minutes_accuse_nobody_on_a_coast_of_bays(
    gauge: str, late_min: float, tides: list[GaugeTide], network: Network
) -> None:
    measure = with_fault(tides, network, gauge, late_h=late_min / 60.0)
    assert errors(measure) == []
    assert measure.propagation.verdict.word == "undetermined"
