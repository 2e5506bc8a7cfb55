"""A row a gauge: what was read, how well the tide explains it, and what is wrong."""

from __future__ import annotations

import numpy as np
import pandas as pd

from tidekit.astronomy.timescales import datetime64_from_hours
from tidekit.audit.result import Audit, GaugeAudit

Row = dict[str, str | float | bool | None]


def gauges_table(audit: Audit) -> pd.DataFrame:
    """Tabulate the gauges of an audit.

    Parameters
    ----------
    audit : Audit
        The run.

    Returns
    -------
    DataFrame
        One row a gauge: its place, its record (`coverage` is the part of its span that has usable samples), amplitude
        and phase lag of M2, standard deviation of the non-tidal residual, form number, and the kinds of its errors.
        What a gauge does not have is NaN or None.
    """
    return pd.DataFrame([_row(gauge, audit) for gauge in audit.gauges])


def _row(gauge: GaugeAudit, audit: Audit) -> Row:
    station = gauge.station
    details = {key: value for table in gauge.datums for key, value in table.details.items()}
    used = dict(zip(audit.measure.propagation.tides.ids, audit.measure.propagation.used, strict=True))
    return {
        "gauge": station.id,
        "name": station.label,
        "latitude_deg": station.latitude_deg,
        "longitude_deg": station.longitude_deg,
        "along_coast_km": station.along_coast_km,
        "offshore_km": station.offshore_km,
        "open_coast": station.open_coast,
        "in_wave_fit": station.id in used,
        "agrees_with_wave": bool(used.get(station.id, False)),
        **_record(gauge),
        **_m2(gauge),
        "residual_sd_m": float("nan") if gauge.fit is None else float(np.std(gauge.fit.residual_m)),
        "form_number": details.get("form_number", float("nan")),
        "tide_type": details.get("tide_type"),
        "errors": " ".join(audit.errors_of(station.id)),
    }


def _record(gauge: GaugeAudit) -> Row:
    if gauge.record is None or len(gauge.record.times_h) < 2:
        return {"first_utc": None, "last_utc": None, "samples": 0, "coverage": float("nan")}
    times, step = gauge.record.times_h, gauge.record.step_h
    first, last = (str(time)[:16] + "Z" for time in datetime64_from_hours(times[[0, -1]]))
    share = min(len(times) * step / (times[-1] - times[0] + step), 1.0)
    return {"first_utc": first, "last_utc": last, "samples": len(times), "coverage": float(share)}


def _m2(gauge: GaugeAudit) -> Row:
    constants = gauge.constants
    if constants is None or "M2" not in constants.names:
        return {"m2_amplitude_m": float("nan"), "m2_phase_lag_deg": float("nan")}
    row = constants.names.index("M2")
    return {
        "m2_amplitude_m": float(constants.amplitude_m[row]),
        "m2_phase_lag_deg": float(constants.phase_lag_deg[row]),
    }
