"""Figure of a network: *where are the gauges?*"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from matplotlib.axes import Axes
from numpy.typing import NDArray

from tidekit.network.coast import coast_bearing_deg
from tidekit.records.coast_line import km_per_degree
from tidekit.records.network import CoastSpec
from tidekit.records.station import Station
from tidekit.report.style import BAD, GOOD, LAND, MUTED, finish, spread_labels

Float = NDArray[np.float64]

_SLIMMEST = 0.8
"""Least width of the frame over its height: a straight coast would make a thread of a map."""
_LABEL_SPACE = 0.052
"""Least distance between labels on one side, as a part of the frame's height."""


@dataclass(frozen=True, eq=False)
class _Frame:
    """What part of the world is shown, in degrees, and how many kilometres a degree has there."""

    middle: Float
    half_km: Float
    km: Float

    @property
    def low(self) -> Float:
        return self.middle - self.half_km / self.km

    @property
    def high(self) -> Float:
        return self.middle + self.half_km / self.km


def draw_map(
    stations: Sequence[Station],
    coast: CoastSpec,
    faulty: set[str],
    axes: Axes,
    *,
    travels_toward_deg: float = float("nan"),
) -> Axes:
    """*Where are the gauges?* Gauges in true proportion, the line that joins those on the coast, the land's side.

    Parameters
    ----------
    stations : sequence of Station
        Those without latitude and longitude are left out.
    coast : CoastSpec
        Its line, or the line through the gauges, is drawn straight from point to point.
    faulty : set of str
        Gauges to mark with a cross.
    axes : Axes
        Where to draw.
    travels_toward_deg : float
        Compass bearing of the tide's arrow; none where NaN. [degrees]

    Returns
    -------
    Axes
        As given.
    """
    labels = {"x": "longitude [deg E]", "y": "latitude [deg N]"}
    placed = [s for s in stations if s.latitude_deg is not None and s.longitude_deg is not None]
    if not placed:
        axes.text(0.5, 0.5, "no gauge gives latitude and longitude", ha="center", transform=axes.transAxes)
        return finish(axes, title="Gauges", **labels)
    # Across the 180th meridian longitudes run on.
    places = np.array([[s.longitude_deg, s.latitude_deg] for s in placed], dtype=np.float64)
    places[:, 0] = np.unwrap(places[:, 0], period=360.0)
    frame = _frame(places)
    bearing_deg = coast_bearing_deg(placed)
    line = _line(placed, places, coast)
    if len(line) > 1:
        _draw_land(line, bearing_deg, coast, frame, axes)
    _draw_gauges(placed, places, faulty, _land_is_right(bearing_deg, coast), frame, axes)
    if np.isfinite(travels_toward_deg):
        _draw_arrow(travels_toward_deg, _land_is_right(bearing_deg, coast), frame, axes)
    axes.set_xlim(frame.low[0], frame.high[0])
    axes.set_ylim(frame.low[1], frame.high[1])
    axes.set_aspect(frame.km[1] / frame.km[0])
    return finish(axes, title="Gauges (cross: with an error)", **labels)


def _frame(places: Float) -> _Frame:
    low, high = places.min(axis=0), places.max(axis=0)
    middle = 0.5 * (low + high)
    km = np.array(km_per_degree(float(middle[1]))[::-1], dtype=np.float64)
    # Room for names beside the outermost gauges.
    half = np.maximum([1.1, 0.6] * (high - low) * km, 5.0)
    half = np.maximum(half, [_SLIMMEST * half[1], 0.6 * half[0]])
    return _Frame(middle, half, km)


def _line(placed: Sequence[Station], places: Float, coast: CoastSpec) -> Float:
    """Points of the coast [longitude, latitude]: as given, or through the gauges that stand on it."""
    if coast.line:
        line = np.array(coast.line, dtype=np.float64)[:, ::-1]
        line[:, 0] = places[0, 0] + (np.unwrap(line[:, 0], period=360.0) - places[0, 0] + 180.0) % 360.0 - 180.0
        return line
    on = [n for n, s in enumerate(placed) if s.open_coast and not s.offshore_km and s.along_coast_km is not None]
    return places[sorted(on, key=lambda n: placed[n].along_coast_km or 0.0)]


def _land_is_right(bearing_deg: float, coast: CoastSpec) -> bool:
    """Whether the land lies to the right of the picture."""
    east = np.sin(np.radians(bearing_deg + (90.0 if coast.side == "right" else -90.0)))
    return bool(east > 0.0)


def _draw_land(line: Float, bearing_deg: float, coast: CoastSpec, frame: _Frame, axes: Axes) -> None:
    """The line, run on beyond the frame both ways, and a wash on the land's side of it."""
    if not np.isfinite(bearing_deg):
        axes.plot(*line.T, color=MUTED, linewidth=1.2, zorder=1)
        return
    far = 4.0 * float(frame.half_km.max())
    ahead, inland = (_step(angle, far, frame) for angle in (bearing_deg, bearing_deg + _turn(coast)))
    shore = np.vstack([line[:1] - ahead, line, line[-1:] + ahead])
    axes.fill(*np.vstack([shore, shore[::-1] + inland]).T, color=LAND, linewidth=0, zorder=0)
    axes.plot(*shore.T, color=MUTED, linewidth=1.2, zorder=1)
    place = (0.97, 0.03, "right") if _land_is_right(bearing_deg, coast) else (0.03, 0.03, "left")
    axes.text(*place[:2], "land side", ha=place[2], fontsize=8, color=MUTED, transform=axes.transAxes)


def _turn(coast: CoastSpec) -> float:
    return 90.0 if coast.side == "right" else -90.0


def _step(bearing_deg: float, km: float, frame: _Frame) -> Float:
    """Degrees of longitude and latitude of a step along a bearing."""
    angle = np.radians(bearing_deg)
    return km * np.array([np.sin(angle), np.cos(angle)]) / frame.km


def _draw_gauges(
    placed: Sequence[Station], places: Float, faulty: set[str], land_right: bool, frame: _Frame, axes: Axes
) -> None:
    inner = any(not s.open_coast for s in placed)
    sides: dict[bool, list[int]] = {True: [], False: []}
    for n, station in enumerate(placed):
        wrong = station.id in faulty
        marker = "X" if wrong else ("o" if station.open_coast else "s")
        colour = BAD if wrong else GOOD if station.open_coast else MUTED
        axes.plot(*places[n], marker=marker, markersize=6.5, color=colour, markeredgewidth=0, zorder=3)
        # Coastal gauges are named on the land, those at sea seaward; beside gauges of inner waters, the other way.
        inland = not station.open_coast if inner else not station.offshore_km
        sides[inland == land_right].append(n)
    reach = 0.05 * frame.half_km[0] / frame.km[0]
    for right, rows in sides.items():
        rows.sort(key=lambda n: float(places[n, 1]))
        heights = spread_labels(places[rows, 1], 2.0 * _LABEL_SPACE * float(frame.half_km[1] / frame.km[1]))
        for n, height in zip(rows, heights, strict=True):
            away = reach if right else -reach
            axes.annotate(
                placed[n].label,
                tuple(places[n]),
                xytext=(float(places[n, 0]) + 1.6 * away, float(height)),
                arrowprops={"arrowstyle": "-", "color": MUTED, "linewidth": 0.5, "shrinkA": 0, "shrinkB": 3},
                ha="left" if right else "right",
                va="center",
                fontsize=8,
                zorder=4,
            )


def _draw_arrow(bearing_deg: float, land_right: bool, frame: _Frame, axes: Axes) -> None:
    """The way of the tide, at the frame's seaward edge."""
    length = 0.35 * float(frame.half_km.min())
    side = -0.82 if land_right else 0.82
    start = frame.middle + np.array([side, -0.75]) * frame.half_km / frame.km
    start = start - 0.5 * _step(bearing_deg, length, frame)
    end = start + _step(bearing_deg, length, frame)
    axes.annotate(
        "", tuple(end), xytext=tuple(start), arrowprops={"arrowstyle": "-|>", "color": GOOD, "linewidth": 1.6}
    )
    below = min(float(start[1]), float(end[1])) - 0.03 * float(frame.half_km[1] / frame.km[1])
    axes.text(float(start[0]), below, "tide", color=GOOD, fontsize=8, ha="center", va="top")
