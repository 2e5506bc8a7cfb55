"""Colours, markers and sizes of all figures."""

from __future__ import annotations

from matplotlib.axes import Axes

OKABE_ITO = ("#0072B2", "#D55E00", "#009E73", "#CC79A7", "#E69F00", "#56B4E9", "#000000", "#8C7A00")
"""Okabe and Ito's palette for all kinds of colour vision; its yellow darkened to be read on white."""
MARKERS = ("o", "s", "^", "D", "v", "P", "X", "*")
GOOD, BAD, MUTED = "#0072B2", "#D55E00", "#767676"


def finish(axes: Axes, *, title: str, x: str, y: str) -> Axes:
    """Title, axis labels with their units, and a quiet grid."""
    axes.set_title(title, loc="left", fontsize=10)
    axes.set_xlabel(x)
    axes.set_ylabel(y)
    axes.grid(visible=True, color="#dddddd", linewidth=0.6)
    axes.set_axisbelow(True)
    for side in ("top", "right"):
        axes.spines[side].set_visible(False)
    return axes
