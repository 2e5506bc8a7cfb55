"""Figures of a network: each answers one question, takes a result and an `Axes`, and returns the `Axes`."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from matplotlib.axes import Axes
from numpy.typing import NDArray

from tidekit.network.fingerprints import Fingerprint
from tidekit.network.measure import NetworkMeasure
from tidekit.network.propagation import PropagationFit
from tidekit.records.network import CoastSpec
from tidekit.records.station import Station
from tidekit.report.style import BAD, GOOD, MARKERS, MUTED, OKABE_ITO, finish

Float = NDArray[np.float64]

_MOST_DRAWN = 5
"""Constituents in one picture that a reader can tell apart."""


def draw_map(stations: Sequence[Station], coast: CoastSpec, faulty: set[str], axes: Axes) -> Axes:
    """*Where are the gauges?* Gauges by latitude and longitude, the coast between them, and those with findings."""
    placed = [s for s in stations if s.latitude_deg is not None and s.longitude_deg is not None]
    if not placed:
        axes.text(0.5, 0.5, "no gauge gives latitude and longitude", ha="center", transform=axes.transAxes)
        return finish(axes, title="Gauges", x="longitude [deg E]", y="latitude [deg N]")
    line = [(p[1], p[0]) for p in coast.line] or [
        (float(s.longitude_deg or 0.0), float(s.latitude_deg or 0.0))
        for s in sorted(placed, key=lambda s: s.along_coast_km or 0.0)
        if not s.offshore_km and s.open_coast
    ]
    if len(line) > 1:
        axes.plot(*zip(*line, strict=True), color=MUTED, linewidth=1.2, zorder=1)
    for station in placed:
        wrong = station.id in faulty
        marker = "X" if wrong else ("o" if station.open_coast else "s")
        colour = BAD if wrong else GOOD if station.open_coast else MUTED
        place = (float(station.longitude_deg or 0.0), float(station.latitude_deg or 0.0))
        axes.scatter(*place, marker=marker, s=46, color=colour, zorder=3)
        axes.annotate(station.label, place, xytext=(6, 4), textcoords="offset points", fontsize=8)
    latitude = float(np.mean([s.latitude_deg for s in placed if s.latitude_deg is not None]))
    axes.set_aspect(1.0 / max(np.cos(np.radians(latitude)), 0.05), adjustable="datalim")
    axes.margins(0.18)
    return finish(axes, title="Gauges (cross: with an error)", x="longitude [deg E]", y="latitude [deg N]")


def draw_phase_along_coast(measure: NetworkMeasure, axes: Axes) -> Axes:
    """*Where does the tide go?* Phase lag against distance, one line a constituent, the theory's speed as a band.

    Phase lags are unwrapped beside the delay that all constituents share. The strongest five are drawn.
    """
    fit = measure.propagation
    labels = {"x": "distance along the coast [km]", "y": "phase lag, unwrapped [deg]"}
    if fit.delay_fit is None:
        axes.text(0.5, 0.5, fit.verdict.evidence, ha="center", wrap=True, transform=axes.transAxes)
        return finish(axes, title="Phase lag along the coast", **labels)
    tides, line = fit.tides, fit.delay_fit
    strongest = np.sort(np.argsort(-np.median(tides.amplitude_m, axis=0), kind="stable")[:_MOST_DRAWN])
    shown = np.array([_unwrapped_lag_deg(fit, int(column)) for column in strongest])
    middle = float(tides.along_km[line.used].mean())
    x = np.linspace(float(tides.along_km.min()), float(tides.along_km.max()), 40)
    for row, column in enumerate(strongest):
        speed, colour = float(tides.speeds_deg_per_h[column]), OKABE_ITO[row]
        slope = speed * float(line.coefficients[1])
        level = float(np.mean(shown[row][line.used] - slope * (tides.along_km[line.used] - middle)))
        axes.plot(x, level + slope * (x - middle), color=colour, linewidth=1.0)
        if measure.theory is not None:
            steep = speed * measure.theory.sense / (3.6 * measure.theory.wave.speed_m_per_s) * (x - middle)
            axes.fill_between(x, level + steep / 0.9, level + steep / 1.1, color=colour, alpha=0.15, linewidth=0)
        reach = 1.96 * tides.lag_sd_deg[:, column]
        marker = MARKERS[row]
        style = {"color": colour, "markersize": 4.5, "linewidth": 1, "label": tides.names[column]}
        axes.errorbar(tides.along_km, shown[row], yerr=reach, fmt=marker, **style)
    _clip_to_wave(fit, shown, axes)
    for row in map(int, np.flatnonzero(~line.used)):
        place = (float(tides.along_km[row]), float(shown[:, row].max()))
        axes.annotate(
            tides.ids[row], place, xytext=(0, 7), textcoords="offset points", ha="center", color=BAD, fontsize=8
        )
    axes.legend(fontsize=8, frameon=False, loc="upper left")
    return finish(axes, title="Phase lag along the coast (band: sqrt(g h) ± 10 %)", **labels)


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
    outside = [f"{fit.tides.ids[n]} at {fit.delays[n].delay_h:+.1f} h" for n in np.flatnonzero(beyond)]
    axes.set_ylim(low, high)
    if outside:
        text = "beyond: " + ", ".join(outside)
        axes.text(0.98, 0.02, text, ha="right", color=BAD, fontsize=8, transform=axes.transAxes)


def draw_amplitude_across(measure: NetworkMeasure, axes: Axes) -> Axes:
    """*How tightly is it held to the coast?* Amplitude relative to the coast against distance offshore."""
    fit = measure.propagation
    title = "Amplitude across the shore"
    if fit.level_fit is None or np.ptp(fit.tides.offshore_km) == 0.0:
        axes.text(0.5, 0.5, "no gauge stands offshore", ha="center", transform=axes.transAxes)
        return finish(axes, title=title, x="distance offshore [km]", y="amplitude over that at the coast")
    tides = fit.tides
    coastal = (tides.offshore_km < 1.0) & fit.level_fit.used
    anchor = np.exp(np.mean(np.log(tides.amplitude_m[coastal]), axis=0))
    for column, name in enumerate(tides.names):
        axes.errorbar(
            tides.offshore_km + 0.4 * (column - len(tides.names) / 2),
            tides.amplitude_m[:, column] / anchor[column],
            yerr=1.96 * tides.log_amplitude_sd[:, column] * tides.amplitude_m[:, column] / anchor[column],
            fmt=MARKERS[column % len(MARKERS)],
            color=OKABE_ITO[column % len(OKABE_ITO)],
            markersize=4.5,
            linewidth=1,
            label=name,
        )
    x = np.linspace(0.0, 1.1 * float(tides.offshore_km.max()), 60)
    if measure.theory is not None:
        axes.plot(x, measure.theory.wave.amplitude_ratio(x), color="black", linewidth=1.2, label="exp(-x f/c)")
    ratios = tides.amplitude_m / anchor
    inside = ratios[fit.level_fit.used]
    axes.set_ylim(0.0, 1.25 * float(inside.max()))
    beyond = [tides.ids[n] for n in range(len(tides.ids)) if np.median(ratios[n]) > 1.25 * inside.max()]
    if beyond:
        axes.text(
            0.98, 0.94, "beyond: " + ", ".join(beyond), ha="right", color=BAD, fontsize=8, transform=axes.transAxes
        )
    axes.legend(fontsize=7, ncols=2, frameon=False, loc="lower left")
    return finish(axes, title=title, x="distance offshore [km]", y="amplitude over that at the coast")


def draw_phase_fingerprint(print_: Fingerprint, axes: Axes) -> Axes:
    """*Is its clock wrong?* Phase residual against speed: a straight line through zero is a clock."""
    axes.axhline(0.0, color=MUTED, linewidth=0.8)
    turn = 180.0 if print_.inverted else 0.0
    clock = print_.clock.delay_h
    expected = turn + print_.speeds_deg_per_h * clock
    left = (print_.phase_residual_deg - expected + 180.0) % 360.0 - 180.0
    speeds = np.linspace(0.0, 1.08 * float(print_.speeds_deg_per_h.max()), 20)
    axes.plot(speeds, turn + speeds * clock, color="black", linewidth=1.1)
    axes.errorbar(
        print_.speeds_deg_per_h,
        expected + left,
        yerr=1.96 * print_.phase_sd_deg,
        fmt="o",
        color=GOOD,
        markersize=4.5,
        linewidth=1,
    )
    _label_points(print_, expected + left, axes)
    size = f"{60 * clock:+.1f} min" if abs(clock) < 0.4 else f"{clock:+.2f} h"
    return finish(
        axes, title=f"{print_.gauge}: phase, line = clock {size}", x="speed [deg/h]", y="phase residual [deg]"
    )


def draw_gain_fingerprint(print_: Fingerprint, axes: Axes) -> Axes:
    """*Is its unit wrong?* Amplitude ratio against speed: a level off one is a gain or a unit."""
    axes.axhline(1.0, color=MUTED, linewidth=0.8)
    axes.axhline(float(np.exp(print_.log_gain)), color="black", linewidth=1.1)
    axes.plot(print_.speeds_deg_per_h, print_.amplitude_ratio, "s", color=GOOD, markersize=4.5)
    _label_points(print_, print_.amplitude_ratio, axes)
    axes.set_ylim(0.0, 1.25 * max(1.2, float(print_.amplitude_ratio.max())))
    return finish(
        axes,
        title=f"{print_.gauge}: amplitude, line = gain {np.exp(print_.log_gain):.3f}",
        x="speed [deg/h]",
        y="amplitude ratio",
    )


def _label_points(print_: Fingerprint, heights: Float, axes: Axes) -> None:
    """Name the strongest constituent of each band; the others crowd beside it."""
    for name in ("K1", "M2"):
        if name in print_.names:
            row = print_.names.index(name)
            axes.annotate(
                name,
                (print_.speeds_deg_per_h[row], heights[row]),
                xytext=(5, 5),
                textcoords="offset points",
                fontsize=8,
            )
