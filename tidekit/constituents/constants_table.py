"""Tables of harmonic constants as CSV files: written whole, read back to the same constants."""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np
import pandas as pd

from tidekit.constituents.catalogue import resolve
from tidekit.constituents.constants import HarmonicConstants, NodalConvention
from tidekit.errors import ConstituentError, InputError
from tidekit.files import write_text

MEAN_LEVEL = "Z0"
"""The trade's name for the mean level as a constituent of speed zero."""

COLUMNS = (
    "gauge",
    "constituent",
    "speed_deg_per_h",
    "amplitude_m",
    "amplitude_sd_m",
    "phase_lag_deg",
    "phase_lag_sd_deg",
    "basis",
    "makeup",
    "nodal",
    "vertical_reference",
)
_GAUGE_COLUMNS = ("gauge", "station_id")
_LAG_COLUMNS = ("phase_lag_deg", "phase_lag_deg_utc")
_SPEED_TOLERANCE_DEG_PER_H = 1e-5
"""Published speeds are rounded to 1e-7 and differ by epoch; a wrong constituent is off by 1e-3 or more."""


def constants_frame(constants: HarmonicConstants, gauge: str) -> pd.DataFrame:
    """Table of a gauge's constants, the mean level first as Z0.

    Parameters
    ----------
    constants : HarmonicConstants
        What to tabulate.
    gauge : str
        Id for the first column.

    Returns
    -------
    DataFrame
        Columns `COLUMNS`, a row each constituent. Z0 has a phase lag of 180 degrees where the mean is negative.
    """
    mean = constants.mean_level_m
    level = pd.DataFrame(
        {
            "constituent": [MEAN_LEVEL],
            "speed_deg_per_h": [0.0],
            "amplitude_m": [abs(mean)],
            "amplitude_sd_m": [constants.mean_level_sd_m],
            "phase_lag_deg": [180.0 if mean < 0 else 0.0],
            "phase_lag_sd_deg": [0.0],
            "basis": ["fitted" if "fitted" in constants.basis else "published"],
        }
    )
    frame = pd.concat([level, constants.to_frame()], ignore_index=True)
    frame.insert(0, "gauge", gauge)
    frame["makeup"] = ["", *(resolve(name).makeup for name in constants.names)]
    return frame.assign(nodal=constants.nodal, vertical_reference=constants.vertical_reference or "")


def write_constants(constants: HarmonicConstants, path: str | Path, *, gauge: str = "") -> None:
    """Write a gauge's constants as CSV.

    Parameters
    ----------
    constants : HarmonicConstants
        What to write.
    path : path-like
        The file; replaced whole.
    gauge : str
        Id for the first column.

    Raises
    ------
    InputError
        If the file cannot be written.
    """
    write_text(path, constants_frame(constants, gauge).to_csv(index=False, lineterminator="\n"))


def read_constants(
    path: str | Path,
    *,
    gauge: str | None = None,
    nodal: NodalConvention | None = None,
    any_single: bool = False,
) -> HarmonicConstants:
    """Read one gauge's constants from a CSV table.

    Parameters
    ----------
    path : path-like
        Needs the columns `constituent`, `amplitude_m` and `phase_lag_deg` (or `phase_lag_deg_utc`); others
        of `COLUMNS` are used where present. Lines that begin with ``#`` are comments.
    gauge : str, optional
        Which gauge's rows; needed where the table has several.
    nodal : {"exact", "mid_year"}, optional
        Convention the constants were made with; the table's own by default, else ``mid_year``, as published
        tables are.
    any_single : bool
        Take the table's only gauge whatever its id.

    Returns
    -------
    HarmonicConstants
        In the order of the table.

    Raises
    ------
    InputError
        If the file is missing, a column or gauge is, or a value is impossible; names the line.
    """
    frame = _rows(Path(path))
    frame = _of_gauge(frame, Path(path), gauge, any_single=any_single)
    lag_column = next(column for column in _LAG_COLUMNS if column in frame)
    amplitude = _numbers(frame, "amplitude_m", path)
    lag = _numbers(frame, lag_column, path)
    spread = {column: _numbers(frame, column, path, may_lack=True) for column in ("amplitude_sd_m", "phase_lag_sd_deg")}
    level = (frame["constituent"] == MEAN_LEVEL).to_numpy()
    names = _names(frame[~level], path)
    convention = nodal or _one_of(frame, "nodal", path)
    if convention not in ("exact", "mid_year"):
        message = f"unknown nodal convention {convention!r}; write exact or mid_year"
        raise InputError(message, path=path)
    has_level = bool(level.any())
    return HarmonicConstants(
        names=names,
        amplitude_m=amplitude[~level],
        phase_lag_deg=np.mod(lag[~level], 360.0),
        amplitude_sd_m=spread["amplitude_sd_m"][~level],
        phase_lag_sd_deg=spread["phase_lag_sd_deg"][~level],
        basis=tuple(frame.get("basis", pd.Series("published", index=frame.index))[~level]),
        mean_level_m=float((amplitude * np.cos(np.deg2rad(lag)))[level][0]) if has_level else 0.0,
        mean_level_sd_m=float(spread["amplitude_sd_m"][level][0]) if has_level else float("nan"),
        nodal="exact" if convention == "exact" else "mid_year",
        vertical_reference=_one_of(frame, "vertical_reference", path) if "vertical_reference" in frame else None,
    )


def _rows(path: Path) -> pd.DataFrame:
    """Read all cells as text; the index holds line numbers."""
    try:
        lines = path.read_text(encoding="utf-8-sig").splitlines()
    except OSError as error:
        message = f"cannot read this table of constants ({error.strerror}); check the path"
        raise InputError(message, path=path) from error
    except UnicodeDecodeError as error:
        message = "not UTF-8 text; a table of constants is a CSV file"
        raise InputError(message, path=path) from error
    numbered = [(n, line) for n, line in enumerate(lines, 1) if line.strip() and not line.startswith("#")]
    cells = [[cell.strip() for cell in next(csv.reader([line]))] for _, line in numbered]
    if len(cells) < 2:
        message = "no rows of constants; wanted a header and a row each constituent"
        raise InputError(message, path=path)
    header = cells[0]
    wanted = [c for c in ("constituent", "amplitude_m") if c not in header]
    if wanted or not any(column in header for column in _LAG_COLUMNS):
        message = f"columns are {', '.join(header)}; wanted constituent, amplitude_m and phase_lag_deg"
        raise InputError(message, path=path, line=numbered[0][0])
    for (line, _), row in zip(numbered[1:], cells[1:], strict=True):
        if len(row) != len(header):
            message = f"{len(row)} cells where the header has {len(header)}; mend the row"
            raise InputError(message, path=path, line=line)
    return pd.DataFrame(cells[1:], columns=header, index=[n for n, _ in numbered[1:]], dtype=str)


def _of_gauge(frame: pd.DataFrame, path: Path, gauge: str | None, *, any_single: bool) -> pd.DataFrame:
    column = next((c for c in _GAUGE_COLUMNS if c in frame), None)
    if column is None:
        return frame
    ids = list(dict.fromkeys(frame[column]))
    if len(ids) == 1 and (gauge is None or any_single):
        return frame
    if gauge in ids:
        return frame[frame[column] == gauge]
    shown = ", ".join(ids[:8]) + (" ..." if len(ids) > 8 else "")
    message = f"{'name a gauge' if gauge is None else f'no gauge {gauge!r}'}; the table has {shown}"
    raise InputError(message, path=path)


def _numbers(
    frame: pd.DataFrame, column: str, path: str | Path, *, may_lack: bool = False
) -> np.ndarray[tuple[int], np.dtype[np.float64]]:
    if may_lack and column not in frame:
        return np.full(len(frame), np.nan)
    values = np.empty(len(frame), dtype=np.float64)
    for row, (line, text) in enumerate(frame[column].items()):
        try:
            values[row] = float(text) if text or not may_lack else np.nan
        except ValueError:
            values[row] = np.inf
        if np.isinf(values[row]) or (np.isnan(values[row]) and not may_lack) or _negative(column, values[row]):
            message = f"{column} is {text!r}; wanted a finite number{', not negative' if 'amp' in column else ''}"
            raise InputError(message, path=path, line=int(str(line)))
    return values


def _negative(column: str, value: float) -> bool:
    return "amplitude" in column and value < 0.0


def _names(frame: pd.DataFrame, path: str | Path) -> tuple[str, ...]:
    names: list[str] = []
    for line, text in frame["constituent"].items():
        number = int(str(line))
        try:
            entry = resolve(str(text))
        except ConstituentError as error:
            raise InputError(str(error), path=path, line=number) from error
        if entry.name in names:
            message = f"{entry.name} stands in the table twice; keep one row"
            raise InputError(message, path=path, line=number)
        names.append(entry.name)
    if "speed_deg_per_h" in frame:
        _check_speeds(frame, names, path)
    return tuple(names)


def _check_speeds(frame: pd.DataFrame, names: list[str], path: str | Path) -> None:
    """A speed that is not the constituent's own means that the two sides mean different things by its name."""
    stated = _numbers(frame, "speed_deg_per_h", path, may_lack=True)
    for line, name, speed in zip(frame.index, names, stated, strict=True):
        ours = resolve(name).speed_deg_per_h
        if abs(speed - ours) > _SPEED_TOLERANCE_DEG_PER_H:
            message = f"{name} has the speed {speed} deg/h here and {ours:.7f} in the catalogue; mend name or speed"
            raise InputError(message, path=path, line=int(str(line)))


def _one_of(frame: pd.DataFrame, column: str, path: str | Path) -> str:
    if column not in frame:
        return "mid_year"
    values = list(dict.fromkeys(frame[column]))
    if len(values) > 1:
        message = f"{column} differs within one gauge: {', '.join(values)}; one table has one convention"
        raise InputError(message, path=path, line=int(str(frame.index[0])))
    return str(values[0])
