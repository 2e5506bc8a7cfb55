"""Figure of one record: *can I trust it?* Heights, flags, gaps and the residual on one time axis."""

from __future__ import annotations

import numpy as np
import pandas as pd
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from numpy.typing import NDArray

from tidekit.quality.screening import Screening
from tidekit.records.record import FLAG_FAIL, FLAG_MISSING, FLAG_SUSPECT
from tidekit.report.style import BAD, GOOD, MUTED, OKABE_ITO, finish

_SHOWN = {FLAG_SUSPECT: ("suspect", OKABE_ITO[4], "^"), FLAG_FAIL: ("fail", BAD, "X")}


def draw_heights(screening: Screening, axes: Axes) -> Axes:
    """Heights with suspect and failed samples marked, and gaps shaded."""
    _draw(screening, screening.record.heights.to_numpy(dtype=np.float64), axes)
    above = screening.record.station.vertical_reference or "the record's zero"
    counts = ", ".join(f"{int((screening.flags == flag).sum())} {word}" for flag, (word, _, _) in _SHOWN.items())
    missing = int((screening.flags == FLAG_MISSING).sum())
    title = f"{screening.record.station.label}: {len(screening.flags)} samples, {counts}, {missing} missing"
    axes.legend(fontsize=8, frameon=False, loc="upper right")
    return finish(axes, title=title, x="", y=f"height above {above} [m]")


def draw_residual(screening: Screening, axes: Axes) -> Axes:
    """Non-tidal residual with the same marks."""
    _draw(screening, screening.residual_m, axes)
    return finish(axes, title="Non-tidal residual", x="UTC", y="residual [m]")


def draw_record(screening: Screening) -> Figure:
    """Both, one above the other, on a figure of their own."""
    figure = Figure(figsize=(10.0, 6.0), layout="constrained")
    above, below = figure.subplots(2, 1, sharex=True)
    draw_heights(screening, above)
    draw_residual(screening, below)
    figure.text(0.01, 0.005, "Not for navigation.", fontsize=7, color=MUTED)
    return figure


def _draw(screening: Screening, values: NDArray[np.float64], axes: Axes) -> None:
    times = pd.DatetimeIndex(screening.record.heights.index).tz_localize(None).to_numpy()
    step = np.timedelta64(round(3600 * screening.record.step_h), "s")
    gaps = np.flatnonzero(np.diff(times) > 1.5 * step)
    # A line across a gap would draw water levels that nobody measured.
    broken_times = np.insert(times, gaps + 1, times[gaps] + step)
    axes.plot(broken_times, np.insert(values, gaps + 1, np.nan), color=GOOD, linewidth=0.5)
    for gap in gaps:
        axes.axvspan(times[gap], times[gap + 1], color="#dddddd", linewidth=0)
    for flag, (word, colour, marker) in _SHOWN.items():
        hit = screening.flags == flag
        axes.plot(times[hit], values[hit], marker, color=colour, markersize=5, linestyle="none", label=word)
