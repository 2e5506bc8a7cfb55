"""Datums by their definitions from an observed record."""

from __future__ import annotations

import numpy as np
import pandas as pd
from numpy.typing import ArrayLike, NDArray

from tidekit.astronomy.timescales import datetime64_from_hours
from tidekit.datums.formulae import MIXTURES, mixture_in_words
from tidekit.datums.observed_tides import ObservedTides, observed_tides
from tidekit.datums.serial import BATCH_H, FEWEST_BATCHES, batch_numbers, mean_sd
from tidekit.datums.table import RANGES, DatumTable
from tidekit.errors import AnalysisError
from tidekit.prediction.tidal_day import TIDAL_DAY_H, tidal_day_edge_h, tidal_day_kinds, tidal_day_numbers
from tidekit.prediction.turning_points import TurningPoints
from tidekit.records.record import GaugeRecord

_Array = NDArray[np.float64]

NODAL_CYCLE_YEARS = 18.61
_LEVELS = ("MHHW", "MHW", "MSL", "MTL", "DTL", "MLW", "MLLW")
_IN_WORDS = {
    "MHHW": "mean of the higher high waters of the whole tidal days",
    "MHW": "mean of the high waters of the whole tidal days",
    "MSL": "mean of all heights",
    "MLW": "mean of the low waters of the whole tidal days",
    "MLLW": "mean of the lower low waters of the whole tidal days",
}
_WATERS = {"MHHW": ("HH",), "MHW": ("HH", "H"), "MLW": ("L", "LL"), "MLLW": ("LL",)}
_LEAST_BATCH_PART = 0.6
"""A month with less of its tidal days than this gives no batch of its own."""


def observed_datums(record: GaugeRecord) -> DatumTable:
    """Datums of a gauge record, over its own period.

    Parameters
    ----------
    record : GaugeRecord
        Its usable samples are taken.

    Returns
    -------
    DatumTable
        MHHW to MLLW, then the ranges and inequalities, above the record's vertical reference.

    Raises
    ------
    AnalysisError
        If the record is irregular, too coarse, or holds no whole tidal day.
    """
    return datums_of_series(
        record.times_h,
        record.heights_m,
        record.step_h,
        gauge=record.station.id,
        vertical_reference=record.station.vertical_reference,
    )


def datums_of_series(
    t_h: ArrayLike,
    height_m: ArrayLike,
    step_h: float,
    *,
    gauge: str = "",
    vertical_reference: str | None = None,
) -> DatumTable:
    """Datums of an observed series by their definitions.

    Parameters
    ----------
    t_h : array-like, shape (m,)
        Times, increasing. [UTC hours since 2000-01-01 00:00]
    height_m : array-like, shape (m,)
        Observed heights. [m]
    step_h : float
        Sampling step. [h]
    gauge : str
        Id of the gauge.
    vertical_reference : str, optional
        What the heights are measured from.

    Returns
    -------
    DatumTable
        MHHW to MLLW, then the ranges and inequalities.

    Raises
    ------
    AnalysisError
        If the series is irregular, too coarse, or holds no whole tidal day.

    Notes
    -----
    Only tidal days without a hole count. Errors come from the scatter of the means of successive synodic months,
    with their serial correlation (see `serial.mean_sd`): how far the record's mean may lie from that of a much
    longer record with the same mean sea level and the same state of the nodal cycle.

    Weather lifts the higher of two nearly equal high waters of a day and lowers the lower low water. So where the
    diurnal inequality is small beside the weather, MHHW observed lies above MHHW predicted, by a centimetre or
    two on many coasts, and MLLW below it.

    References
    ----------
    .. [1] NOAA/NOS, definitions of the tidal datums (datum options).
    """
    times = np.asarray(t_h, dtype=np.float64)
    if times.size < 2:
        message = f"{times.size} usable samples; datums need at least one whole tidal day of them"
        raise AnalysisError(message)
    tides = observed_tides(times, height_m, step_h)
    points, kinds = _of_whole_days(tides)
    waters = {name: points.where(np.isin(kinds, ranks)) for name, ranks in _WATERS.items()}
    if any(len(water) == 0 for water in waters.values()):
        message = f"no whole tidal day in {np.ptp(times):.1f} h of record; datums need at least one"
        raise AnalysisError(message)
    heights = {name: float(water.height_m.mean()) for name, water in waters.items()}
    heights["MSL"] = float(np.nanmean(tides.height_m))
    batch_t_h, batches = _batch_means(tides, waters)
    for name, parts in MIXTURES.items():
        heights[name] = sum(factor * heights[part] for part, factor in parts.items())
        batches[name] = np.sum([factor * batches[part] for part, factor in parts.items()], axis=0)
    names = (*_LEVELS, *RANGES)
    spread = mean_sd(np.stack([batches[name] for name in names], axis=1), batch_t_h)
    first, last = datetime64_from_hours(times[[0, -1]])
    days = len(waters["MHHW"]), round(float(np.ptp(times)) / TIDAL_DAY_H)
    return DatumTable(
        gauge=gauge,
        names=names,
        height_m=np.array([heights[name] for name in names]),
        height_sd_m=spread,
        methods=tuple(f"observed: {_IN_WORDS.get(name) or mixture_in_words(name)}" for name in names),
        vertical_reference=vertical_reference,
        first_time=pd.Timestamp(first, tz="UTC"),
        last_time=pd.Timestamp(last, tz="UTC"),
        details={"tidal_days": days[0], "months": len(batches["MSL"])},
        notes=_notes(float(np.ptp(times)), days, len(batches["MSL"])),
    )


def _of_whole_days(tides: ObservedTides) -> tuple[TurningPoints, NDArray[np.str_]]:
    """Waters of the tidal days that have no hole, and their ranks."""
    points = tides.points
    kinds = tidal_day_kinds(points)
    inside = np.zeros(len(points), dtype=np.bool_)
    for high in (True, False):
        same = points.is_high == high
        edge = tidal_day_edge_h(points.t_h[same])
        whole = _whole_days(tides, edge)
        inside |= same & np.isin(tidal_day_numbers(points.t_h, edge), whole)
    return points.where(inside), kinds[inside]


def _whole_days(tides: ObservedTides, edge_h: float) -> NDArray[np.int64]:
    """Numbers of the tidal days that the series covers without a hole."""
    step = float(tides.grid_h[1] - tides.grid_h[0])
    days, day = np.unique(tidal_day_numbers(tides.grid_h, edge_h), return_inverse=True)
    seen = np.bincount(day, weights=tides.searched)
    return np.asarray(days[(seen == np.bincount(day)) & (seen >= np.floor(TIDAL_DAY_H / step))])


def _batch_means(tides: ObservedTides, waters: dict[str, TurningPoints]) -> tuple[_Array, dict[str, _Array]]:
    """Middles of the months that are whole enough, and the means of each quantity in them, (b,) each."""
    start = float(tides.grid_h[0])
    count = int(batch_numbers(tides.grid_h[-1:], start)[0]) + 1
    finite = np.isfinite(tides.height_m)
    sources = {name: (water.t_h, water.height_m) for name, water in waters.items()}
    sources["MSL"] = tides.grid_h[finite], tides.height_m[finite]
    number, total = {}, {}
    for name, (times, heights) in sources.items():
        batch = batch_numbers(times, start)
        number[name] = np.bincount(batch, minlength=count)
        total[name] = np.bincount(batch, weights=heights, minlength=count)
    enough = np.minimum(number["MHHW"], number["MLLW"]) >= _LEAST_BATCH_PART * BATCH_H / TIDAL_DAY_H
    middle = np.asarray(start + BATCH_H * (np.flatnonzero(enough) + 0.5), dtype=np.float64)
    return middle, {name: total[name][enough] / number[name][enough] for name in sources}


def _notes(span_h: float, days: tuple[int, int], months: int) -> tuple[str, ...]:
    years = span_h / 8765.82
    notes = [f"{days[0]} of {days[1]} tidal days are without a hole and count"]
    if years < NODAL_CYCLE_YEARS:
        notes.append(
            f"{years:.1f} years of an {NODAL_CYCLE_YEARS} year nodal cycle: the levels of this period, not reduced "
            "to an epoch"
        )
    if months < FEWEST_BATCHES:
        notes.append(f"no errors: they need {FEWEST_BATCHES} months, the record has {months} whole enough")
    return tuple(notes)
