"""The wave and the faults of made networks: operating characteristics through the room's one public call.

Networks are made from the flat-bottom Kelvin wave (Gill 1982, section 10.4: speed sqrt(g h), amplitude exp(-x |f|/c),
coast on the right in the northern hemisphere and on the left in the southern), with scatter of known size.
"""

from dataclasses import dataclass

import numpy as np
import pytest
from numpy.testing import assert_allclose

from tidekit.constituents.catalogue import speeds_deg_per_h
from tidekit.constituents.constants import HarmonicConstants
from tidekit.network.gauges import GaugeTide
from tidekit.network.measure import NetworkMeasure, measure_network
from tidekit.records.network import AuditSettings, CoastSpec, Side
from tidekit.records.station import Station

NAMES = ("M2", "S2", "N2", "K2", "K1", "O1")
AMPLITUDE_M = np.array([0.8, 0.3, 0.16, 0.08, 0.22, 0.17])
LAG_DEG = np.array([302.0, 339.0, 281.0, 341.0, 77.0, 48.0])
ALONG_KM = np.array([0.0, 80.0, 170.0, 250.0, 340.0, 430.0, 520.0, 620.0, 210.0, 400.0])
OFFSHORE_KM = np.array([0.0] * 8 + [60.0, 120.0])
DEPTH_M = 60.0
SPEED_M_PER_S = np.sqrt(9.81 * DEPTH_M)


@dataclass(frozen=True)
class Made:
    """One made network."""

    latitude_deg: float = -41.0
    side: Side = "left"
    sense: int = 1
    late_h: tuple[tuple[int, float], ...] = ()
    scale: tuple[tuple[int, float], ...] = ()
    scatter_min: float = 0.5
    gauges: int = 10
    depth_m: float | None = DEPTH_M

    def measure(self, seed: int) -> NetworkMeasure:
        random = np.random.default_rng(seed)
        radius_km = SPEED_M_PER_S / abs(2 * 7.292115e-5 * np.sin(np.radians(self.latitude_deg))) / 1e3
        late, scale = dict(self.late_h), dict(self.scale)
        tides = []
        for n in range(self.gauges):
            hours = self.sense * ALONG_KM[n] * 1e3 / SPEED_M_PER_S / 3600 + random.normal(0, self.scatter_min / 60)
            phasors = (
                AMPLITUDE_M
                * np.exp(-OFFSHORE_KM[n] / radius_km + random.normal(0, 0.01))
                * np.exp(-1j * np.radians(LAG_DEG + speeds_deg_per_h(NAMES) * (hours + late.get(n, 0.0))))
            )
            phasors = scale.get(n, 1.0) * phasors + 0.0008 * (random.normal(size=6) + 1j * random.normal(size=6))
            tides.append(GaugeTide(station=self._station(n), constants=self._constants(phasors)))
        coast = CoastSpec(side=self.side, depth_m=self.depth_m)
        return measure_network(tides, coast, AuditSettings())

    def _station(self, n: int) -> Station:
        return Station(
            id=f"g{n}",
            latitude_deg=self.latitude_deg + ALONG_KM[n] / 111.0,
            longitude_deg=88.0,
            along_coast_km=float(ALONG_KM[n]),
            offshore_km=float(OFFSHORE_KM[n]),
        )

    @staticmethod
    def _constants(phasors: np.ndarray) -> HarmonicConstants:
        return HarmonicConstants(
            names=NAMES,
            amplitude_m=np.abs(phasors),
            phase_lag_deg=np.mod(-np.rad2deg(np.angle(phasors)), 360.0),
            amplitude_sd_m=np.full(6, 0.0008),
            phase_lag_sd_deg=np.rad2deg(0.0008 / np.abs(phasors)),
            basis=("fitted",) * 6,
        )


def errors(measure: NetworkMeasure) -> set[tuple[str, str]]:
    return {(finding.gauge, finding.kind) for finding in measure.findings if finding.severity == "error"}


@pytest.mark.parametrize(
    ("latitude", "side", "sense"), [(-41.0, "left", 1), (-41.0, "right", -1), (41.0, "right", 1), (41.0, "left", -1)]
)
def test_a_boundary_wave_is_known_in_both_hemispheres_and_directions(latitude: float, side: Side, sense: int) -> None:
    measure = Made(latitude_deg=latitude, side=side, sense=sense).measure(1)
    fit = measure.propagation
    assert fit.verdict.word == "consistent"
    assert f"with the coast on its {'right' if latitude > 0 else 'left'}" in fit.verdict.evidence
    assert_allclose(fit.groups[-1].direction_deg, 0.0 if sense > 0 else 180.0, atol=1e-6)
    assert_allclose(fit.groups[-1].speed_m_per_s, SPEED_M_PER_S, rtol=0.02)


@pytest.mark.parametrize(("latitude", "side"), [(-41.0, "right"), (41.0, "left")])
def test_a_wave_with_the_coast_on_the_wrong_side_is_inconsistent(latitude: float, side: Side) -> None:
    verdict = Made(latitude_deg=latitude, side=side, sense=1).measure(1).propagation.verdict
    assert verdict.word == "inconsistent"
    assert "but a boundary wave keeps it on its" in verdict.evidence


def test_a_wave_of_another_depth_is_inconsistent() -> None:
    measure = Made(depth_m=4 * DEPTH_M).measure(1)
    assert measure.propagation.verdict.word == "inconsistent"
    assert "speed 24." in measure.propagation.verdict.evidence


def test_wrapping_is_resolved_without_close_neighbours() -> None:
    """M2's wave is 1085 km long: with gauges 250 and 620 km apart its phase alone fits several speeds."""
    made = Made()
    everyone = made.measure(3).propagation
    assert everyone.groups[-1].speed_m_per_s > 20.0
    delays_h = np.array([delay.delay_h for delay in everyone.delays])
    assert_allclose(delays_h - delays_h[0], ALONG_KM * 1e3 / SPEED_M_PER_S / 3600, atol=0.06)
    assert np.ptp(delays_h) > 6.9  # more than half of M2's period


DRAWS = 60


@pytest.fixture(scope="module")
def sound() -> list[NetworkMeasure]:
    """Sixty sound networks."""
    return [Made().measure(seed) for seed in range(DRAWS)]


def test_the_interval_holds_the_truth(sound: list[NetworkMeasure]) -> None:
    """95 % intervals: at least 86 % of sixty draws, three standard deviations of the binomial below."""
    intervals = [measure.propagation.groups[-1].speed_interval_m_per_s for measure in sound]
    assert sum(low < SPEED_M_PER_S < high for low, high in intervals) >= 0.86 * DRAWS


def test_sound_gauges_are_not_accused(sound: list[NetworkMeasure]) -> None:
    """Ten gauges at one in a thousand, twice (clock and gain): 1.2 expected in sixty networks, so at most four."""
    assert sum(bool(errors(measure)) for measure in sound) <= 4


FAULTS = {
    "clock": (Made(late_h=((2, 11 / 60),)), {("g2", "clock_offset"): 11.0}),
    "clock at the end": (Made(late_h=((7, -12 / 60),)), {("g7", "clock_offset"): -12.0}),
    "zone east": (Made(late_h=((5, 10.0),)), {("g5", "time_zone"): 10.0}),
    "zone west": (Made(late_h=((0, -8.0),)), {("g0", "time_zone"): -8.0}),
    "half an hour": (Made(late_h=((3, 5.5),)), {("g3", "time_zone"): 5.5}),
    "feet": (Made(scale=((4, 1 / 0.3048),)), {("g4", "unit_scale"): 1 / 0.3048}),
    "gain": (Made(scale=((6, 1.3),)), {("g6", "gain"): 1.3}),
    "upside down": (Made(scale=((1, -1.0),)), {("g1", "inverted"): 1.0}),
    "three at once": (
        Made(late_h=((2, 11 / 60), (7, 6.0)), scale=((5, 1 / 0.3048),)),
        {("g2", "clock_offset"): 11.0, ("g7", "time_zone"): 6.0, ("g5", "unit_scale"): 1 / 0.3048},
    ),
}


@pytest.mark.parametrize("name", list(FAULTS))
def test_faults_are_named_with_sign_and_size(name: str) -> None:
    """Each of ten draws: the fault at its gauge, and nobody else accused.

    Its size is within five of its own standard deviations: the scatter behind those comes from eight gauges or so, and
    Student's t with six degrees of freedom passes five in one of four hundred.
    """
    made, expected = FAULTS[name]
    for seed in range(10):
        measure = made.measure(seed)
        assert errors(measure) == set(expected), seed
        for finding in measure.findings:
            if (finding.gauge, finding.kind) in expected and np.isfinite(finding.value_sd):
                assert abs(finding.value - expected[finding.gauge, finding.kind]) < 5.0 * finding.value_sd, seed


def test_the_offshore_gauge_shows_the_decay() -> None:
    group = Made().measure(4).propagation.groups[-1]
    assert_allclose(group.cross_shore_ratio, group.theory_cross_shore_ratio, atol=4 * group.cross_shore_ratio_sd)
    # exp(-120 km |f| / c) at the gauges' mean latitude, Gill (1982), eq. 10.4.7 in form.
    f = 2 * 7.292115e-5 * np.sin(np.radians(np.mean(-41.0 + ALONG_KM / 111.0)))
    assert_allclose(group.theory_cross_shore_ratio, np.exp(-120e3 * abs(f) / SPEED_M_PER_S), rtol=1e-9)


@pytest.mark.parametrize("gauges", [1, 2])
def test_too_few_gauges_decide_nothing(gauges: int) -> None:
    measure = Made(gauges=gauges).measure(1)
    assert measure.propagation.verdict.word == "undetermined"
    assert measure.findings == ()


def test_a_coast_without_depth_decides_nothing_but_is_measured() -> None:
    fit = Made(depth_m=None).measure(1).propagation
    assert fit.verdict.word == "undetermined"
    assert_allclose(fit.groups[-1].speed_m_per_s, SPEED_M_PER_S, rtol=0.02)


def test_the_table_has_the_contracts_columns() -> None:
    frame = Made().measure(1).propagation.to_frame()
    wanted = ["group", "direction_deg", "speed_m_per_s", "speed_low_m_per_s", "speed_high_m_per_s"]
    wanted += ["theory_speed_m_per_s", "cross_shore_ratio", "theory_cross_shore_ratio", "verdict"]
    assert list(frame.columns)[: len(wanted)] == wanted
    assert frame["group"].iloc[-1] == "all"
