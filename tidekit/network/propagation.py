"""What was measured of the wave along a coast and across it."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from tidekit.network.coast import CoastTheory
from tidekit.network.delays import Delay
from tidekit.network.dispersion import Dispersion
from tidekit.network.gauges import TideArrays
from tidekit.network.robust_line import RobustFit
from tidekit.network.verdict import Verdict


@dataclass(frozen=True, eq=False, kw_only=True)
class GroupFit:
    """The wave of one constituent, or of all together."""

    group: str
    """Constituent, or `all`."""
    slowness_h_per_km: float
    """Hours of delay a kilometre toward increasing `along_coast_km`; signed."""
    slowness_sd_h_per_km: float
    """Its standard deviation."""
    slowness_low_h_per_km: float
    """Lower end of its interval."""
    slowness_high_h_per_km: float
    """Upper end of its interval."""
    direction_deg: float
    """Compass bearing toward which the wave travels. [degrees]"""
    cross_shore_ratio: float
    """Amplitude at the farthest offshore gauge's distance over that at the coast; NaN without such a gauge."""
    cross_shore_ratio_sd: float
    """Its standard deviation."""
    theory_cross_shore_ratio: float
    """``exp(-x |f|/c)`` at that distance, c by the depth."""
    theory_speed_m_per_s: float
    """``sqrt(g h)``; NaN where no depth is known. [m/s]"""
    verdict: Verdict
    """Whether this is the coast's Kelvin wave, and by what evidence."""

    @property
    def speed_m_per_s(self) -> float:
        """Speed along the coast, without sign; infinite for no delay. [m/s]"""
        return _speed(self.slowness_h_per_km)

    @property
    def speed_interval_m_per_s(self) -> tuple[float, float]:
        """Interval of the speed; its upper end is infinite where no delay cannot be excluded. [m/s]"""
        ends = (self.slowness_low_h_per_km, self.slowness_high_h_per_km)
        fast = float("inf") if ends[0] * ends[1] <= 0 else max(map(_speed, ends))
        return min(map(_speed, ends)), fast


@dataclass(frozen=True, eq=False, kw_only=True)
class PropagationFit:
    """Propagation of the tide over a network's open-coast gauges."""

    tides: TideArrays
    """The arrays that were fitted, n gauges by k constituents."""
    groups: tuple[GroupFit, ...]
    """One a constituent, then `all`."""
    theory: CoastTheory | None
    """What it was tested against."""
    delays: tuple[Delay, ...]
    """Delay of each gauge against one of them, from all constituents."""
    delay_fit: RobustFit | None
    """Line of delay against distance; None with fewer than two gauges at two places."""
    level_fit: RobustFit | None
    """Log amplitude (mean over constituents) on distance along and offshore."""
    dispersion: Dispersion
    """Whether constituents differ in speed."""
    confidence: float
    """Level of the intervals."""

    @property
    def verdict(self) -> Verdict:
        """Verdict on all constituents together."""
        return self.groups[-1].verdict

    @property
    def dispersion_p(self) -> float:
        """Probability of speeds this different across constituents, were they all one; NaN where untested."""
        return self.dispersion.p

    @property
    def used(self) -> NDArray[np.bool_]:
        """Gauges whose delays agree with one wave, shape (n,)."""
        return np.ones(len(self.tides.ids), dtype=np.bool_) if self.delay_fit is None else self.delay_fit.used

    def to_frame(self) -> pd.DataFrame:
        """One row a group, with the columns of `propagation.csv`."""
        rows = []
        for fit in self.groups:
            low, high = fit.speed_interval_m_per_s
            rows.append(
                {
                    "group": fit.group,
                    "direction_deg": fit.direction_deg,
                    "speed_m_per_s": fit.speed_m_per_s,
                    "speed_low_m_per_s": low,
                    "speed_high_m_per_s": high,
                    "theory_speed_m_per_s": fit.theory_speed_m_per_s,
                    "cross_shore_ratio": fit.cross_shore_ratio,
                    "theory_cross_shore_ratio": fit.theory_cross_shore_ratio,
                    "verdict": fit.verdict.word,
                    "cross_shore_ratio_sd": fit.cross_shore_ratio_sd,
                    "evidence": fit.verdict.evidence,
                }
            )
        return pd.DataFrame(rows)


def _speed(slowness_h_per_km: float) -> float:
    return float("inf") if slowness_h_per_km == 0.0 else 1.0 / (3.6 * abs(slowness_h_per_km))
