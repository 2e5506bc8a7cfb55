"""Colours, markers and sizes of all figures."""

from __future__ import annotations

import numpy as np
from matplotlib.axes import Axes
from numpy.typing import NDArray

OKABE_ITO = ("#0072B2", "#D55E00", "#009E73", "#CC79A7", "#E69F00", "#56B4E9", "#000000", "#8C7A00")
"""Okabe and Ito's palette for all kinds of colour vision; its yellow darkened to be read on white."""
MARKERS = ("o", "s", "^", "D", "v", "P", "X", "*")
GOOD, BAD, MUTED = "#0072B2", "#D55E00", "#767676"
LAND = "#F2EEE6"


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


def spread_labels(heights: NDArray[np.float64], least: float) -> NDArray[np.float64]:
    """Places for labels of points in rising order, at least so far apart and as near to the points as that allows.

    The least squares of the shifts under that order: labels that would collide form a block about their points' mean.

    Parameters
    ----------
    heights : ndarray, shape (n,)
        Where the points are, rising.
    least : float
        Least distance between labels, in the same unit.

    Returns
    -------
    ndarray, shape (n,)
        Where the labels go.

    References
    ----------
    .. [1] Barlow, R. E., Bartholomew, D. J., Bremner, J. M. and Brunk, H. D., "Statistical Inference under Order
       Restrictions", Wiley (1972), section 1.2: pooling adjacent violators.
    """
    offset = least * np.arange(len(heights))
    blocks: list[tuple[float, int]] = []
    for wanted in heights - offset:
        mean, count = float(wanted), 1
        while blocks and blocks[-1][0] > mean:
            above, more = blocks.pop()
            mean, count = (mean * count + above * more) / (count + more), count + more
        blocks.append((mean, count))
    shift = np.repeat([mean for mean, _ in blocks], [count for _, count in blocks])
    return np.asarray(offset + shift, dtype=np.float64)
