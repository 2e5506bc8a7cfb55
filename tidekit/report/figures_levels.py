"""Figures of levels: the residuals of all gauges on one time axis, and a gauge's datum ladder."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from matplotlib.axes import Axes
from numpy.typing import NDArray

from tidekit.astronomy.timescales import datetime64_from_hours
from tidekit.datums.table import RANGES, DatumTable
from tidekit.harmonic.results import HarmonicFit
from tidekit.quality.daily import daily_levels
from tidekit.report.style import BAD, GOOD, MUTED, finish, spread_labels

Float = NDArray[np.float64]


def draw_residuals(fits: Mapping[str, HarmonicFit], faulty: set[str], axes: Axes) -> Axes:
    """*Do the records move together?* Daily non-tidal residuals, one strip a gauge, gaps left open.

    Strips are a round number of centimetres apart; what reaches beyond its neighbours is cut there. Gauges of
    `faulty` are drawn in the second colour and marked with a cross.
    """
    levels = daily_levels([fit.t_h for fit in fits.values()], [fit.residual_m for fit in fits.values()])
    times = datetime64_from_hours(24.0 * levels.days + 12.0)
    apart = _round_step(5.0 * float(np.nanmedian(np.nanstd(levels.level_m, axis=1))))
    for row, gauge in enumerate(fits):
        base = -row * apart
        axes.axhline(base, color="#dddddd", linewidth=0.6)
        shown = np.clip(levels.level_m[row], -apart, apart)
        axes.plot(times, base + shown, color=BAD if gauge in faulty else GOOD, linewidth=0.8)
    finish(axes, title=f"Daily residuals; {100 * apart:g} cm from strip to strip", x="", y="")
    names = [f"{gauge} ×" if gauge in faulty else gauge for gauge in fits]
    axes.set_yticks([-row * apart for row in range(len(fits))], names, fontsize=8)
    axes.tick_params(axis="x", labelsize=8)
    axes.set_ylim(-(len(fits) - 0.3) * apart, 0.8 * apart)
    return axes


def _round_step(least_m: float) -> float:
    """The next of 5, 10, 20, 50 cm and so on. [m]"""
    decade = 10.0 ** np.floor(np.log10(max(least_m, 0.05)))
    return float(next(step * decade for step in (1.0, 2.0, 5.0, 10.0) if step * decade >= 0.999 * max(least_m, 0.05)))


def draw_datum_ladder(table: DatumTable, axes: Axes) -> Axes:
    """*What are the levels?* Datums to scale with their 95 % intervals, labels kept apart."""
    rows = [n for n, name in enumerate(table.names) if name not in RANGES and np.isfinite(table.height_m[n])]
    rows.sort(key=lambda n: float(table.height_m[n]))
    heights = table.height_m[rows]
    span = max(float(np.ptp(heights)), 0.1)
    labels = spread_labels(heights, 0.055 * span)
    for row, height, label in zip(rows, heights, labels, strict=True):
        reach = 1.96 * table.height_sd_m[row] if np.isfinite(table.height_sd_m[row]) else 0.0
        axes.plot([0.0, 0.5], [height, height], color=GOOD, linewidth=1.4)
        axes.fill_between([0.0, 0.5], height - reach, height + reach, color=GOOD, alpha=0.2, linewidth=0)
        axes.plot([0.5, 0.62], [height, label], color=MUTED, linewidth=0.7)
        axes.text(0.64, label, f"{table.names[row]}  {height:.3f}", va="center", fontsize=8)
    axes.set_xlim(0.0, 1.1)
    axes.set_ylim(min(heights.min(), labels.min()) - 0.06 * span, max(heights.max(), labels.max()) + 0.06 * span)
    above = table.vertical_reference or "the record's zero"
    finish(axes, title=f"{table.gauge}", x="", y=f"height above {above} [m]")
    axes.set_xticks([])
    return axes
