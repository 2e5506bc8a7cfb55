"""Figures of the wave: phase lag along the coast, amplitude across the shore."""

from __future__ import annotations

import numpy as np
from matplotlib.axes import Axes
from numpy.typing import NDArray

from tidekit.network.gauges import TideArrays
from tidekit.network.lines import level_design
from tidekit.network.measure import NetworkMeasure
from tidekit.network.propagation import PropagationFit
from tidekit.network.robust_line import RobustFit
from tidekit.report.style import BAD, MARKERS, OKABE_ITO, finish, spread_labels

Float = NDArray[np.float64]

_MOST_DRAWN = 5
"""Constituents in one picture that a reader can tell apart."""
_BAND = 0.10
"""Half width of the theory's band of speeds: what shelves and the Earth's curvature do to most coasts."""


def draw_phase_along_coast(measure: NetworkMeasure, axes: Axes) -> Axes:
    """*Where does the tide go?* Phase lag against distance, one line a constituent, the theory's speed as a band.

    Phase lags are unwrapped beside the delay that all constituents share. The strongest five are drawn; gauges off
    the wave are hollow.
    """
    fit = measure.propagation
    labels = {"x": "distance along the coast [km]", "y": "phase lag, unwrapped [deg]"}
    if fit.delay_fit is None:
        axes.text(0.5, 0.5, fit.verdict.evidence, ha="center", wrap=True, transform=axes.transAxes)
        return finish(axes, title="Phase lag along the coast", **labels)
    tides, line = fit.tides, fit.delay_fit
    columns = strongest(fit)
    shown = np.array([_unwrapped_lag_deg(fit, int(column)) for column in columns])
    middle = float(tides.along_km[line.used].mean())
    x = np.linspace(float(tides.along_km.min()), float(tides.along_km.max()), 40)
    ends_deg: list[float] = []
    for row, column in enumerate(columns):
        speed, colour = float(tides.speeds_deg_per_h[column]), OKABE_ITO[row]
        slope = speed * float(line.coefficients[1])
        level = float(np.mean(shown[row][line.used] - slope * (tides.along_km[line.used] - middle)))
        axes.plot(x, level + slope * (x - middle), color=colour, linewidth=1.0)
        ends_deg.append(level + slope * (float(x[-1]) - middle))
        if measure.theory is not None:
            steep = speed * measure.theory.sense / (3.6 * measure.theory.wave.speed_m_per_s) * (x - middle)
            ends = level + steep / (1.0 - _BAND), level + steep / (1.0 + _BAND)
            axes.fill_between(x, *ends, color=colour, alpha=0.15, linewidth=0)
        _draw_points(
            tides.along_km, shown[row], 1.96 * tides.lag_sd_deg[:, column], line, row, tides.names[column], axes
        )
    _clip_to_wave(fit, shown, axes)
    for row in map(int, np.flatnonzero(~line.used)):
        place = (float(tides.along_km[row]), float(shown[:, row].max()))
        axes.annotate(
            tides.ids[row], place, xytext=(0, 7), textcoords="offset points", ha="center", color=BAD, fontsize=8
        )
    _name_lines(ends_deg, tides, columns, x, axes)
    band = "" if measure.theory is None else f" (band: sqrt(g h) ± {100 * _BAND:.0f} %)"
    return finish(axes, title=f"Phase lag along the coast{band}", **labels)


def _name_lines(ends_deg: list[float], tides: TideArrays, columns: NDArray[np.int64], x: Float, axes: Axes) -> None:
    """Write each constituent's name at the right end of its line, in its colour, names kept apart."""
    order = np.argsort(ends_deg)
    low, high = axes.get_ylim()
    heights = spread_labels(np.array(ends_deg)[order], 0.055 * (high - low))
    for row, height in zip(order, heights, strict=True):
        place = (float(x[-1]) + 0.03 * float(np.ptp(x)), float(height))
        axes.text(*place, tides.names[columns[row]], color=OKABE_ITO[row], fontsize=8, va="center", weight="bold")
    axes.set_xlim(float(x[0]) - 0.05 * float(np.ptp(x)), float(x[-1]) + 0.12 * float(np.ptp(x)))


def strongest(fit: PropagationFit) -> NDArray[np.int64]:
    """Columns of the strongest constituents, in order of speed."""
    return np.sort(np.argsort(-np.median(fit.tides.amplitude_m, axis=0), kind="stable")[:_MOST_DRAWN])


def _draw_points(x: Float, y: Float, reach: Float, line: RobustFit, row: int, name: str, axes: Axes) -> None:
    """One constituent at all gauges with 95 % intervals; those off the line hollow."""
    marker, colour = MARKERS[row], OKABE_ITO[row]
    for rows, face, label in ((line.used, colour, name), (~line.used, "white", None)):
        if rows.any():
            axes.errorbar(
                x[rows],
                y[rows],
                yerr=reach[rows],
                fmt=marker,
                color=colour,
                markerfacecolor=face,
                markersize=4.5,
                linewidth=1,
                label=label,
            )


def _unwrapped_lag_deg(fit: PropagationFit, column: int) -> Float:
    """Phase lags of one constituent at all gauges, whole turns added so that they follow the joint delay. [degrees]"""
    lag, speed = fit.tides.lag_deg[:, column], fit.tides.speeds_deg_per_h[column]
    expected = lag[0] + speed * np.array([delay.delay_h for delay in fit.delays])
    return np.asarray(expected + (lag - expected + 180.0) % 360.0 - 180.0)


def _clip_to_wave(fit: PropagationFit, shown: Float, axes: Axes) -> None:
    """Keep the axis on the wave, and say which gauges lie beyond it: a wrong zone would flatten the picture."""
    used = shown[:, fit.used]
    room = max(0.12 * float(np.ptp(used)), 10.0)
    low, high = float(used.min()) - room, float(used.max()) + 2.0 * room
    beyond = ~np.all((shown > low) & (shown < high), axis=0)
    axes.set_ylim(low, high)
    _say_beyond([fit.tides.ids[n] for n in np.flatnonzero(beyond)], axes)


def _say_beyond(gauges: list[str], axes: Axes) -> None:
    if gauges:
        text = "beyond: " + ", ".join(gauges)
        axes.text(0.99, 0.02, text, ha="right", va="bottom", color=BAD, fontsize=8, transform=axes.transAxes)


def draw_amplitude_across(measure: NetworkMeasure, axes: Axes) -> Axes:
    """*How tightly is it held to the coast?* Amplitude relative to the coast against distance offshore.

    The slope of the amplitude along the coast is taken off. The strongest five constituents are drawn side by side.
    """
    fit = measure.propagation
    labels = {"x": "distance offshore [km]", "y": "amplitude over that at the coast"}
    if fit.level_fit is None or np.ptp(fit.tides.offshore_km) == 0.0:
        axes.text(0.5, 0.5, "no gauge stands offshore", ha="center", transform=axes.transAxes)
        return finish(axes, title="Amplitude across the shore", **labels)
    tides, level, columns = fit.tides, fit.level_fit, strongest(fit)
    ratio = _over_coast(fit, level)
    farthest = float(tides.offshore_km.max())
    for row, column in enumerate(columns):
        x = tides.offshore_km + 0.008 * farthest * (row - (len(columns) - 1) / 2)
        reach = 1.96 * tides.log_amplitude_sd[:, column] * ratio[:, column]
        _draw_points(x, ratio[:, column], reach, level, row, tides.names[column], axes)
    x = np.linspace(0.0, 1.1 * farthest, 60)
    axes.plot(x, np.exp(level.coefficients[2] * x), color="black", linewidth=1.0, linestyle="--", label="measured")
    if measure.theory is not None:
        axes.plot(x, measure.theory.wave.amplitude_ratio(x), color="black", linewidth=1.2, label="exp(-x f/c)")
    top = 1.25 * float(ratio[level.used].max())
    axes.set_ylim(0.0, top)
    _say_beyond([tides.ids[n] for n in np.flatnonzero(np.median(ratio, axis=1) > top)], axes)
    axes.legend(fontsize=8, ncols=2, frameon=False, loc="lower left")
    return finish(axes, title="Amplitude across the shore", **labels)


def _over_coast(fit: PropagationFit, level: RobustFit) -> Float:
    """Amplitudes over those at the coast, by the gauges nearest to it that agree, shape (n, k)."""
    tides = fit.tides
    along = level_design(tides.along_km, tides.offshore_km) @ (level.coefficients * [0.0, 1.0, 0.0])
    logs = np.log(tides.amplitude_m) - along[:, None]
    coastal = level.used & (tides.offshore_km <= tides.offshore_km[level.used].min() + 1.0)
    # Where even the nearest stand off the coast, the fitted decay brings them to it.
    ashore = logs - level.coefficients[2] * tides.offshore_km[:, None]
    return np.asarray(np.exp(logs - ashore[coastal].mean(axis=0)))
