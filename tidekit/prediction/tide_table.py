"""Tide tables: high and low waters of a period, in a stated time zone, above a stated reference."""

from __future__ import annotations

from datetime import tzinfo

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from tidekit.astronomy.timescales import datetime64_from_hours, hours_from_datetime64
from tidekit.constituents.constants import HarmonicConstants
from tidekit.prediction.picking import pick_tides
from tidekit.prediction.tidal_day import tidal_day_kinds
from tidekit.prediction.turning_points import TurningPoints, check_period, turning_points

COLUMNS = ("time", "height_m", "kind")


def tide_table(
    constants: HarmonicConstants, start_h: float, end_h: float, *, time_zone: str | tzinfo = "UTC"
) -> pd.DataFrame:
    """Tabulate the high and low waters of a period.

    Parameters
    ----------
    constants : HarmonicConstants
        What to predict from.
    start_h, end_h : float
        The period, the end not included. [UTC hours since 2000-01-01 00:00]
    time_zone : str or tzinfo
        Time zone of the printed times; a string is a name of the IANA database.

    Returns
    -------
    DataFrame
        Columns `COLUMNS`, a row each water: local time to the minute with its offset from UTC, height above
        the constants' vertical reference [m], and ``HH``, ``H``, ``L`` or ``LL``.

    Raises
    ------
    AnalysisError
        If the period does not end after its start.

    Notes
    -----
    Waters are picked and ranked over whole calendar years (UTC) that hold the period, so that a water has the
    same rank in the table of a week as in that of its year.
    """
    points, kinds = ranked_tides(constants, start_h, end_h)
    # Rounded while still in UTC, where every minute exists once.
    times = pd.DatetimeIndex(datetime64_from_hours(points.t_h)).round("min").tz_localize("UTC")
    return pd.DataFrame(
        {"time": times.tz_convert(time_zone), "height_m": points.height_m, "kind": kinds}, columns=list(COLUMNS)
    )


def ranked_tides(constants: HarmonicConstants, start_h: float, end_h: float) -> tuple[TurningPoints, NDArray[np.str_]]:
    """Find the high and low waters of a period that count as tides, and their ranks in their tidal days.

    Parameters
    ----------
    constants : HarmonicConstants
        What to predict from.
    start_h, end_h : float
        The period, the end not included. [UTC hours since 2000-01-01 00:00]

    Returns
    -------
    points : TurningPoints, of length n
        The waters.
    kinds : ndarray of str, shape (n,)
        ``HH``, ``H``, ``L`` or ``LL`` each.

    Raises
    ------
    AnalysisError
        If the period does not end after its start.
    """
    check_period(start_h, end_h)
    years = datetime64_from_hours(np.array([start_h, end_h])).astype("datetime64[Y]") + np.array([0, 1])
    first, last = hours_from_datetime64(years.astype("datetime64[us]"))
    points = pick_tides(turning_points(constants, float(first), float(last)))
    inside = (points.t_h >= start_h) & (points.t_h < end_h)
    return points.where(inside), tidal_day_kinds(points)[inside]
