"""Whether what was measured is the coast's Kelvin wave, in a word and with its evidence."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np

from tidekit.network.coast import CoastTheory
from tidekit.network.dispersion import DISPERSION_LEVEL, Dispersion

Word = Literal["consistent", "inconsistent", "undetermined"]

SPEED_TOLERANCE = (0.70, 1.20)
"""Speeds of real boundary waves over sqrt(g h): shelves take 2 to 8 % (Munk, Snodgrass and Wimbush 1970), the
Earth's curvature up to 15 % either way (Miles 1972), a rough coast up to 25 % (Mysak and Tang 1974)."""
RIVAL_LEAD = 5.0
"""Lead in log evidence below which another set of gauges may be the one that is right: odds of 150 to one."""
VAGUE_FACTOR = 2.5
"""An interval of speeds whose ends differ by more than this decides nothing."""
DISPERSION_TOLERANCE = 0.10
"""Differences of slowness between constituents that a shelf, a bay or a rough coast may make (Miles 1972 gives 8 to
15 % for curvature alone, which grows with the wave's length)."""
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


@dataclass(frozen=True, kw_only=True)
class Measured:
    """What a verdict is about."""

    slowness: tuple[float, float, float]
    """Low, best and high signed slowness along increasing `along_coast_km`. [hours per km]"""
    gauges: int
    """Gauges that agree with it."""
    of: int
    """Gauges that were compared."""
    bearing_deg: float
    """Compass bearing toward increasing `along_coast_km`; NaN where unknown. [degrees]"""
    whole_periods_known: bool
    """Whether the constituents together tell how many whole periods the travel takes."""
    gauges_lead: float
    """Lead in log evidence of these gauges over others that agree on another wave."""
    ratio: float
    """Cross-shore amplitude ratio; NaN where unmeasured."""
    ratio_reach: float
    """Half width of its interval at `RATIO_LEVEL`; infinite where no scatter was measured."""
    offshore_km: float
    """Distance offshore that it belongs to. [km]"""
    spread: Dispersion
    """Whether constituents differ in speed."""


def group_verdict(measured: Measured, theory: CoastTheory | None) -> Verdict:
    """Judge one group.

    Parameters
    ----------
    measured : Measured
        What was measured.
    theory : CoastTheory or None
        What the coast's Kelvin wave would do.

    Returns
    -------
    Verdict
        `inconsistent` if the wave goes the wrong way, its speed lies outside the tolerance, constituents differ in
        speed, or the decay offshore is another; `undetermined` if the data cannot say; else `consistent`.
    """
    if reason := _silence(measured, theory):
        return Verdict("undetermined", reason)
    assert theory is not None  # `_silence` has said so otherwise
    way, fast, across = _way(measured, theory), _fast(measured, theory), _across(measured, theory)
    spread = _spread(measured.spread)
    against = [sentence for sentence in (way, fast, spread, across) if sentence.against]
    if against:
        return Verdict("inconsistent", "; ".join(sentence.text for sentence in against))
    low, high = _speeds(measured)
    if high > VAGUE_FACTOR * low:
        return Verdict("undetermined", f"{way.text}, but the speed is vague: {fast.text}")
    return Verdict("consistent", "; ".join(s.text for s in (way, fast, spread, across) if s.text))


def speed_allowed(low_h_per_km: float, high_h_per_km: float, theory: CoastTheory) -> bool:
    """Whether an interval of signed slowness holds any that real coasts allow the theory's wave, its way included."""
    low, high = sorted(3.6 * theory.sense * theory.wave.speed_m_per_s * end for end in (low_h_per_km, high_h_per_km))
    least, most = SPEED_TOLERANCE
    return low <= 1.0 / least and high >= 1.0 / most


@dataclass(frozen=True)
class _Sentence:
    text: str
    against: bool = False


def _silence(measured: Measured, theory: CoastTheory | None) -> str:
    """Why nothing can be judged; empty where it can."""
    low, best, high = measured.slowness
    if not measured.whole_periods_known:
        return "the constituents leave open how many whole periods the travel takes; two close in speed would tell"
    if measured.gauges < 3:
        few = f"only {measured.gauges} of {measured.of} gauges agree on one wave; three are the least that test it"
        return few if theory is None else f"{few} (most likely it {_way(measured, theory).text})"
    if measured.gauges == 3 and measured.of > 4:
        # A line through three leaves one thing to test, and among five there are ten threes.
        known = "" if theory is None else f" (most likely it {_way(measured, theory).text})"
        return f"only 3 of {measured.of} gauges agree on one wave, as three may by chance{known}"
    if measured.gauges_lead < RIVAL_LEAD:
        known = "" if theory is None else f": most likely it {_way(measured, theory).text}"
        return f"other gauges than the {measured.gauges} of {measured.of} that agree best tell of another wave{known}"
    if theory is None:
        return (
            f"travels toward {_toward(measured.bearing_deg, best)}, but there is no theory to compare with: the coast "
            "gives no depth, or its gauges give no latitude, or they stand on both sides of the equator"
        )
    if low * high <= 0:
        return f"the direction is not certain: most likely it {_way(measured, theory).text}"
    return ""


def _speeds(measured: Measured) -> tuple[float, float]:
    slow, fast = sorted(1.0 / (3.6 * abs(value)) for value in (measured.slowness[0], measured.slowness[2]))
    return slow, fast


def _toward(bearing_deg: float, slowness: float) -> str:
    if not np.isfinite(bearing_deg):
        return f"{'increasing' if slowness >= 0 else 'decreasing'} along_coast_km"
    return f"{(bearing_deg + (0.0 if slowness >= 0 else 180.0)) % 360.0:.0f} deg"


def _way(measured: Measured, theory: CoastTheory) -> _Sentence:
    best = measured.slowness[1]
    along = bool(np.sign(best) == theory.sense)
    side = theory.wave.coast_side
    other = "left" if side == "right" else "right"
    hemisphere = "northern" if theory.wave.latitude_deg > 0 else "southern"
    wanted = "as it must" if along else f"but a boundary wave keeps it on its {side}"
    text = (
        f"travels toward {_toward(measured.bearing_deg, best)} with the coast on its {side if along else other}, "
        f"{wanted} in the {hemisphere} hemisphere"
    )
    return _Sentence(text, against=not along)


def _fast(measured: Measured, theory: CoastTheory) -> _Sentence:
    slow, fast = _speeds(measured)
    best, expected = 1.0 / (3.6 * abs(measured.slowness[1])), theory.wave.speed_m_per_s
    least, most = (expected * factor for factor in SPEED_TOLERANCE)
    text = f"speed {best:.1f} m/s ({slow:.1f} to {fast:.1f}) where sqrt(g h) is {expected:.1f}"
    if fast < least or slow > most:
        return _Sentence(f"{text}, outside {least:.1f} to {most:.1f} that real coasts allow", against=True)
    return _Sentence(text)


def _spread(spread: Dispersion) -> _Sentence:
    if not np.isfinite(spread.p):
        return _Sentence("")
    if spread.p >= DISPERSION_LEVEL:
        return _Sentence(f"no dispersion (p = {spread.p:.2f})")
    text = f"constituents travel at different speeds (p = {spread.p:.1g}"
    if spread.spread <= DISPERSION_TOLERANCE:
        return _Sentence(f"{text}), by no more than {100 * DISPERSION_TOLERANCE:.0f} %")
    return _Sentence(f"{text}, {spread.name} by {100 * spread.spread:.0f} % in slowness)", against=True)


def _across(measured: Measured, theory: CoastTheory) -> _Sentence:
    if not np.isfinite(measured.ratio):
        return _Sentence("")
    expected = float(theory.wave.amplitude_ratio(measured.offshore_km))
    text = (
        f"amplitude ratio {measured.ratio:.3f} at {measured.offshore_km:.0f} km offshore where exp(-x f/c) is "
        f"{expected:.3f}"
    )
    differs = abs(measured.ratio - expected) > measured.ratio_reach + RATIO_TOLERANCE * expected
    return _Sentence(text, against=bool(differs))
