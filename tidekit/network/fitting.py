"""Fit propagation along a coast and decay across it to the constants of its gauges."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from tidekit.network.coast import CoastTheory
from tidekit.network.delays import CLEAR_LEAD
from tidekit.network.dispersion import UNTESTED, Dispersion, dispersion
from tidekit.network.gauges import TideArrays
from tidekit.network.lines import (
    LOOSE_SHARE,
    constituent_line,
    delay_design,
    delay_prior,
    fit_delays,
    fit_levels,
    gauge_delays,
    level_design,
    level_prior,
)
from tidekit.network.propagation import GroupFit, PropagationFit
from tidekit.network.robust_line import RobustFit
from tidekit.network.verdict import RATIO_LEVEL, Measured, Verdict, group_verdict

Float = NDArray[np.float64]

_OFFSHORE_LEAST_KM = 1.0
"""Gauges nearer than this are on the coast."""


def fit_propagation(
    tides: TideArrays, theory: CoastTheory | None, *, bearing_deg: float = float("nan"), confidence: float = 0.95
) -> PropagationFit:
    """Measure speed, direction and cross-shore decay, and test them against the coast's Kelvin wave.

    Parameters
    ----------
    tides : TideArrays
        Phase lags and amplitudes of n open-coast gauges.
    theory : CoastTheory or None
        What to test against.
    bearing_deg : float
        Compass bearing toward increasing `along_coast_km`; NaN where unknown. [degrees]
    confidence : float
        Level of the intervals.

    Returns
    -------
    PropagationFit
        With fewer than three gauges at distinct places its verdicts are `undetermined`.

    Notes
    -----
    Each gauge's delay against one of them comes from all constituents at once, which resolves the wrapping; the line
    of delay against distance is robust, so that a minority of gauges with wrong clocks does not bend it. Errors
    contain the scatter between gauges that the line leaves.
    """
    if len(tides.ids) < 2 or not tides.names or np.ptp(tides.along_km) == 0.0:
        return _undetermined(tides, theory, confidence)
    delays = gauge_delays(tides)
    before = delay_prior(theory)
    line = fit_delays(delay_design(tides.along_km), delays, before)
    spread = dispersion(tides, delays, line.used, float(line.coefficients[1]))
    design, prior = level_design(tides.along_km, tides.offshore_km), level_prior(theory, LOOSE_SHARE)
    levels = fit_levels(tides, design, prior)
    lead = min((delay.lead for delay, used in zip(delays, line.used, strict=True) if used), default=np.inf)
    asked = _Asked(
        tides, theory, bearing_deg, confidence, whole_periods_known=lead >= CLEAR_LEAD, gauges_lead=line.lead
    )
    groups = [
        _group(
            name,
            constituent_line(tides, delays, line.used, column, before),
            fit_levels(tides, design, prior, column),
            UNTESTED,
            asked,
        )
        for column, name in enumerate(tides.names)
    ]
    groups.append(_group("all", line, levels, spread, asked))
    return PropagationFit(
        tides=tides,
        groups=tuple(groups),
        theory=theory,
        delays=delays,
        delay_fit=line,
        level_fit=levels,
        dispersion=spread,
        confidence=confidence,
    )


@dataclass(frozen=True)
class _Asked:
    """What all groups have in common."""

    tides: TideArrays
    theory: CoastTheory | None
    bearing_deg: float
    confidence: float
    whole_periods_known: bool
    gauges_lead: float


def _group(name: str, line: RobustFit, levels: RobustFit, spread: Dispersion, asked: _Asked) -> GroupFit:
    slowness, sd = float(line.coefficients[1]), float(np.sqrt(line.covariance[1, 1]))
    reach = line.reach(asked.confidence) * sd
    theory, offshore = asked.theory, asked.tides.offshore_km
    distance = float(offshore.max())
    ratio, ratio_sd = _cross_shore(levels, offshore, distance)
    return GroupFit(
        group=name,
        slowness_h_per_km=slowness,
        slowness_sd_h_per_km=sd,
        slowness_low_h_per_km=slowness - reach,
        slowness_high_h_per_km=slowness + reach,
        direction_deg=(asked.bearing_deg + (0.0 if slowness >= 0 else 180.0)) % 360.0,
        cross_shore_ratio=ratio,
        cross_shore_ratio_sd=ratio_sd,
        theory_cross_shore_ratio=_theory_ratio(theory, distance),
        theory_speed_m_per_s=float("nan") if theory is None else theory.wave.speed_m_per_s,
        verdict=group_verdict(
            Measured(
                slowness=(slowness - reach, slowness, slowness + reach),
                gauges=int(line.used.sum()),
                of=len(asked.tides.ids),
                bearing_deg=asked.bearing_deg,
                whole_periods_known=asked.whole_periods_known,
                gauges_lead=asked.gauges_lead,
                ratio=ratio,
                ratio_reach=levels.reach(RATIO_LEVEL) * ratio_sd if np.isfinite(ratio) else float("nan"),
                offshore_km=distance,
                spread=spread,
            ),
            theory,
        ),
    )


def _theory_ratio(theory: CoastTheory | None, distance_km: float) -> float:
    if theory is None or distance_km < _OFFSHORE_LEAST_KM:
        return float("nan")
    return float(theory.wave.amplitude_ratio(distance_km))


def _cross_shore(levels: RobustFit, offshore_km: Float, distance_km: float) -> tuple[float, float]:
    """Amplitude ratio at a distance and its standard deviation: NaN unmeasured, infinite for no scatter to judge by."""
    used = offshore_km[levels.used]
    if not np.any(used >= _OFFSHORE_LEAST_KM) or np.ptp(used) == 0.0:
        return float("nan"), float("nan")
    ratio = float(np.exp(levels.coefficients[-1] * distance_km))
    sd = ratio * distance_km * float(np.sqrt(levels.covariance[-1, -1]))
    return ratio, sd if levels.freedom >= 1 else float("inf")


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
        theory=theory,
        delays=(),
        delay_fit=None,
        level_fit=None,
        dispersion=UNTESTED,
        confidence=confidence,
    )
