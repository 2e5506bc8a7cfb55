"""Datums that are sums of constants, and what kind of tide the constants make."""

from __future__ import annotations

import numpy as np

from tidekit.constituents.constants import HarmonicConstants

SUMS: dict[str, dict[str, int]] = {
    "MHWS": {"M2": 1, "S2": 1},
    "MHWN": {"M2": 1, "S2": -1},
    "MLWN": {"M2": -1, "S2": 1},
    "MLWS": {"M2": -1, "S2": -1},
    "ISLW": {"M2": -1, "S2": -1, "K1": -1, "O1": -1},
}
"""Amplitudes added to the mean level for each datum.

Springs and neaps: Pugh, D. T., "Tides, Surges and Mean Sea-Level", Wiley, 1987 (from memory). Indian spring low
water: Darwin's, as in the NOS glossary (from memory).
"""

MIXTURES: dict[str, dict[str, float]] = {
    "MTL": {"MHW": 0.5, "MLW": 0.5},
    "DTL": {"MHHW": 0.5, "MLLW": 0.5},
    "GT": {"MHHW": 1.0, "MLLW": -1.0},
    "MN": {"MHW": 1.0, "MLW": -1.0},
    "DHQ": {"MHHW": 1.0, "MHW": -1.0},
    "DLQ": {"MLW": 1.0, "MLLW": -1.0},
}
"""What is made of the four mean waters: mean and diurnal tide level, great diurnal and mean range, diurnal high and
low water inequality. NOAA/NOS datum options (MTL, DTL, GT); the others from memory."""

TIDE_TYPES = (
    (0.25, "semidiurnal"),
    (1.5, "mixed, mainly semidiurnal"),
    (3.0, "mixed, mainly diurnal"),
    (np.inf, "diurnal"),
)
"""Upper bound of the form number of each type. Courtier, A., "Marees", Service hydrographique de la marine, Paris,
1938; Defant, A., "Physical Oceanography", Pergamon, 1961 (from memory)."""


def datum_of_constants(constants: HarmonicConstants, name: str) -> tuple[float, float] | None:
    """Height of a datum that is a sum of constants.

    Parameters
    ----------
    constants : HarmonicConstants
        Of the gauge.
    name : str
        A key of `SUMS`.

    Returns
    -------
    height_m, height_sd_m : float
        Above the constants' vertical reference; the errors of its terms taken as independent. None where a
        constituent is lacking. [m]
    """
    terms = SUMS[name]
    if not set(terms) <= set(constants.names):
        return None
    chosen = constants.select(tuple(terms))
    height = constants.mean_level_m + float(np.dot(list(terms.values()), chosen.amplitude_m))
    variance = constants.mean_level_sd_m**2 + float(np.sum(chosen.amplitude_sd_m**2))
    return height, float(np.sqrt(variance))


def sum_in_words(name: str) -> str:
    """Formula of a datum of `SUMS`, for people.

    Examples
    --------
    >>> sum_in_words("MHWN")
    'Z0 + M2 - S2'
    """
    return "Z0" + "".join(f" {'+' if sign > 0 else '-'} {term}" for term, sign in SUMS[name].items())


def mixture_in_words(name: str) -> str:
    """Make-up of a row of `MIXTURES`, for people.

    Examples
    --------
    >>> mixture_in_words("MTL"), mixture_in_words("GT")
    ('half of MHW + MLW', 'MHHW - MLLW')
    """
    parts = MIXTURES[name]
    sum_ = "".join(f" {'+' if factor > 0 else '-'} {part}" for part, factor in parts.items())
    halved = all(abs(factor) == 0.5 for factor in parts.values())
    return ("half of " if halved else "") + sum_.removeprefix(" + ")


def form_number(constants: HarmonicConstants) -> float:
    """Form number (K1 + O1) / (M2 + S2); a constituent that is lacking counts as none, NaN without any.

    Parameters
    ----------
    constants : HarmonicConstants
        Of the gauge.

    Returns
    -------
    float
        Dimensionless; infinite for a purely diurnal tide.
    """
    amplitude = dict(zip(constants.names, constants.amplitude_m, strict=True))
    diurnal = amplitude.get("K1", 0.0) + amplitude.get("O1", 0.0)
    semidiurnal = amplitude.get("M2", 0.0) + amplitude.get("S2", 0.0)
    if semidiurnal == 0.0:
        return float("inf") if diurnal > 0.0 else float("nan")
    return float(diurnal / semidiurnal)


def tide_type(number: float) -> str:
    """Type of tide by its form number.

    Parameters
    ----------
    number : float
        Form number.

    Returns
    -------
    str
        ``semidiurnal`` ... ``diurnal``, or ``unknown`` for NaN.
    """
    if np.isnan(number):
        return "unknown"
    return next(name for bound, name in TIDE_TYPES if number <= bound)
