"""Whether what was measured is the coast's Kelvin wave, in a word and with its evidence."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
import scipy.stats

from tidekit.network.coast import CoastTheory

Word = Literal["consistent", "inconsistent", "undetermined"]

SPEED_TOLERANCE = (0.70, 1.20)
"""Speeds of real boundary waves over sqrt(g h): shelves take 2 to 8 % (Munk, Snodgrass and Wimbush 1970), the
Earth's curvature up to 15 % either way (Miles 1972), a rough coast up to 25 % (Mysak and Tang 1974)."""
VAGUE_FACTOR = 2.5
"""An interval of speeds whose ends differ by more than this decides nothing."""
DISPERSION_LEVEL = 0.01
"""Probability below which speeds differ between constituents."""
RATIO_TOLERANCE = 0.15
"""Relative difference of the cross-shore ratio that a shelf may make (common practice, no source)."""
RATIO_LEVEL = 0.99
"""Confidence at which a cross-shore ratio is called different."""


@dataclass(frozen=True)
class Verdict:
    """A word and why."""

    word: Word
    """`consistent`, `inconsistent` or `undetermined`."""
    evidence: str
    """What was measured against what was expected."""


def group_verdict(
    *,
    slowness: tuple[float, float, float],
    gauges: int,
    ratio: tuple[float, float, float],
    ratio_freedom: int,
    theory: CoastTheory | None,
    dispersion_p: float,
) -> Verdict:
    """Judge one group.

    Parameters
    ----------
    slowness : (low, best, high)
        Signed slowness along increasing `along_coast_km`. [hours per km]
    gauges : int
        Gauges that agree with it.
    ratio : (ratio, sd, km)
        Cross-shore amplitude ratio at a distance offshore; NaN where unmeasured.
    ratio_freedom : int
        Degrees of freedom of that ratio.
    theory : CoastTheory or None
        What the coast's Kelvin wave would do.
    dispersion_p : float
        Probability of the spread of speeds between constituents; NaN where untested.

    Returns
    -------
    Verdict
        `inconsistent` if the wave goes the wrong way, its speed lies outside the tolerance, constituents differ in
        speed, or the decay offshore is another; `undetermined` if the data cannot say; else `consistent`.
    """
    if gauges < 3:
        return Verdict("undetermined", f"only {gauges} gauges agree on one wave; three are the least that test it")
    if theory is None:
        return Verdict("undetermined", "the coast gives no depth, so there is no theory to compare with")
    low, best, high = slowness
    if low * high <= 0:
        return Verdict("undetermined", _way(best, theory, sure=False))
    against: list[str] = []
    speeds = sorted(1.0 / (3.6 * abs(value)) for value in (low, high))
    expected = theory.wave.speed_m_per_s
    bounds = tuple(expected * factor for factor in SPEED_TOLERANCE)
    way = _way(best, theory, sure=True)
    if np.sign(best) != theory.sense:
        against.append(way)
    speed = f"{1 / (3.6 * abs(best)):.1f} m/s ({speeds[0]:.1f} to {speeds[1]:.1f}) where sqrt(g h) is {expected:.1f}"
    if speeds[1] < bounds[0] or speeds[0] > bounds[1]:
        against.append(f"speed {speed}, outside {bounds[0]:.1f} to {bounds[1]:.1f} that real coasts allow")
    if dispersion_p < DISPERSION_LEVEL:
        against.append(f"constituents travel at different speeds (p = {dispersion_p:.1g})")
    across = _across(ratio, ratio_freedom, theory)
    if across and across.startswith("!"):
        against.append(across[1:])
    if against:
        return Verdict("inconsistent", "; ".join(against))
    if speeds[1] > VAGUE_FACTOR * speeds[0]:
        return Verdict("undetermined", f"{way}, but the speed is vague: {speed}")
    evidence = [way, f"speed {speed}"]
    if np.isfinite(dispersion_p):
        evidence.append(f"no dispersion (p = {dispersion_p:.2f})")
    return Verdict("consistent", "; ".join(evidence + ([across] if across else [])))


def _way(slowness: float, theory: CoastTheory, *, sure: bool) -> str:
    along = np.sign(slowness) == theory.sense
    bearing = (theory.bearing_deg + (0.0 if slowness >= 0 else 180.0)) % 360.0
    side = theory.wave.coast_side
    other = "left" if side == "right" else "right"
    hemisphere = "northern" if theory.wave.latitude_deg > 0 else "southern"
    where = side if along else other
    if not sure:
        return (
            f"the direction is not certain: most likely toward {bearing:.0f} deg with the coast on the {where}, "
            f"where a boundary wave of the {hemisphere} hemisphere keeps it on its {side}"
        )
    wanted = "as it must" if along else f"but a boundary wave keeps it on its {side}"
    return f"travels toward {bearing:.0f} deg with the coast on its {where}, {wanted} in the {hemisphere} hemisphere"


def _across(ratio: tuple[float, float, float], freedom: int, theory: CoastTheory) -> str:
    """Sentence on the decay offshore, marked with a leading ``!`` where it differs; empty where unmeasured."""
    value, sd, distance_km = ratio
    if not np.isfinite(value):
        return ""
    expected = float(theory.wave.amplitude_ratio(distance_km))
    text = f"amplitude ratio {value:.3f} at {distance_km:.0f} km offshore where exp(-x f/c) is {expected:.3f}"
    if freedom < 1:
        return text
    reach = float(scipy.stats.t.ppf(0.5 + RATIO_LEVEL / 2, freedom)) * sd + RATIO_TOLERANCE * expected
    return f"!{text}" if abs(value - expected) > reach else text
