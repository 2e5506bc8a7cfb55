"""Write a record so that others, and this reader, read the same one: CSV, Parquet, CF NetCDF."""

from __future__ import annotations

import importlib
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from tidekit.errors import InputError
from tidekit.files import replacing, write_text
from tidekit.records.as_text import IOC_FLAGS
from tidekit.records.record import GaugeRecord


def write_record(record: GaugeRecord, path: str | Path) -> None:
    """Write a record, whole or not at all.

    Parameters
    ----------
    record : GaugeRecord
        The record.
    path : path-like
        ``.csv``, ``.parquet`` (extra `parquet`) or ``.nc`` (CF NetCDF, extra `netcdf`).

    Raises
    ------
    InputError
        If the suffix is another, the extra is not installed, or the file cannot be written.
    """
    path = Path(path)
    writer = WRITERS.get(path.suffix.lower())
    if writer is None:
        message = f"wanted a name that ends with {', '.join(WRITERS)}"
        raise InputError(message, path=path)
    try:
        writer(record, path)
    except ImportError as error:
        message = f"install tidekit[{'netcdf' if path.suffix.lower() == '.nc' else 'parquet'}] to write this"
        raise InputError(message, path=path) from error


def _frame(record: GaugeRecord) -> pd.DataFrame:
    return pd.DataFrame(
        {"time_utc": record.heights.index, "height_m": record.heights.to_numpy(), IOC_FLAGS: record.flags.to_numpy()}
    )


def _plain_times(record: GaugeRecord) -> NDArray[np.datetime64]:
    """UTC without a zone."""
    index = pd.DatetimeIndex(record.heights.index).tz_localize(None)
    return index.to_numpy().astype("datetime64[us]")


def _about(record: GaugeRecord) -> dict[str, str]:
    """What else is known of the record, by the words of its files."""
    station = record.station
    known = {
        "gauge": station.id,
        "name": station.name,
        "latitude": "" if station.latitude_deg is None else f"{station.latitude_deg:g}",
        "longitude": "" if station.longitude_deg is None else f"{station.longitude_deg:g}",
        "vertical reference": station.vertical_reference or "",
    }
    return {key: " ".join(value.split()) for key, value in known.items() if value}


def _write_csv(record: GaugeRecord, path: Path) -> None:
    lines = [f"# {key}: {value}\n" for key, value in _about(record).items()]
    frame = _frame(record)
    times = _plain_times(record)
    whole = bool((times == times.astype("datetime64[s]")).all())
    frame["time_utc"] = np.datetime_as_string(times, unit="s" if whole else "us")
    frame["time_utc"] += "Z"
    write_text(path, "".join(lines) + frame.to_csv(index=False, lineterminator="\n"))


def _write_parquet(record: GaugeRecord, path: Path) -> None:
    frame = _frame(record)
    frame.attrs.update(_about(record))
    with replacing(path) as part:
        frame.to_parquet(part, index=False)


def _write_netcdf(record: GaugeRecord, path: Path) -> None:
    """CF conventions 1.11, discrete sampling geometry `timeSeries` of one station (sections 9.2 and 3.5)."""
    xarray: Any = importlib.import_module("xarray")
    station = record.station
    reference = {"comment": f"above {station.vertical_reference}"} if station.vertical_reference else {}
    height = {
        "standard_name": "water_surface_height_above_reference_datum",
        "units": "m",
        "ancillary_variables": "flag",
        **reference,
    }
    flag = {
        "standard_name": "status_flag",
        "flag_values": np.array([1, 2, 3, 4, 9], dtype=np.int8),
        "flag_meanings": "good not_evaluated suspect fail missing",
    }
    data = xarray.Dataset(
        {
            "height": ("time", record.heights.to_numpy(), height),
            "flag": ("time", record.flags.to_numpy(), flag),
            "station": ((), station.id, {"cf_role": "timeseries_id", "long_name": station.label}),
        },
        coords={"time": ("time", _plain_times(record), {"standard_name": "time"})},
        attrs={"Conventions": "CF-1.11", "featureType": "timeSeries"},
    )
    for name, value in (("latitude", station.latitude_deg), ("longitude", station.longitude_deg)):
        if value is not None:
            unit = "degrees_north" if name == "latitude" else "degrees_east"
            data.coords[name] = ((), value, {"standard_name": name, "units": unit})
    times = {"units": "microseconds since 1970-01-01 00:00:00 UTC", "dtype": "int64"}
    with replacing(path) as part:
        data.to_netcdf(part, engine="h5netcdf", encoding={"time": times, "height": {"_FillValue": np.nan}})


WRITERS: dict[str, Callable[[GaugeRecord, Path], None]] = {
    ".csv": _write_csv,
    ".parquet": _write_parquet,
    ".nc": _write_netcdf,
}
"""Writers by the suffix of the file."""
