"""Datums predicted from harmonic constants over a nodal cycle, with the errors of the constants carried through."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from tidekit.astronomy.timescales import datetime64_from_hours, hours_from_datetime64
from tidekit.constituents.constants import HarmonicConstants
from tidekit.datums.formulae import (
    MIXTURES,
    SUMS,
    datum_of_constants,
    form_number,
    mixture_in_words,
    sum_in_words,
    tide_type,
)
from tidekit.datums.table import RANGES, DatumTable
from tidekit.errors import AnalysisError
from tidekit.prediction.blocks import equal_blocks
from tidekit.prediction.tide_table import ranked_tides
from tidekit.prediction.turning_points import TurningPoints

_Array = NDArray[np.float64]
_Strings = NDArray[np.str_]

EPOCH_YEARS = (1983, 2001)
"""First and last calendar year by default: the 19 years of the National Tidal Datum Epoch of the United States, so that
levels compare with published ones. Any 19 years hold one nodal cycle (18.61 years); mean levels of two choices
differ by millimetres, HAT and LAT by a few centimetres."""
NODAL_CYCLE_YEARS = 19

_LEVELS = ("HAT", "MHHW", "MHWS", "MHW", "MHWN", "MSL", "MTL", "DTL", "MLWN", "MLW", "MLWS", "MLLW", "ISLW", "LAT")
_FORMULA = "sum of constants"
_WATERS = {"MHHW": ("HH",), "MHW": ("HH", "H"), "MLW": ("L", "LL"), "MLLW": ("LL",)}
_IN_WORDS = {
    "HAT": "highest predicted high water",
    "LAT": "lowest predicted low water",
    "MHHW": "mean of the higher high waters of the tidal days",
    "MHW": "mean of all high waters",
    "MLW": "mean of all low waters",
    "MLLW": "mean of the lower low waters of the tidal days",
}
_POINTS_AT_ONCE = 8192


def predicted_datums(
    constants: HarmonicConstants, *, gauge: str = "", years: tuple[int, int] = EPOCH_YEARS
) -> DatumTable:
    """Datums of the predicted tide.

    Parameters
    ----------
    constants : HarmonicConstants
        Of the gauge.
    gauge : str
        Its id.
    years : tuple of int
        First and last calendar year (UTC) of the prediction.

    Returns
    -------
    DatumTable
        HAT to LAT, then the ranges and inequalities. Waters are picked by the trade's rule. `details` holds
        the form number, the type of tide and the times of HAT and LAT.

    Raises
    ------
    AnalysisError
        If the years run backwards, or the constants make no tide.

    Notes
    -----
    Errors are those of the constants, carried through to first order and taken as independent between
    constants. A turning point's height changes with a constant as the height at its time does, since the rate
    is zero there; so the gradient of a mean of waters is the mean of the gradients at their times, and that of
    HAT the gradient at its time. HAT and LAT are extremes of a tide that is itself uncertain: they lean outward
    by less than the error given. The weather, the record's own period and the trend of sea level are not in it.

    References
    ----------
    .. [1] IHO Resolution 3/1919 as amended: LAT and HAT over at least 19 years of predictions.
    .. [2] NOAA/NOS, definitions of the tidal datums (datum options).
    """
    start, end = _period(years)
    points, kinds = ranked_tides(constants, start, end)
    if not (points.is_high.any() and (~points.is_high).any()):
        message = "these constants make no high and low waters; datums need a tide of more than 0.03 m"
        raise AnalysisError(message)
    weights = _weights(points, kinds)
    heights = {name: float(weight @ points.height_m) for name, weight in weights.items()}
    gradients = _gradients(constants, points, weights, (start, end))
    for name, parts in MIXTURES.items():
        heights[name] = sum(factor * heights[part] for part, factor in parts.items())
        gradients[name] = np.sum([factor * gradients[part] for part, factor in parts.items()], axis=0)
    spread = _spread_of_parameters(constants)
    rows = {n: (heights[n], float(np.linalg.norm(gradients[n] * spread)), _method(n, years)) for n in heights}
    rows["MSL"] = (constants.mean_level_m, constants.mean_level_sd_m, "mean level Z0 of the constants")
    for name in SUMS:
        found = datum_of_constants(constants, name)
        if found is not None:
            rows[name] = (*found, f"{_FORMULA}: {sum_in_words(name)}")
    return _table(rows, constants, gauge, years, points)


def _period(years: tuple[int, int]) -> tuple[float, float]:
    first, last = years
    if last < first:
        message = f"the years run from {first} to {last}; name the earlier first"
        raise AnalysisError(message)
    turns = np.array([f"{first:04d}-01-01", f"{last + 1:04d}-01-01"], dtype="datetime64[us]")
    start, end = hours_from_datetime64(turns)
    return float(start), float(end)


def _weights(points: TurningPoints, kinds: _Strings) -> dict[str, _Array]:
    """Weight of each water (n,) in each datum that is a mean, or the extreme, of waters."""
    weights = {name: np.isin(kinds, ranks).astype(np.float64) for name, ranks in _WATERS.items()}
    weights = {name: weight / weight.sum() for name, weight in weights.items()}
    for name, place in (("HAT", np.argmax(points.height_m)), ("LAT", np.argmin(points.height_m))):
        weights[name] = np.zeros(len(points))
        weights[name][place] = 1.0
    return weights


def _gradients(
    constants: HarmonicConstants,
    points: TurningPoints,
    weights: Mapping[str, _Array],
    period_h: tuple[float, float],
) -> dict[str, _Array]:
    """Derivatives of each datum by mean level, k amplitudes [1] and k phase lags [m/degree]: (1 + 2k,)."""
    blocks = equal_blocks(constants, *period_h)
    stacked = np.stack(list(weights.values()))
    terms = np.zeros((len(stacked), len(blocks.names)), dtype=np.complex128)
    for begin in range(0, len(points), _POINTS_AT_ONCE):
        part = slice(begin, begin + _POINTS_AT_ONCE)
        terms += stacked[:, part] @ blocks.terms(points.t_h[part])
    used = constants.select(blocks.names)
    by_level = np.ones((len(stacked), 1))
    rows = np.hstack([by_level, terms.real / used.amplitude_m, np.deg2rad(terms.imag)])
    return dict(zip(weights, rows, strict=True))


def _spread_of_parameters(constants: HarmonicConstants) -> _Array:
    """Standard deviations of mean level, amplitudes and phase lags; what is unknown counts only if all are.

    A constituent lost in the noise has no error of its phase lag; its phasor is as uncertain across as along.
    """
    used = constants.select([n for n, a in zip(constants.names, constants.amplitude_m, strict=True) if a > 0.0])
    across_deg = np.rad2deg(used.amplitude_sd_m / used.amplitude_m)
    lag = np.where(np.isnan(used.phase_lag_sd_deg), across_deg, used.phase_lag_sd_deg)
    spread = np.concatenate([[used.mean_level_sd_m], used.amplitude_sd_m, lag])
    return spread if np.all(np.isnan(spread)) else np.nan_to_num(spread)


def _method(name: str, years: tuple[int, int]) -> str:
    return f"predicted {years[0]}-{years[1]}: {_IN_WORDS.get(name) or mixture_in_words(name)}"


def _table(
    rows: dict[str, tuple[float, float, str]],
    constants: HarmonicConstants,
    gauge: str,
    years: tuple[int, int],
    points: TurningPoints,
) -> DatumTable:
    names = tuple(name for name in (*_LEVELS, *RANGES) if name in rows)
    number = form_number(constants)
    when = datetime64_from_hours(points.t_h)
    first, last = (pd.Timestamp(f"{year}-01-01", tz="UTC") for year in (years[0], years[1] + 1))
    return DatumTable(
        gauge=gauge,
        names=names,
        height_m=np.array([rows[name][0] for name in names]),
        height_sd_m=np.array([rows[name][1] for name in names]),
        methods=tuple(rows[name][2] for name in names),
        vertical_reference=constants.vertical_reference,
        first_time=first,
        last_time=last,
        details={
            "form_number": number,
            "tide_type": tide_type(number),
            "hat_time": str(np.datetime_as_string(when[np.argmax(points.height_m)], unit="m")) + "Z",
            "lat_time": str(np.datetime_as_string(when[np.argmin(points.height_m)], unit="m")) + "Z",
        },
        notes=_notes(constants, years, number),
    )


def _notes(constants: HarmonicConstants, years: tuple[int, int], number: float) -> tuple[str, ...]:
    notes = []
    count = years[1] - years[0] + 1
    if count < NODAL_CYCLE_YEARS:
        notes.append(f"{count} years are less than a nodal cycle; HAT and LAT need {NODAL_CYCLE_YEARS}")
    if number > 1.5:
        notes.append("springs and neaps of M2 and S2 say little about a tide that is mainly diurnal")
    known = np.isfinite(constants.amplitude_sd_m)
    lacking = [n for n, good in zip(constants.names, known, strict=True) if not good]
    if not known.any():
        notes.append("no errors: the constants come without standard deviations")
    elif lacking:
        notes.append(f"errors leave out those of {', '.join(lacking)}, which have none")
    if known.any() and not np.isfinite(constants.mean_level_sd_m):
        notes.append("errors leave out that of the mean level, which has none")
    if not {"Sa", "Ssa"} & set(constants.names):
        notes.append("the constants have no seasonal constituents (Sa, Ssa), which move HAT and LAT")
    return tuple(notes)
