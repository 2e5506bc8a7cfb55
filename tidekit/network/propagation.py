"""Propagation along a coast and decay across it, measured from the constants of its gauges."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pandas as pd
import scipy.stats
from numpy.typing import NDArray

from tidekit.network.coast import CoastTheory
from tidekit.network.delays import Delay, joint_delay, wrapped_deg
from tidekit.network.gauges import TideArrays
from tidekit.network.robust_line import RobustFit, robust_fit
from tidekit.network.verdict import Verdict, group_verdict

Float = NDArray[np.float64]

DELAY_FLOOR_H = 0.5 / 60.0
"""Smallest scatter of delays between gauges to believe in: half a minute, a clock's usual reading."""
EARLY_SD_H, LATE_MEAN_H, MOST_COST = 3.0 / 60.0, 20.0 / 60.0, 5.0
"""Scatter of delays on an open coast, mean lateness that a bay or harbour adds, and the cost at which a gauge
counts as wrong however far off it is (common practice, no source)."""
AMPLITUDE_FLOOR = 0.005
"""Smallest relative scatter of amplitudes between gauges to believe in: half a per cent."""
_OFFSHORE_LEAST_KM = 1.0
"""Gauges nearer than this are on the coast."""


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
    delays: tuple[Delay, ...]
    """Delay of each gauge against the first, from all constituents."""
    delay_fit: RobustFit | None
    """Line of delay against distance; None with fewer than two gauges at two places."""
    level_fit: RobustFit | None
    """Log amplitude (mean over constituents) on distance along and offshore."""
    dispersion_p: float
    """Probability of speeds this different across constituents, were they all one; NaN where untested."""
    confidence: float
    """Level of the intervals."""

    @property
    def verdict(self) -> Verdict:
        """Verdict on all constituents together."""
        return self.groups[-1].verdict

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


def fit_propagation(tides: TideArrays, theory: CoastTheory | None, *, confidence: float = 0.95) -> PropagationFit:
    """Measure speed, direction and cross-shore decay, and test them against the coast's Kelvin wave.

    Parameters
    ----------
    tides : TideArrays
        Phase lags and amplitudes of n open-coast gauges.
    theory : CoastTheory or None
        What to test against.
    confidence : float
        Level of the intervals.

    Returns
    -------
    PropagationFit
        With fewer than three gauges at distinct places its verdicts are `undetermined`.

    Notes
    -----
    Each gauge's delay against the first comes from all constituents at once, which resolves the wrapping; the line
    of delay against distance is robust, so that a minority of gauges with wrong clocks does not bend it. Errors
    contain the scatter between gauges that the line leaves.
    """
    if len(tides.ids) < 2 or not tides.names or np.ptp(tides.along_km) == 0.0:
        return _undetermined(tides, theory, confidence)
    delays = tuple(
        joint_delay(
            wrapped_deg(tides.lag_deg[row] - tides.lag_deg[0]),
            np.hypot(tides.lag_sd_deg[row], tides.lag_sd_deg[0]),
            tides.speeds_deg_per_h,
        )
        for row in range(len(tides.ids))
    )
    line = fit_delays(tides, delays)
    levels = fit_levels(tides)
    singles = [_constituent_line(tides, delays, line, column) for column in range(len(tides.names))]
    dispersion_p = _dispersion(singles)
    distance = float(tides.offshore_km.max()) if tides.offshore_km.max() >= _OFFSHORE_LEAST_KM else float("nan")
    groups = [
        _group(name, single, tides, fit_levels(tides, column), distance, theory, confidence, float("nan"))
        for column, (name, single) in enumerate(zip(tides.names, singles, strict=True))
    ]
    groups.append(_group("all", line, tides, levels, distance, theory, confidence, dispersion_p))
    return PropagationFit(
        tides=tides,
        groups=tuple(groups),
        delays=delays,
        delay_fit=line,
        level_fit=levels,
        dispersion_p=dispersion_p,
        confidence=confidence,
    )


def fit_delays(tides: TideArrays, delays: tuple[Delay, ...]) -> RobustFit:
    """Line of delay [h] against distance along the coast [km]: coefficients are intercept and slowness."""
    design = np.column_stack([np.ones(len(delays)), tides.along_km])
    values = np.array([delay.delay_h for delay in delays])
    own_sd = np.array([delay.delay_sd_h for delay in delays])
    return robust_fit(design, values, own_sd, floor=DELAY_FLOOR_H, cost=late_cost)


def late_cost(residual_h: Float) -> float:
    """Cost of residual delays by which a line is chosen: normal when early, exponential when late, bounded.

    A bay, a harbour or a strait makes the tide late and nothing makes it early, so the open coast's wave is the
    early edge of the delays rather than their middle.

    References
    ----------
    .. [1] Aigner, D., Lovell, C. A. K. and Schmidt, P., "Formulation and estimation of stochastic frontier production
       function models", J. Econometrics 6 (1977) 21-37: normal and one-sided exponential errors together.
    """
    normal = 0.5 * (residual_h / EARLY_SD_H) ** 2
    cost = np.where(residual_h < 0, normal, np.minimum(normal, residual_h / LATE_MEAN_H))
    return float(np.sum(np.minimum(cost, MOST_COST)))


def fit_levels(tides: TideArrays, column: int | None = None) -> RobustFit:
    """Log amplitude of a constituent, or the mean over all, on a constant, distance along, and distance offshore.

    The slope along the coast stands for friction and changing depth. Distances along come in thousands of km.
    """
    logs = np.log(tides.amplitude_m)
    columns = np.arange(logs.shape[1]) if column is None else np.array([column])
    values = np.mean(logs[:, columns] - np.median(logs[:, columns], axis=0), axis=1)
    sd = np.sqrt(np.sum(tides.log_amplitude_sd[:, columns] ** 2, axis=1)) / len(columns)
    return robust_fit(level_design(tides.along_km, tides.offshore_km), values, sd, floor=AMPLITUDE_FLOOR)


def level_design(along_km: Float, offshore_km: Float) -> Float:
    """Columns of `fit_levels`; a distance that does not vary (or has too few gauges) has no column."""
    columns = [np.ones(len(along_km))]
    if len(np.unique(along_km)) > 2:
        columns.append(along_km / 1e3)
    if np.ptp(offshore_km) > 0.0:
        columns.append(offshore_km)
    return np.column_stack(columns)


def _constituent_line(tides: TideArrays, delays: tuple[Delay, ...], line: RobustFit, column: int) -> RobustFit:
    """Line of one constituent's own delays, unwrapped beside the joint ones, over the gauges that agree."""
    speed = tides.speeds_deg_per_h[column]
    joint = np.array([delay.delay_h for delay in delays])
    left = wrapped_deg(tides.lag_deg[:, column] - tides.lag_deg[0, column] - speed * joint)
    own, sd = joint + left / speed, tides.lag_sd_deg[:, column] / speed
    design = np.column_stack([np.ones(len(own)), tides.along_km])[line.used]
    fit = robust_fit(design, own[line.used], sd[line.used], floor=DELAY_FLOOR_H)
    used = line.used.copy()
    used[line.used] = fit.used
    return RobustFit(fit.coefficients, fit.covariance, used, fit.misfit_sd, fit.freedom)


def _dispersion(singles: list[RobustFit]) -> float:
    """Probability of such different slownesses if the wave had no dispersion."""
    if len(singles) < 2 or min(fit.freedom for fit in singles) < 1:
        return float("nan")
    slowness = np.array([fit.coefficients[1] for fit in singles])
    weights = 1.0 / np.array([fit.covariance[1, 1] for fit in singles])
    mean = np.sum(weights * slowness) / weights.sum()
    freedom = len(singles) - 1
    ratio = float(np.sum(weights * (slowness - mean) ** 2)) / freedom
    return float(scipy.stats.f.sf(ratio, freedom, min(fit.freedom for fit in singles)))


def _group(
    name: str,
    line: RobustFit,
    tides: TideArrays,
    levels: RobustFit,
    distance_km: float,
    theory: CoastTheory | None,
    confidence: float,
    dispersion_p: float,
) -> GroupFit:
    slowness, sd = float(line.coefficients[1]), float(np.sqrt(line.covariance[1, 1]))
    reach = float(scipy.stats.t.ppf(0.5 + confidence / 2, max(line.freedom, 1))) * sd if line.freedom >= 1 else np.inf
    ratio, ratio_sd = _cross_shore(levels, tides, distance_km)
    nan = float("nan")
    bearing = nan if theory is None else (theory.bearing_deg + (0.0 if slowness >= 0 else 180.0)) % 360.0
    return GroupFit(
        group=name,
        slowness_h_per_km=slowness,
        slowness_sd_h_per_km=sd,
        slowness_low_h_per_km=slowness - reach,
        slowness_high_h_per_km=slowness + reach,
        direction_deg=bearing,
        cross_shore_ratio=ratio,
        cross_shore_ratio_sd=ratio_sd,
        theory_cross_shore_ratio=nan if theory is None else float(theory.wave.amplitude_ratio(distance_km)),
        theory_speed_m_per_s=nan if theory is None else theory.wave.speed_m_per_s,
        verdict=group_verdict(
            slowness=(slowness - reach, slowness, slowness + reach),
            gauges=int(line.used.sum()),
            ratio=(ratio, ratio_sd, distance_km),
            ratio_freedom=levels.freedom,
            theory=theory,
            dispersion_p=dispersion_p,
        ),
    )


def _cross_shore(levels: RobustFit, tides: TideArrays, distance_km: float) -> tuple[float, float]:
    has_offshore = np.isfinite(distance_km) and np.any(tides.offshore_km[levels.used] >= _OFFSHORE_LEAST_KM)
    if not has_offshore or np.ptp(tides.offshore_km[levels.used]) == 0.0 or levels.freedom < 0:
        return float("nan"), float("nan")
    ratio = float(np.exp(levels.coefficients[-1] * distance_km))
    return ratio, ratio * distance_km * float(np.sqrt(levels.covariance[-1, -1]))


def _speed(slowness_h_per_km: float) -> float:
    return float("inf") if slowness_h_per_km == 0.0 else 1.0 / (3.6 * abs(slowness_h_per_km))


def _undetermined(tides: TideArrays, theory: CoastTheory | None, confidence: float) -> PropagationFit:
    nan = float("nan")
    why = (
        "no constituent is clear at every open-coast gauge"
        if len(tides.ids) > 1 and not tides.names
        else f"{len(tides.ids)} open-coast gauge(s) at one place along the coast: no distance to travel"
    )
    group = GroupFit(
        group="all",
        slowness_h_per_km=nan,
        slowness_sd_h_per_km=nan,
        slowness_low_h_per_km=nan,
        slowness_high_h_per_km=nan,
        direction_deg=nan,
        cross_shore_ratio=nan,
        cross_shore_ratio_sd=nan,
        theory_cross_shore_ratio=nan,
        theory_speed_m_per_s=nan if theory is None else theory.wave.speed_m_per_s,
        verdict=Verdict("undetermined", why),
    )
    return PropagationFit(
        tides=tides,
        groups=(group,),
        delays=(),
        delay_fit=None,
        level_fit=None,
        dispersion_p=nan,
        confidence=confidence,
    )
