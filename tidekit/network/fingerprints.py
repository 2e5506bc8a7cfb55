"""How each gauge departs from the wave at the others.

A wrong clock shifts every phase lag in proportion to the constituent's speed; a wrong unit or gain multiplies
every amplitude alike; a record upside down turns every phase by 180 degrees. Each gauge is measured against the wave
fitted to the other gauges, and its errors contain the scatter between those.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from tidekit.network.agreement import Scatter
from tidekit.network.coast import CoastTheory
from tidekit.network.delays import Delay, joint_delay, wrapped_deg
from tidekit.network.gauges import TideArrays
from tidekit.network.lines import (
    DELAY_SCATTER,
    JUDGING_FREEDOM,
    LEVEL_SCATTER,
    SHELF_SHARE,
    delay_design,
    delay_prior,
    fit_delays,
    fit_levels,
    level_design,
    level_prior,
)
from tidekit.network.propagation import PropagationFit
from tidekit.network.robust_line import RobustFit
from tidekit.network.verdict import speed_allowed

Float = NDArray[np.float64]

_LEAST_OTHERS, _ENOUGH_OTHERS = 3, 4
"""Gauges that must agree before another can be measured against them, and before they also tell its place from a
fault: with fewer, what a bay does is part of the error, and only gross faults stand out."""
_USUAL_CLOCK_H = 0.25
"""Usual size of clock errors: an alias of hours is taken only where it explains the phases better."""
_INVERTED_HANDICAP = 4.0
"""Log odds by which a record is likelier to be upright than upside down, before its phases speak."""


@dataclass(frozen=True, eq=False, kw_only=True)
class Fingerprint:
    """How one gauge departs from the wave at the others: what its faults are read from; arrays of shape (k,)."""

    gauge: str
    """Id of the gauge."""
    names: tuple[str, ...]
    """Constituents."""
    speeds_deg_per_h: Float
    """Their speeds. [degrees per hour]"""
    phase_residual_deg: Float
    """Phase lag less that expected from the other gauges. [degrees]"""
    phase_sd_deg: Float
    """Its standard deviation, the scatter between the others included. [degrees]"""
    amplitude_ratio: Float
    """Amplitude over that expected."""
    clock: Delay
    """Clock error that best explains the phases. [h]"""
    clock_sd_h: float
    """Its standard deviation, the scatter between the others included. [h]"""
    clock_freedom: int
    """Degrees of freedom of that."""
    inverted: bool
    """Whether the phases are explained better by a record upside down."""
    inverted_lead: float
    """Lead in log likelihood of the better of the two, upright and upside down."""
    log_gain: float
    """Logarithm of the mean amplitude ratio."""
    log_gain_sd: float
    """Its standard deviation."""
    log_gain_freedom: int
    """Degrees of freedom of that."""


def fingerprints(fit: PropagationFit) -> tuple[Fingerprint, ...]:
    """Measure each gauge against the wave at the others.

    Parameters
    ----------
    fit : PropagationFit
        Fit of the whole network.

    Returns
    -------
    tuple of Fingerprint
        Without the gauges that too few others agree to judge.
    """
    if fit.delay_fit is None:
        return ()
    tides, theory = fit.tides, _judge(fit)
    delays, levels = delay_design(tides.along_km), level_design(tides.along_km, tides.offshore_km)
    slowness, decay, prints = delay_prior(fit.theory), level_prior(theory, SHELF_SHARE), []
    for gauge in range(len(tides.ids)):
        others = np.delete(np.arange(len(tides.ids)), gauge)
        line = fit_delays(delays[others], tuple(fit.delays[n] for n in others), slowness, belief=JUDGING_FREEDOM)
        if line.used.sum() >= _LEAST_OTHERS:
            level = fit_levels(tides.rows(others), levels[others], decay, belief=JUDGING_FREEDOM)
            waves = _Wave(others, delays, line, DELAY_SCATTER), _Wave(others, levels, level, LEVEL_SCATTER)
            prints.append(_fingerprint(tides, gauge, *waves))
    return tuple(prints)


def _judge(fit: PropagationFit) -> CoastTheory | None:
    """The coast's theory; None where the measured speed refutes it, as then its decay offshore judges nobody."""
    together = fit.groups[-1]
    ends = together.slowness_low_h_per_km, together.slowness_high_h_per_km
    return fit.theory if fit.theory is not None and speed_allowed(*ends, fit.theory) else None


@dataclass(frozen=True)
class _Wave:
    """A line fitted to the other gauges."""

    others: NDArray[np.int64]
    design: Float
    line: RobustFit
    scatter: Scatter

    @property
    def agreeing(self) -> NDArray[np.int64]:
        """Rows of the gauges that agree, in the whole network."""
        return self.others[self.line.used]

    def expected(self) -> Float:
        """What the line gives at every gauge of the network."""
        return self.design @ self.line.coefficients

    def error(self, gauge: int) -> float:
        """Standard deviation of what it gives at a gauge, that of the gauge's place included."""
        place = self.scatter.above if len(self.agreeing) < _ENOUGH_OTHERS else 0.0
        return float(np.hypot(self.line.predict(self.design[gauge])[1], place))


def _fingerprint(tides: TideArrays, gauge: int, delay: _Wave, level: _Wave) -> Fingerprint:
    residual, sd = _phases(tides, gauge, delay)
    upright, overturned = (
        joint_delay(residual, sd, tides.speeds_deg_per_h, usual_h=_USUAL_CLOCK_H, turn_deg=turn)
        for turn in (0.0, 180.0)
    )
    lead = _belief(overturned) - _INVERTED_HANDICAP - _belief(upright)
    clock = overturned if lead > 0 else upright
    log_ratio, gain_sd = _amplitudes(tides, gauge, level)
    return Fingerprint(
        gauge=tides.ids[gauge],
        names=tides.names,
        speeds_deg_per_h=tides.speeds_deg_per_h,
        phase_residual_deg=residual,
        phase_sd_deg=sd,
        amplitude_ratio=np.exp(log_ratio),
        clock=clock,
        clock_sd_h=float(np.hypot(delay.error(gauge), clock.delay_sd_h)),
        clock_freedom=delay.line.freedom,
        inverted=lead > 0,
        inverted_lead=abs(lead),
        log_gain=float(np.median(log_ratio)),
        log_gain_sd=gain_sd,
        log_gain_freedom=level.line.freedom,
    )


def _belief(delay: Delay) -> float:
    """Log likelihood with the odds of a clock error of that size."""
    return delay.log_likelihood - float(np.log1p((delay.delay_h / _USUAL_CLOCK_H) ** 2))


def _phases(tides: TideArrays, gauge: int, delay: _Wave) -> tuple[Float, Float]:
    """Phase lags less those expected, and their standard deviations with the scatter between the others."""
    steady = tides.lag_deg - np.outer(delay.expected(), tides.speeds_deg_per_h)
    trusted = steady[delay.agreeing]
    # Each constituent's own lag: a robust mean over the agreeing gauges, the joint delay taken off.
    anchor = trusted[0] + np.median(wrapped_deg(trusted - trusted[0]), axis=0)
    scatter = wrapped_deg(trusted - anchor).std(axis=0, ddof=1)
    return wrapped_deg(steady[gauge] - anchor), np.hypot(tides.lag_sd_deg[gauge], scatter)


def _amplitudes(tides: TideArrays, gauge: int, level: _Wave) -> tuple[Float, float]:
    """Log amplitude over that expected, by constituent, and the standard deviation of their mean."""
    steady = np.log(tides.amplitude_m) - level.expected()[:, None]
    anchor = np.median(steady[level.agreeing], axis=0)
    own = float(np.sqrt(np.mean(tides.log_amplitude_sd[gauge] ** 2) / len(tides.names)))
    return steady[gauge] - anchor, float(np.hypot(level.error(gauge), own))
