"""Figures as SVG text that stands inside a page."""

from __future__ import annotations

import html
import io
import re
import zlib
from collections.abc import Callable, Sequence

from matplotlib import rc_context
from matplotlib.axes import Axes
from matplotlib.backends.backend_svg import FigureCanvasSVG
from matplotlib.figure import Figure

Draw = Callable[[Axes], Axes]


def svg_picture(draws: Sequence[Draw], *, label: str, width: float = 6.4, height: float = 4.2) -> str:
    """Draw figures side by side as one SVG element.

    Parameters
    ----------
    draws : sequence of callable
        Each draws on the `Axes` it is given.
    label : str
        What the picture shows, for those who cannot see it.
    width, height : float
        Size of the whole. [inches]

    Returns
    -------
    str
        An ``<svg>`` element with a label, which scales to the column it stands in.
    """
    with rc_context({"font.size": 9, "svg.fonttype": "none", "svg.hashsalt": "tidekit"}):
        figure = Figure(figsize=(width, height), layout="constrained")
        FigureCanvasSVG(figure)
        for axes, draw in zip(figure.subplots(1, len(draws), squeeze=False)[0], draws, strict=True):
            draw(axes)
        stream = io.StringIO()
        figure.savefig(stream, format="svg", metadata={"Date": None, "Creator": None})
    text = stream.getvalue()
    element = text[text.index("<svg") :]
    # Several pictures share a page: what one defines must not answer to another's name.
    prefix = f"p{zlib.crc32(label.encode()):08x}-"
    element = re.sub(r'(id="|url\(#|xlink:href="#)', lambda found: found[1] + prefix, element)
    head = f'<svg role="img" aria-label="{html.escape(label, quote=True)}" '
    element = re.sub(r"<svg\b", head.rstrip(), element, count=1)
    return re.sub(r' (width|height)="[\d.]+pt"', "", element, count=2)
