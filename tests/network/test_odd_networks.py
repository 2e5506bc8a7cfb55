"""Networks that are odd but not wrong: what they must not break, and what they must not claim."""

from dataclasses import replace

import numpy as np
import pytest
from numpy.testing import assert_allclose

from tests.network.simulate import Coast, Fault
from tidekit.network.gauges import GaugeTide, tide_arrays
from tidekit.network.measure import NetworkMeasure, measure_network
from tidekit.records.network import AuditSettings, CoastSpec

ALONG = np.array([0.0, 90.0, 150.0, 260.0, 330.0, 420.0, 510.0, 600.0])
COAST = Coast(along_km=ALONG, offshore_km=np.zeros(8))


def random(seed: int = 1) -> np.random.Generator:
    return np.random.default_rng(seed)


def measured(gauges: list[GaugeTide], spec: CoastSpec = COAST.spec) -> NetworkMeasure:
    return measure_network(gauges, spec, AuditSettings())


def errors(measure: NetworkMeasure) -> set[tuple[str, str]]:
    return {(f.gauge, f.kind) for f in measure.findings if f.severity == "error"}


def test_a_dead_gauge_does_not_silence_the_others() -> None:
    gauges = COAST.gauges(random())
    loud = replace(gauges[3].constants, amplitude_sd_m=np.full(8, 1.0))
    gauges[3] = GaugeTide(station=gauges[3].station, constants=loud)
    found = measured(gauges)
    assert "g3" not in found.propagation.tides.ids
    assert found.propagation.verdict.word == "consistent"


def test_inferred_constituents_are_no_evidence() -> None:
    gauges = COAST.gauges(random())
    basis = tuple("inferred" if name in ("K2", "P1") else "fitted" for name in gauges[0].constants.names)
    gauges[0] = GaugeTide(station=gauges[0].station, constants=replace(gauges[0].constants, basis=basis))
    assert tide_arrays(gauges).names == ("Q1", "O1", "K1", "N2", "M2", "S2")


def test_constants_that_state_no_errors_serve() -> None:
    nan = np.full(8, np.nan)
    gauges = [
        GaugeTide(station=g.station, constants=replace(g.constants, amplitude_sd_m=nan, phase_lag_sd_deg=nan))
        for g in replace(COAST, faults={4: Fault(late_h=15 / 60)}).gauges(random())
    ]
    found = measured(gauges)
    assert found.propagation.verdict.word == "consistent"
    assert errors(found) == {("g4", "clock_offset")}


@pytest.mark.parametrize("offshore_km", [60.0, 150.0])
def test_the_only_gauge_offshore_is_not_accused_of_the_decay(offshore_km: float) -> None:
    offshore = np.zeros(8)
    offshore[2] = offshore_km
    found = replace(COAST, offshore_km=offshore).measure(random())
    assert errors(found) == set()
    group = found.propagation.groups[-1]
    assert_allclose(group.cross_shore_ratio, group.theory_cross_shore_ratio, rtol=0.1)


def test_the_only_gauge_offshore_in_feet_is_still_told() -> None:
    offshore = np.zeros(8)
    offshore[2] = 100.0
    found = replace(COAST, offshore_km=offshore, faults={2: Fault(scale=1 / 0.3048)}).measure(random())
    assert errors(found) == {("g2", "unit_scale")}


def test_the_first_gauge_upside_down_is_no_measure_of_the_others() -> None:
    found = replace(COAST, faults={0: Fault(scale=-1.0)}).measure(random())
    assert errors(found) == {("g0", "inverted")}
    assert found.propagation.verdict.word == "consistent"


@pytest.mark.parametrize("names", [("M2",), ("K1",)])
def test_one_constituent_on_a_long_coast_decides_nothing(names: tuple[str, ...]) -> None:
    found = replace(COAST, along_km=10 * ALONG, names=names).measure(random())
    assert found.propagation.verdict.word == "undetermined"
    assert "whole periods" in found.propagation.verdict.evidence
    assert errors(found) == set()


def test_two_gauges_at_one_place_along_the_coast() -> None:
    along, offshore = ALONG.copy(), np.zeros(8)
    along[5], offshore[5] = along[4], 40.0
    found = replace(COAST, along_km=along, offshore_km=offshore).measure(random())
    assert found.propagation.verdict.word == "consistent"
    # All at one place: no distance, no wave.
    nowhere = replace(COAST, along_km=np.zeros(8)).measure(random())
    assert nowhere.propagation.verdict.word == "undetermined"
    assert nowhere.findings == ()


@pytest.mark.parametrize("count", [0, 1, 2, 3])
def test_few_gauges_decide_nothing_and_accuse_nobody(count: int) -> None:
    found = measured(replace(COAST, faults={0: Fault(late_h=6.0)}).gauges(random())[:count])
    assert found.propagation.verdict.word != "consistent"
    assert found.findings == ()


def test_kilometres_may_begin_anywhere() -> None:
    gauges = COAST.gauges(random())
    far = [
        replace(g, station=replace(g.station, along_coast_km=30000.0 + (g.station.along_coast_km or 0.0)))
        for g in gauges
    ]
    slow = [measured(each).propagation.groups[-1].slowness_h_per_km for each in (gauges, far)]
    assert_allclose(slow[1], slow[0], rtol=1e-9)


def test_hemispheres_mirror_each_other() -> None:
    fits = [replace(COAST, latitude_deg=latitude).measure(random()).propagation for latitude in (-41.2, 41.2)]
    assert fits[0].verdict.word == fits[1].verdict.word == "consistent"
    assert_allclose(fits[0].groups[-1].slowness_h_per_km, fits[1].groups[-1].slowness_h_per_km, rtol=1e-9)


def test_without_depth_the_direction_is_still_told() -> None:
    found = measured(COAST.gauges(random()), CoastSpec(side="left"))
    assert_allclose(found.propagation.groups[-1].direction_deg, 0.0, atol=1e-6)
    assert "travels toward 0 deg" in found.propagation.verdict.evidence


def test_without_coordinates_the_direction_is_that_of_the_kilometres() -> None:
    gauges = [
        GaugeTide(station=replace(g.station, latitude_deg=None, longitude_deg=None), constants=g.constants)
        for g in COAST.gauges(random())
    ]
    found = measured(gauges)
    assert np.isnan(found.propagation.groups[-1].direction_deg)
    assert "travels toward increasing along_coast_km" in found.propagation.verdict.evidence
