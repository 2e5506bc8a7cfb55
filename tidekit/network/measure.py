"""One call from gauges and a coast to the wave and the gauges that break it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from tidekit.network.coast import CoastTheory, coast_bearing_deg, coast_theory
from tidekit.network.faults import gauge_faults
from tidekit.network.fingerprints import Fingerprint, fingerprints
from tidekit.network.fitting import fit_propagation
from tidekit.network.gauges import GaugeTide, tide_arrays
from tidekit.network.propagation import PropagationFit
from tidekit.quality.findings import Finding
from tidekit.records.network import AuditSettings, CoastSpec


@dataclass(frozen=True, eq=False, kw_only=True)
class NetworkMeasure:
    """What a network's constants say together."""

    propagation: PropagationFit
    """The wave along and across the coast."""
    theory: CoastTheory | None
    """The coast's Kelvin wave."""
    fingerprints: tuple[Fingerprint, ...]
    """Each gauge against the others."""
    findings: tuple[Finding, ...]
    """Faults of single gauges."""


def measure_network(gauges: Sequence[GaugeTide], coast: CoastSpec, settings: AuditSettings) -> NetworkMeasure:
    """Measure the wave of a network and judge each gauge by it.

    Parameters
    ----------
    gauges : sequence of GaugeTide
        All gauges with their constants; only open-coast gauges with a position enter.
    coast : CoastSpec
        Side of the land and depths.
    settings : AuditSettings
        Confidence and thresholds.

    Returns
    -------
    NetworkMeasure
        Its verdict is `undetermined` where there are too few gauges to tell.
    """
    stations = [gauge.station for gauge in gauges if gauge.in_fit]
    theory = coast_theory(coast, stations)
    bearing_deg = coast_bearing_deg(stations)
    fit = fit_propagation(tide_arrays(gauges), theory, bearing_deg=bearing_deg, confidence=settings.confidence)
    prints = fingerprints(fit)
    return NetworkMeasure(propagation=fit, theory=theory, fingerprints=prints, findings=gauge_faults(prints, settings))
