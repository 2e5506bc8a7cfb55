"""Pieces of HTML; whatever comes from an input file is escaped here."""

from __future__ import annotations

import html
import math
from collections.abc import Mapping, Sequence

import pandas as pd

Column = tuple[str, str, str]
"""Column of a frame, its heading, and how to print it: a format such as `.3f`, or `text`."""


def escape(text: object) -> str:
    """Text that a browser shows as it is."""
    return html.escape(str(text))


def sentence(text: str) -> str:
    """Evidence as a sentence: capital letter, full stop, minus signs; escaped."""
    ended = text[:1].upper() + text[1:] + ("" if text.endswith(".") else ".")
    return escape(ended)


def figure(picture: str, caption: str) -> str:
    """Picture with its caption, which may hold HTML of our own."""
    return f"<figure>{picture}<figcaption>{caption}</figcaption></figure>"


def folded(summary: str, content: str) -> str:
    """Content that opens on a click or a key; in print it is as one left it."""
    return f"<details><summary>{escape(summary)}</summary>{content}</details>"


def table(
    frame: pd.DataFrame, columns: Sequence[Column], *, caption: str, links: Mapping[str, str] | None = None
) -> str:
    """Table of some columns of a frame.

    Parameters
    ----------
    frame : DataFrame
        Rows.
    columns : sequence of Column
        What to show, in order. The first heads its row.
    caption : str
        What the table holds, said above it.
    links : mapping, optional
        Anchors on the page, by the text of the first column.

    Returns
    -------
    str
        A table that scrolls by itself where the page is narrow.
    """
    heads = "".join(f'<th scope="col"{_class(_css(form))}>{escape(head)}</th>' for _, head, form in columns)
    rows = []
    for record in frame.to_dict(orient="records"):
        cells = []
        for n, (name, _, form) in enumerate(columns):
            text = cell(record[name], form)
            if n == 0:
                anchor = (links or {}).get(str(record[name]))
                shown = f'<a href="#{escape(anchor)}">{text}</a>' if anchor else text
                cells.append(f'<th scope="row"{_class(_css(form))}>{shown}</th>')
            else:
                cells.append(f"<td{_class(_css(form))}>{text}</td>")
        rows.append(f"<tr>{''.join(cells)}</tr>")
    return (
        f'<div class="table" role="region" tabindex="0" aria-label="{escape(caption)}"><table>'
        f"<caption>{escape(caption)}</caption><thead><tr>{heads}</tr></thead><tbody>{''.join(rows)}</tbody></table></div>"
    )


def cell(value: object, form: str) -> str:
    """Value as a cell shows it: empty where there is none; escaped."""
    if value is None or (isinstance(value, float) and math.isnan(value)):
        return ""
    if form == "text":
        return escape(value)
    if isinstance(value, float) and math.isinf(value):
        return "no limit"
    return escape(format(value, form)).replace("-", "−")


def _css(form: str) -> str:
    return "text" if form == "text" else ""


def _class(css: str) -> str:
    return f' class="{css}"' if css else ""
