"""The tide along the open Pacific coast, measured from the agencies' raw exports by tidekit's own reader and analyser.

Records of NOAA and the Canadian Hydrographic Service at ../shared/real (not in the repository). The semidiurnal tide of
this coast travels north at 140 m/s by California (Munk, Snodgrass and Wimbush 1970, abstract), faster farther north.
"""

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from tidekit.constituents.catalogue import resolve
from tidekit.harmonic.analysis import analyse_record
from tidekit.network.gauges import GaugeTide
from tidekit.network.measure import NetworkMeasure, measure_network
from tidekit.records.coast_line import coast_position
from tidekit.records.network import AuditSettings, CoastSpec
from tidekit.records.reading import read_record
from tidekit.records.station import Station

REAL = Path(__file__).parents[3] / "shared" / "real" / "pacific_coast"
pytestmark = pytest.mark.skipif(not REAL.is_dir(), reason="the real records at ../shared/real are not here")

GAUGES = {
    "toke_point": (46.7075, -123.9669, "TokePoint"),
    "neah_bay": (48.3667, -124.6117, "NeahBay"),
    "bamfield": (48.836, -125.136, "wlev_8545"),
    "tofino": (49.154, -125.913, "wlev_8615"),
    "winter_harbour": (50.513, -128.029, "wlev_8735"),
}
LINE = tuple(place[:2] for place in GAUGES.values())
COAST = CoastSpec(side="right", depth_m=3000.0, line=LINE)
WORST_FAULT_H = 6.0


def gauge_tide(name: str, year: int) -> GaugeTide:
    latitude, longitude, export = GAUGES[name]
    along, _ = coast_position(LINE, latitude, longitude)
    station = Station(id=name, latitude_deg=latitude, longitude_deg=longitude, along_coast_km=along, offshore_km=0.0)
    (path,) = REAL.glob(f"{export}_31-Dec-{year - 1}_*.csv")
    return GaugeTide(station=station, constants=analyse_record(read_record(path)).constants)


@pytest.fixture(scope="module", params=[2006, 2009])
def tides(request: pytest.FixtureRequest) -> list[GaugeTide]:
    return [gauge_tide(name, request.param) for name in GAUGES]


def measured(tides: list[GaugeTide]) -> NetworkMeasure:
    return measure_network(tides, COAST, AuditSettings())


def test_the_tide_goes_north_with_the_coast_on_its_right(tides: list[GaugeTide]) -> None:
    fit = measured(tides).propagation
    together = fit.groups[-1]
    # The line from Toke Point to Winter Harbour bears 324 degrees.
    assert 314.0 < together.direction_deg < 334.0
    assert "with the coast on its right, as it must in the northern hemisphere" in fit.verdict.evidence
    # Three of five gauges agree, one stands in a bay and one at the mouth of a strait: nothing can be proved.
    assert fit.verdict.word == "undetermined"
    assert set(np.array(fit.tides.ids)[fit.used]) == {"bamfield", "tofino", "winter_harbour"}
    low, high = together.speed_interval_m_per_s
    # The speed of the semidiurnal tide that was published, and that of 3000 m, lie in so wide an interval.
    assert low < 140.0 < high
    assert low < together.theory_speed_m_per_s < high


def test_every_delay_is_told_from_its_aliases(tides: list[GaugeTide]) -> None:
    fit = measured(tides).propagation
    assert {"M2", "S2", "N2", "K1", "O1"} <= set(fit.tides.names)
    delays = np.array([delay.delay_h for delay in fit.delays])
    assert np.ptp(delays) < 1.0
    assert min(delay.lead for delay in fit.delays) > 50.0


def test_no_sound_gauge_is_accused(tides: list[GaugeTide]) -> None:
    assert [f for f in measured(tides).findings if f.severity == "error"] == []


@pytest.mark.parametrize("name", ["neah_bay", "winter_harbour"])
def test_a_wrong_zone_is_told_even_here(tides: list[GaugeTide], name: str) -> None:
    # Not at Bamfield or Tofino: without them no three gauges agree.
    row = list(GAUGES).index(name)
    constants = tides[row].constants
    speeds = np.array([resolve(each).speed_deg_per_h for each in constants.names])
    late = replace(constants, phase_lag_deg=(constants.phase_lag_deg + speeds * WORST_FAULT_H) % 360.0)
    faulty = [*tides[:row], GaugeTide(station=tides[row].station, constants=late), *tides[row + 1 :]]
    told = {(f.gauge, f.kind) for f in measured(faulty).findings if f.kind in ("time_zone", "clock_offset")}
    # Within the scatter of this coast, half an hour, an error of hours is a zone or a clock.
    assert {gauge for gauge, _ in told} == {name}
