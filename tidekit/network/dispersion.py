"""Whether constituents travel at one speed: a boundary wave on a flat bottom has no dispersion."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import scipy.stats
from numpy.typing import NDArray

from tidekit.network.agreement import Prior, Scatter
from tidekit.network.delays import Delay
from tidekit.network.gauges import TideArrays
from tidekit.network.lines import delay_design, unexplained_deg
from tidekit.network.robust_line import plain_fit

Float = NDArray[np.float64]

DISPERSION_LEVEL = 0.01
"""Probability below which speeds differ between constituents."""
_PHASE_SCATTER = Scatter(floor=0.05, below=1.0, above=1.0, reach=180.0, usual=0.5)
"""Of a constituent's phase between places [degrees], beyond what its gauge has in common; only the floor is used."""
_LOOSE = 1e4
"""Standard deviation of coefficients about which nothing is known. [degrees, h, h per 1000 km]"""


@dataclass(frozen=True)
class Dispersion:
    """Differences of speed between constituents."""

    p: float
    """Probability of differences this large, were there none; NaN where they cannot be tested."""
    spread: float
    """Largest difference of slowness that is certain, over the slowness of all: 0 where none is."""
    name: str
    """The constituent that differs so."""


UNTESTED = Dispersion(float("nan"), 0.0, "")
"""Of a network whose speeds cannot be compared."""


def dispersion(
    tides: TideArrays, delays: tuple[Delay, ...], used: NDArray[np.bool_], slowness_h_per_km: float
) -> Dispersion:
    """Test whether constituents differ in speed.

    Parameters
    ----------
    tides : TideArrays
        n gauges by k constituents.
    delays : tuple of Delay
        Joint delay of each gauge.
    used : ndarray of bool, shape (n,)
        Gauges that agree on one wave.
    slowness_h_per_km : float
        Of all constituents together. [hours per km]

    Returns
    -------
    Dispersion
        Untested with fewer than three gauges or two constituents.

    Notes
    -----
    What a gauge's place or clock adds to the delay is common to its constituents and says nothing of dispersion. So
    phases are fitted with a level a constituent, a delay a gauge, and a slope along the coast a constituent, taken
    from that of the strongest; a Wald test asks whether those slopes vanish together.
    """
    count, width = int(used.sum()), len(tides.names)
    if count < 3 or width < 2:
        return UNTESTED
    strongest = int(np.argmax(np.median(tides.amplitude_m, axis=0)))
    others = np.delete(np.arange(width), strongest)
    speeds, along = tides.speeds_deg_per_h, 1e-3 * delay_design(tides.along_km)[used, 1]
    gauge, constituent = (part.ravel() for part in np.indices((count, width)))
    levels = np.eye(width)[constituent]
    places = np.eye(count)[gauge][:, 1:] * speeds[constituent][:, None]
    slopes = levels[:, others] * (speeds[constituent] * along[gauge])[:, None]
    design = np.hstack([levels, places, slopes])
    fit = plain_fit(
        design,
        unexplained_deg(tides, delays)[used].ravel(),
        tides.lag_sd_deg[used].ravel(),
        np.ones(count * width, dtype=np.bool_),
        scatter=_PHASE_SCATTER,
        prior=Prior(mean=np.zeros(design.shape[1]), sd=np.full(design.shape[1], _LOOSE)),
    )
    difference, covariance = fit.coefficients[1 - width :], fit.covariance[1 - width :, 1 - width :]
    wald = float(difference @ np.linalg.solve(covariance, difference)) / (width - 1)
    certain = fit.reach(1.0 - DISPERSION_LEVEL / (width - 1)) * np.sqrt(np.diag(covariance))
    sizes = np.where(np.abs(difference) > certain, np.abs(difference) / 1e3 / abs(slowness_h_per_km), 0.0)
    largest = int(np.argmax(sizes))
    p = float(scipy.stats.f.sf(wald, width - 1, fit.freedom))
    return Dispersion(p, float(sizes[largest]), tides.names[others[largest]])
