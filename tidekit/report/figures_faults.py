"""Figures of one gauge's fault: its fingerprint, and its level beside its neighbours'."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise

import numpy as np
from matplotlib.axes import Axes
from numpy.typing import NDArray

from tidekit.astronomy.timescales import datetime64_from_hours
from tidekit.network.fingerprints import Fingerprint
from tidekit.quality.steps import Step
from tidekit.report.style import BAD, GOOD, MUTED, finish

Float = NDArray[np.float64]


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
    title = f"{print_.gauge}: clock {size} (line)" + (", upside down" if print_.inverted else "")
    return finish(axes, title=title, x="speed [deg/h]", y="phase residual [deg]")


def draw_gain_fingerprint(print_: Fingerprint, axes: Axes) -> Axes:
    """*Is its unit wrong?* Amplitude ratio against speed: a level off one is a gain or a unit."""
    axes.axhline(1.0, color=MUTED, linewidth=0.8)
    gain, reach = float(np.exp(print_.log_gain)), 1.96 * print_.log_gain_sd
    axes.axhline(gain, color="black", linewidth=1.1)
    axes.axhspan(gain * np.exp(-reach), gain * np.exp(reach), color=MUTED, alpha=0.15, linewidth=0)
    axes.plot(print_.speeds_deg_per_h, print_.amplitude_ratio, "s", color=GOOD, markersize=4.5)
    _label_points(print_, print_.amplitude_ratio, axes)
    axes.set_xlim(0.0, 1.08 * float(print_.speeds_deg_per_h.max()))
    axes.set_ylim(0.0, 1.25 * max(1.2, float(print_.amplitude_ratio.max())))
    title = f"{print_.gauge}: gain {gain:.3g} (line)"
    return finish(axes, title=title, x="speed [deg/h]", y="amplitude ratio")


def draw_step(days: NDArray[np.int64], level_m: Float, steps: Sequence[Step], axes: Axes) -> Axes:
    """*Did its zero move?* Daily level less season and what neighbours share, and the steps found in it.

    Parameters
    ----------
    days : ndarray of int, shape (d,)
        Days since 2000-01-01.
    level_m : ndarray, shape (d,)
        Daily level about that before the first step, NaN where missing. [m]
    steps : sequence of Step
        In order of date.
    axes : Axes
        Where to draw.

    Returns
    -------
    Axes
        As given.
    """
    times = datetime64_from_hours(24.0 * days + 12.0)
    axes.plot(times, 100.0 * level_m, color=GOOD, linewidth=0.8)
    edges = [int(days[0]), *(step.day for step in steps), int(days[-1]) + 1]
    heights = 100.0 * np.cumsum([0.0, *(step.size_m for step in steps)])
    for (first, last), height in zip(pairwise(edges), heights, strict=True):
        ends = datetime64_from_hours(24.0 * np.array([first, last], dtype=np.float64))
        axes.plot(ends, [height, height], color="black", linewidth=1.4)
    for step in steps:
        date = datetime64_from_hours(np.array([24.0 * step.day]))[0]
        axes.axvline(date, color=BAD, linewidth=1.0, linestyle="--")
        text = f" {str(date)[:10]}: {100 * step.size_m:+.1f} cm"
        axes.annotate(text, (date, 1.0), xycoords=("data", "axes fraction"), va="top", color=BAD, fontsize=8)
    low, high = np.nanpercentile(100.0 * level_m, [0.5, 99.5])
    axes.set_ylim(low - 0.1 * (high - low), high + 0.3 * (high - low))
    axes.tick_params(axis="x", labelsize=8)
    return finish(axes, title="Daily residual less season and what the neighbours share", x="", y="level [cm]")


def _label_points(print_: Fingerprint, heights: Float, axes: Axes) -> None:
    """Name the strongest constituent of each band; the others crowd beside it."""
    for name in ("K1", "M2"):
        if name in print_.names:
            row = print_.names.index(name)
            axes.annotate(
                name,
                (print_.speeds_deg_per_h[row], heights[row]),
                xytext=(6, -11),
                textcoords="offset points",
                fontsize=8,
            )
