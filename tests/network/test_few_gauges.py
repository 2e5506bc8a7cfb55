"""Small networks: gross faults are named, what a bay or a strait does is not, and chance decides nothing."""

from dataclasses import replace

import numpy as np
import pytest

from tests.network.simulate import Coast, Fault
from tidekit.network.coast import CoastTheory
from tidekit.network.measure import NetworkMeasure, measure_network
from tidekit.network.verdict import speed_allowed
from tidekit.records.network import AuditSettings, CoastSpec
from tidekit.waves.kelvin import KelvinWave

FOUR = Coast(along_km=np.array([0.0, 80.0, 190.0, 260.0]), offshore_km=np.zeros(4))
DRAWS = 12


def draws(coast: Coast) -> list[NetworkMeasure]:
    return [coast.measure(np.random.default_rng(seed)) for seed in range(DRAWS)]


def accused(measure: NetworkMeasure) -> set[tuple[str, str]]:
    return {(finding.gauge, finding.kind) for finding in measure.findings if finding.severity == "error"}


@pytest.mark.parametrize(
    ("fault", "kind", "size"),
    [
        (Fault(late_h=8.0), "time_zone", 8.0),
        (Fault(late_h=-5.0), "time_zone", -5.0),
        (Fault(scale=-1.0), "inverted", 1),
    ],
)
def test_a_gross_fault_stands_out_among_four(fault: Fault, kind: str, size: float) -> None:
    for measure in draws(replace(FOUR, faults={1: fault})):
        assert accused(measure) == {("g1", kind)}
        (found,) = (finding for finding in measure.findings if finding.severity == "error")
        assert np.isnan(found.value_sd) or abs(found.value - size) < 3.0 * found.value_sd


def test_a_bay_among_four_is_no_wrong_clock() -> None:
    """Fifty minutes late, as the tide of a long bay is."""
    for measure in draws(replace(FOUR, faults={1: Fault(late_h=50.0 / 60.0)})):
        assert accused(measure) == set()


def test_sound_gauges_among_few_are_not_accused() -> None:
    for count in (3, 4):
        coast = replace(FOUR, along_km=FOUR.along_km[:count], offshore_km=FOUR.offshore_km[:count])
        assert [accused(measure) for measure in draws(coast)] == [set()] * DRAWS


def test_three_of_five_decide_nothing() -> None:
    """Two gauges in bays: whatever line three of the five make, chance makes such lines too."""
    five = Coast(
        along_km=np.array([0.0, 80.0, 190.0, 260.0, 350.0]),
        offshore_km=np.zeros(5),
        faults={0: Fault(late_h=0.9), 3: Fault(late_h=0.4)},
    )
    for measure in draws(five):
        assert measure.propagation.verdict.word == "undetermined"
        assert "most likely it travels toward" in measure.propagation.verdict.evidence


@pytest.mark.parametrize("depth_m", [400.0, 4000.0])
def test_a_depth_that_the_speed_refutes_judges_no_offshore_gauge(depth_m: float) -> None:
    """The whole coast is declared too deep, so its decay offshore is not the wave's."""
    coast = Coast(
        along_km=np.array([0.0, 80.0, 170.0, 250.0, 340.0, 430.0, 520.0, 620.0]),
        offshore_km=np.array([0.0, 0.0, 60.0, 0.0, 0.0, 120.0, 0.0, 0.0]),
    )
    declared = CoastSpec(side=coast.spec.side, depth_m=depth_m)
    for seed in range(DRAWS):
        measure = measure_network(coast.gauges(np.random.default_rng(seed)), declared, AuditSettings())
        assert measure.propagation.verdict.word == "inconsistent"
        assert accused(measure) == set()


def test_speeds_that_real_coasts_allow() -> None:
    """Within 0.70 to 1.20 of sqrt(g h), the right way; see `SPEED_TOLERANCE` for the publications."""
    wave = KelvinWave(60.0, -41.2)
    for sense in (1, -1):
        theory = CoastTheory(wave=wave, sense=sense, bearing_deg=0.0, depth_note="")
        own = sense / (3.6 * wave.speed_m_per_s)
        assert speed_allowed(0.99 * own, 1.01 * own, theory)
        assert speed_allowed(own / 0.75, own / 0.75, theory)
        assert not speed_allowed(own / 0.65, own / 0.60, theory)
        assert not speed_allowed(own / 1.40, own / 1.25, theory)
        assert not speed_allowed(-1.01 * own, -0.99 * own, theory)
        assert speed_allowed(-own, own, theory)
