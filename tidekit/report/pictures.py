"""Figures as SVG text that stands inside a page."""

from __future__ import annotations

import html
import io
import re
import zlib
from collections.abc import Callable

from matplotlib import rc_context
from matplotlib.axes import Axes
from matplotlib.backends.backend_svg import FigureCanvasSVG
from matplotlib.figure import Figure

from tidekit.report.style import MUTED

Draw = Callable[[Axes], Axes]


def svg_picture(draw: Draw, *, label: str, width: float = 6.4, height: float = 4.2, trimmed: bool = False) -> str:
    """Draw a figure as one SVG element.

    Parameters
    ----------
    draw : callable
        Draws on the `Axes` it is given.
    label : str
        What the picture shows, for those who cannot see it.
    width, height : float
        Size of the whole. [inches]
    trimmed : bool
        Cut off the empty margins that a fixed aspect leaves.

    Returns
    -------
    str
        An ``<svg>`` element with a label, which scales to the column it stands in.
    """
    with rc_context({"font.size": 9, "svg.fonttype": "none", "svg.hashsalt": "tidekit"}):
        figure = Figure(figsize=(width, height), layout="constrained")
        FigureCanvasSVG(figure)
        draw(figure.subplots())
        # A picture may be copied out of its page: the caution goes with it.
        figure.supxlabel("not for navigation", x=0.995, ha="right", fontsize=6, color=MUTED)
        stream = io.StringIO()
        box = "tight" if trimmed else None
        figure.savefig(stream, format="svg", bbox_inches=box, metadata={"Date": None, "Creator": None})
    text = stream.getvalue()
    element = text[text.index("<svg") :]
    # Several pictures share a page: what one defines must not answer to another's name.
    prefix = f"p{zlib.crc32(label.encode()):08x}-"
    element = re.sub(r'(id="|url\(#|xlink:href="#)', lambda found: found[1] + prefix, element)
    head = f'<svg role="img" aria-label="{html.escape(label, quote=True)}" '
    element = re.sub(r"<svg\b", head.rstrip(), element, count=1)
    return re.sub(r' (width|height)="[\d.]+pt"', "", element, count=2)
