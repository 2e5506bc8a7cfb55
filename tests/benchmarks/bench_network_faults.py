"""How often the network room finds what is wrong, and how often it accuses the innocent.

``python tests/benchmarks/bench_network_faults.py [DRAWS]`` makes that many networks (300) of each kind and prints
the shares. The networks are invented: 8 to 10 gauges, two offshore, half a minute and one per cent of scatter
between places, a millimetre of noise in each constituent.
"""

from __future__ import annotations

import sys
from collections import Counter
from collections.abc import Callable
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).parents[2]))  # run as a script from anywhere

from tests.network.simulate import Coast, Fault, some_coast
from tidekit.network.measure import NetworkMeasure

FEET = 1 / 0.3048
ZONES_H = np.array([z for z in np.arange(-12.0, 13.25, 0.25) if abs(z) >= 0.5])


@dataclass
class Tally:
    """Counts over draws."""

    draws: int = 0
    faults: int = 0
    found: int = 0
    sound: int = 0
    accused: int = 0
    covered: int = 0
    reversed: int = 0
    within_3_sd: int = 0
    words: Counter[str] | None = None

    def line(self) -> str:
        """The shares in a line."""
        return (
            f"found {share(self.found, self.faults)}, size within 3 sd {share(self.within_3_sd, self.found)}, "
            f"sound gauges accused {share(self.accused, self.sound)}, speed in its 95 % interval "
            f"{share(self.covered, self.draws)}, verdicts {dict(self.words or {})}"
        )


def share(part: int, whole: int) -> str:
    """A share in per cent."""
    return f"{100 * part / whole:.1f} %" if whole else "-"


def expected_findings(fault: Fault) -> dict[str, float]:
    """Kinds and sizes that a fault must give."""
    wanted = {}
    if 0 < abs(fault.late_h) < 0.4:
        wanted["clock_offset"] = 60 * fault.late_h
    elif fault.late_h:
        wanted["time_zone"] = fault.late_h
    if fault.scale < 0:
        wanted["inverted"] = 1.0
    size = abs(fault.scale)
    if size != 1.0:
        wanted["unit_scale" if size > 2 or size < 0.5 else "gain"] = size
    return wanted


def count(tally: Tally, coast: Coast, measure: NetworkMeasure) -> None:
    """Add one draw."""
    tally.draws += 1
    errors = {(f.gauge, f.kind): f for f in measure.findings if f.severity == "error"}
    wanted = {
        (f"g{n}", kind): size for n, fault in coast.faults.items() for kind, size in expected_findings(fault).items()
    }
    tally.faults += len(wanted)
    for key, size in wanted.items():
        if key in errors:
            tally.found += 1
            sd = errors[key].value_sd
            tally.within_3_sd += bool(np.isnan(sd) or abs(errors[key].value - size) < 3 * sd)
    faulty = {f"g{n}" for n in coast.faults}
    tally.sound += len(coast.along_km) - len(faulty)
    tally.accused += len({gauge for gauge, kind in errors if (gauge, kind) not in wanted})
    together = measure.propagation.groups[-1]
    low, high = together.slowness_low_h_per_km, together.slowness_high_h_per_km
    truth = 1.0 / (3.6 * coast.wave.speed_m_per_s)
    tally.covered += bool(low <= truth <= high)
    tally.words = (tally.words or Counter()) + Counter([together.verdict.word])


Kind = Callable[[Coast, np.random.Generator], dict[int, Fault]]


def choose(coast: Coast, random: np.random.Generator, number: int) -> list[int]:
    return [int(n) for n in random.choice(len(coast.along_km), number, replace=False)]


def any_fault(random: np.random.Generator) -> Fault:
    kind = random.integers(5)
    if kind == 0:
        return Fault(late_h=random.choice([-1, 1]) * 11.0 / 60)
    if kind == 1:
        return Fault(late_h=float(random.choice(ZONES_H)))
    if kind == 2:
        return Fault(scale=FEET)
    if kind == 3:
        return Fault(scale=-1.0)
    return Fault(scale=float(random.choice([0.75, 1.3])))


def _one(make: Callable[[np.random.Generator], Fault]) -> Kind:
    return lambda coast, random: {choose(coast, random, 1)[0]: make(random)}


KINDS: dict[str, Kind] = {
    "clean": lambda coast, random: {},
    "clock 11 min": _one(lambda r: Fault(late_h=float(r.choice([-1, 1])) * 11 / 60)),
    "zone -12..+13": _one(lambda r: Fault(late_h=float(r.choice(ZONES_H)))),
    "feet": _one(lambda r: Fault(scale=float(r.choice([FEET, 1 / FEET])))),
    "inverted": _one(lambda r: Fault(scale=-1.0)),
    "inverted and 11 min": _one(lambda r: Fault(scale=-1.0, late_h=float(r.choice([-1, 1])) * 11 / 60)),
    "feet and a zone": _one(lambda r: Fault(scale=FEET, late_h=float(r.choice(ZONES_H)))),
    "clock 11 min, end": lambda c, r: {
        int(r.choice([0, len(c.along_km) - 1])): Fault(late_h=float(r.choice([-1, 1])) * 11 / 60)
    },
    "two clocks of one sign": lambda c, r: dict.fromkeys(
        choose(c, r, 2), Fault(late_h=float(r.choice([-1, 1])) * 11 / 60)
    ),
    "three clocks late": lambda c, r: dict.fromkeys(choose(c, r, 3), Fault(late_h=11 / 60)),
    "four of any": lambda c, r: {n: any_fault(r) for n in choose(c, r, 4)},
}


def study(kind: str, draws: int, seed: int = 20260401, **options: object) -> Tally:
    """Tally of one kind of fault over seeded draws."""
    random, tally = np.random.default_rng(seed), Tally()
    for _ in range(draws):
        coast = some_coast(random, int(random.integers(8, 11)), **options)
        coast = replace(coast, faults=KINDS[kind](coast, random))
        count(tally, coast, coast.measure(random))
    return tally


if __name__ == "__main__":
    draws = int(sys.argv[1]) if len(sys.argv) > 1 else 300
    for kind in KINDS:
        print(f"{kind:<24}{study(kind, draws).line()}", flush=True)
