"""Workbooks, Parquet and CF NetCDF as the comma-parted text that the reader knows: one way in for every export."""

from __future__ import annotations

import importlib
import math
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd

from tidekit.errors import RecordError

IOC_FLAGS = "ioc_quality_flag"
"""Name of a column of quality flags 1 2 3 4 9 (IOC Manuals and Guides 54, volume 3)."""
_MEANINGS = "good not_evaluated suspect fail missing"
EXTRAS = {"workbook": "excel", "parquet": "parquet", "netcdf": "netcdf"}
"""The extra of the installation that reads each packing."""


def packing_of(start: bytes, suffix: str) -> str | None:
    """Tell a table file by its first bytes; None for text and archives."""
    if start == b"PAR1":
        return "parquet"
    if start == b"\x89HDF" or start[:3] == b"CDF":
        return "netcdf"
    return "workbook" if start == b"PK\x03\x04" and suffix.lower() in (".xlsx", ".xlsm") else None


def as_text(path: Path, packing: str) -> bytes:
    """Read a table file whole.

    Parameters
    ----------
    path : Path
        The file.
    packing : str
        What it is, of `EXTRAS`.

    Returns
    -------
    bytes
        Lines of text: names with their units, then a row each, times in ISO 8601.

    Raises
    ------
    RecordError
        If the file is damaged, holds no table of one gauge, or the extra that reads it is not installed.
    """
    readers: dict[str, Callable[[Path], pd.DataFrame]] = {
        "workbook": _workbook,
        "parquet": _parquet,
        "netcdf": _netcdf,
    }
    try:
        frame = readers[packing](path)
    except ImportError as error:
        message = f"this is a {packing} file; install tidekit[{EXTRAS[packing]}] to read it, or save it as CSV"
        raise RecordError(message, path=path) from error
    except RecordError:
        raise
    except Exception as error:  # readers of binary files raise whatever their decoders do
        told = " ".join(f"{type(error).__name__}: {error}".split())
        message = f"this {packing} file cannot be read ({told}); save it as CSV"
        raise RecordError(message, path=path) from error
    header = packing != "workbook"
    text: str = frame.to_csv(index=False, header=header, lineterminator="\n", na_rep="")
    return text.encode("utf-8")


def _workbook(path: Path) -> pd.DataFrame:
    """First sheet, cell by cell."""
    return pd.read_excel(path, header=None, dtype=object).map(_cell)


def _cell(value: object) -> object:
    return "" if value is pd.NaT or (isinstance(value, float) and math.isnan(value)) else value


def _parquet(path: Path) -> pd.DataFrame:
    frame = pd.read_parquet(path)
    if not isinstance(frame.index, pd.RangeIndex):
        frame = frame.reset_index()
    for name in frame.columns:
        if isinstance(frame[name].dtype, pd.DatetimeTZDtype):
            frame[name] = _stamps(frame[name].dt.tz_convert("UTC").dt.tz_localize(None))
    return frame


def _stamps(times: pd.Series) -> pd.Series:
    """UTC times as text that carries its offset."""
    return pd.Series(np.datetime_as_string(times.to_numpy().astype("datetime64[us]"), unit="us"), times.index) + "Z"


def _netcdf(path: Path) -> pd.DataFrame:
    """Variables along time, named by standard name and unit. CF takes times for UTC."""
    xarray: Any = importlib.import_module("xarray")
    with xarray.open_dataset(path, mask_and_scale=True) as data:
        times = [name for name in data.variables if data[name].dtype.kind == "M" and data[name].ndim == 1]
        if len(times) != 1:
            message = f"wanted one variable of times, found {len(times)}; save one gauge as CSV"
            raise RecordError(message, path=path)
        along = data[times[0]].dims
        frame = pd.DataFrame({"time": _stamps(pd.Series(data[times[0]].to_numpy()))})
        for name in data.variables:
            variable = data[name]
            if name != times[0] and variable.squeeze().dims == along and variable.dtype.kind in "iuf":
                frame[_label(str(name), dict(variable.attrs))] = variable.squeeze().to_numpy()
    return frame


def _label(name: str, attributes: dict[str, Any]) -> str:
    if attributes.get("flag_meanings") == _MEANINGS:
        return IOC_FLAGS
    unit = attributes.get("units")
    standard = attributes.get("standard_name", "")
    return f"{standard} {name}".strip() + (f" ({unit})" if unit else "")
