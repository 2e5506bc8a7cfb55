"""Which constituents a record of a given length can tell apart, and which companions to infer.

References
----------
.. [1] Schureman, P., "Manual of Harmonic Analysis and Prediction of Tides", US Coast and Geodetic Survey
   Special Publication 98, revised 1940: synodic period and inference.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from functools import cache

import numpy as np

from tidekit.astronomy.potential import potential_lines
from tidekit.constituents.catalogue import catalogue, resolve
from tidekit.constituents.constants import HarmonicConstants
from tidekit.errors import AnalysisError

CALENDAR_YEAR_TOLERANCE = 0.99
"""Part of the synodic period that must be covered: a calendar year of 365 days then parts S2 from T2."""

_WEATHER_TIDE_M = {"Sa": 0.05, "S1": 0.005}
"""Ranking heights of what the ocean owes to the weather (common practice, no source). [m]"""

_SHALLOW_WATER = 0.03
"""Strength of each further interaction in a compound tide, for the ranking (common practice, no source)."""


RELATION_SD = 0.1
"""Relative standard deviation of an inferred relation, of the ratio and in radians of the lag difference: how far
the ocean's answer changes within a group of close constituents (common practice, no source)."""


@dataclass(frozen=True)
class Companion:
    """A constituent too close to another to be fitted, tied to it by a known relation."""

    name: str
    """The constituent to infer."""
    from_name: str
    """The fitted constituent it is inferred from."""
    amplitude_ratio: float
    """Its amplitude over the fitted one's."""
    lag_difference_deg: float
    """Its phase lag less the fitted one's. [degrees]"""
    source: str
    """`equilibrium`, or the gauge whose constants gave the relation."""

    @property
    def ratio_to_main(self) -> complex:
        """Phasor over the fitted constituent's phasor."""
        return complex(self.amplitude_ratio * np.exp(-1j * np.deg2rad(self.lag_difference_deg)))


@cache
def ranking_height_m(name: str) -> float:
    """Height that ranks a constituent when not all can be kept.

    The equilibrium height of its line; for a compound tide the height that interaction of its parts in
    shallow water suggests.

    Parameters
    ----------
    name : str
        Constituent.

    Returns
    -------
    float
        Height. [m]
    """
    entry = resolve(name)
    if entry.parts:
        unit = _equilibrium_height_m("M2")
        count = sum(abs(factor) for _, factor in entry.parts)
        shares = [(ranking_height_m(part) / unit) ** abs(factor) for part, factor in entry.parts]
        return float(unit * np.prod(shares) * _SHALLOW_WATER ** (count - 1))
    return _WEATHER_TIDE_M.get(entry.name) or _equilibrium_height_m(entry.name)


def _equilibrium_height_m(name: str) -> float:
    lines = potential_lines()
    match = np.all(lines.doodson == np.array(resolve(name).doodson), axis=1)
    return float(np.abs(lines.amplitude_m[match]).max(initial=0.0))


def synodic_period_h(first: str, second: str) -> float:
    """Time in which two constituents go through one cycle of relative phase.

    Parameters
    ----------
    first, second : str
        Constituents.

    Returns
    -------
    float
        Period; infinite where the speeds are equal. [hours]

    Examples
    --------
    >>> round(synodic_period_h("M2", "S2") / 24, 3)
    14.765
    """
    difference = abs(resolve(first).speed_deg_per_h - resolve(second).speed_deg_per_h)
    return 360.0 / difference if difference > 1e-9 else float("inf")


def resolvable(
    span_h: float,
    *,
    step_h: float = 1.0,
    candidates: Iterable[str] | None = None,
    rayleigh: float = 1.0,
) -> tuple[str, ...]:
    """Choose constituents that a record can tell from each other and from its mean.

    Those sampled less than twice a cycle are left out. The strongest come first; each next one is kept if
    the record covers the synodic period with every one kept before and with the mean level, times `rayleigh`.

    Parameters
    ----------
    span_h : float
        Length of the record, number of steps times the step. [hours]
    step_h : float
        Sampling step. [hours]
    candidates : iterable of str, optional
        Constituents to choose from; the whole catalogue by default.
    rayleigh : float
        Synodic periods wanted.

    Returns
    -------
    tuple of str
        In order of speed.

    Raises
    ------
    AnalysisError
        If the record is too short for any constituent.
    """
    names = [resolve(name).name for name in (candidates or catalogue())]
    sampled = [name for name in names if resolve(name).speed_deg_per_h * step_h < 180.0]
    reach_deg = 360.0 * rayleigh * CALENDAR_YEAR_TOLERANCE
    kept: list[str] = []
    kept_speeds: list[float] = [0.0]  # the mean level counts as a constituent of speed zero
    for name in sorted(sampled, key=ranking_height_m, reverse=True):
        speed = resolve(name).speed_deg_per_h
        if all(abs(speed - other) * span_h >= reach_deg for other in kept_speeds):
            kept.append(name)
            kept_speeds.append(speed)
        elif not kept:
            break  # shorter than a cycle of the strongest: overtides fitted without it would be nonsense
    if not kept:
        message = (
            f"the record covers {span_h:.1f} h at a step of {step_h:g} h, too short for any constituent; "
            "a day of hourly heights is the least that fits one"
        )
        raise AnalysisError(message)
    return tuple(sorted(kept, key=lambda name: resolve(name).speed_deg_per_h))


def equilibrium_companions(fitted: Sequence[str], span_h: float, *, at_least_m: float = 0.002) -> tuple[Companion, ...]:
    """Companions of the fitted constituents by the ratios of the equilibrium tide, with equal phase lags.

    Parameters
    ----------
    fitted : sequence of str
        Constituents that will be fitted.
    span_h : float
        Length of the record. [hours]
    at_least_m : float
        Equilibrium height below which a constituent is not worth inferring. [m]

    Returns
    -------
    tuple of Companion
        One for each line constituent of the catalogue that the record cannot part from a stronger fitted one
        of its species; its relation is to the one that outweighs it most for its distance in speed.
    """
    companions = []
    for name in catalogue():
        entry = resolve(name)
        if name in fitted or entry.parts or entry.nodal == "none" or entry.species == 0:
            continue
        height = _equilibrium_height_m(name)
        rivals = [
            other
            for other in fitted
            if not resolve(other).parts
            and resolve(other).species == entry.species
            and _equilibrium_height_m(other) > height
            and synodic_period_h(name, other) > span_h / CALENDAR_YEAR_TOLERANCE
        ]
        if height >= at_least_m and rivals:
            main = max(rivals, key=lambda other: _equilibrium_height_m(other) * synodic_period_h(name, other))
            ratio = height / _equilibrium_height_m(main)
            companions.append(Companion(name, main, ratio, 0.0, "equilibrium"))
    return tuple(companions)


def reference_companions(
    names: Iterable[str], fitted: Sequence[str], reference: HarmonicConstants, *, source: str
) -> tuple[Companion, ...]:
    """Companions by the constants of a reference gauge.

    Parameters
    ----------
    names : iterable of str
        Constituents to infer.
    fitted : sequence of str
        Constituents that will be fitted.
    reference : HarmonicConstants
        Constants of a gauge whose tide is like this one's.
    source : str
        Its name, for the record.

    Returns
    -------
    tuple of Companion
        Each related to the nearest in speed of the fitted constituents of its species.

    Raises
    ------
    AnalysisError
        If the reference lacks a constituent, or nothing of the species is fitted.
    """
    companions = []
    for name in names:
        entry = resolve(name)
        mains = [
            other
            for other in fitted
            if resolve(other).species == entry.species and other in reference.names and other != entry.name
        ]
        if entry.name not in reference.names or not mains:
            message = (
                f"cannot infer {entry.name} from {source}: the reference must have it and a fitted "
                "constituent of its species; leave it out or take another reference"
            )
            raise AnalysisError(message)
        speed = entry.speed_deg_per_h
        main = min(mains, key=lambda other: abs(resolve(other).speed_deg_per_h - speed))
        pair = reference.select((entry.name, main))
        ratio = float(pair.amplitude_m[0] / pair.amplitude_m[1])
        difference = float(pair.phase_lag_deg[0] - pair.phase_lag_deg[1])
        companions.append(Companion(entry.name, main, ratio, difference, source))
    return tuple(companions)


def companions_from(
    reference: HarmonicConstants, fitted: Sequence[str], span_h: float, *, source: str
) -> tuple[Companion, ...]:
    """Companions that a record needs, by a reference gauge where it has them and by the equilibrium tide elsewhere.

    Parameters
    ----------
    reference : HarmonicConstants
        Constants of a gauge whose tide is like this one's.
    fitted : sequence of str
        Constituents that will be fitted.
    span_h : float
        Length of the record. [hours]
    source : str
        The reference's name, for the record.

    Returns
    -------
    tuple of Companion
        The same constituents as `equilibrium_companions` gives.
    """
    companions: list[Companion] = []
    for companion in equilibrium_companions(fitted, span_h):
        if {companion.name, companion.from_name} <= set(reference.names):
            companions += reference_companions([companion.name], [companion.from_name], reference, source=source)
        else:
            companions.append(companion)
    return tuple(companions)
