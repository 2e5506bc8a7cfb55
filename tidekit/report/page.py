"""The report: one self-contained HTML page, the verdict first."""

from __future__ import annotations

import html
import math
from importlib.resources import files

import pandas as pd

from tidekit.audit.outputs import CAUTION, audit_tables
from tidekit.audit.result import Audit
from tidekit.quality.findings import Finding
from tidekit.report.figures_levels import draw_datum_ladder, draw_residuals
from tidekit.report.figures_network import (
    draw_amplitude_across,
    draw_gain_fingerprint,
    draw_map,
    draw_phase_along_coast,
    draw_phase_fingerprint,
)
from tidekit.report.pictures import svg_picture
from tidekit.report.words import ADVICE, KINDS, VERDICTS

_STYLE = files("tidekit.report").joinpath("page.css").read_text(encoding="utf-8")


def report_page(audit: Audit) -> str:
    """Make the page of an audit.

    Parameters
    ----------
    audit : Audit
        The run.

    Returns
    -------
    str
        HTML that needs no other file: styles and pictures stand inside it, and no script.
    """
    name = html.escape(audit.network.name)
    parts = [
        f"<h1>{name}</h1>",
        f'<p class="quiet">Audit of {len(audit.gauges)} gauges, {html.escape(audit.started_utc)}</p>',
        _caution(),
        _verdict(audit),
        _findings(audit),
        _wave(audit),
        _gauges(audit),
        _levels(audit),
        _tables(audit),
        _run(audit),
        _caution(),
    ]
    body = "\n".join(part for part in parts if part)
    return (
        '<!DOCTYPE html>\n<html lang="en">\n<head>\n<meta charset="utf-8">\n'
        '<meta name="viewport" content="width=device-width, initial-scale=1">\n'
        f"<title>{name}: gauge audit</title>\n<style>{_STYLE}</style>\n</head>\n<body>\n{body}\n</body>\n</html>\n"
    )


def _caution() -> str:
    return f'<p class="caution" role="note"><strong>Caution.</strong> {html.escape(CAUTION)}</p>'


def _verdict(audit: Audit) -> str:
    verdict = audit.measure.propagation.verdict
    return (
        f'<section class="verdict {verdict.word}"><h2 style="margin-top:0">{VERDICTS[verdict.word]}</h2>'
        f"<p>{html.escape(_sentence(verdict.evidence))}</p></section>"
    )


def _findings(audit: Audit) -> str:
    if not audit.findings:
        return "<h2>Findings</h2><p>None: no gauge departs from what the others and its own record lead to expect.</p>"
    blocks = "\n".join(_finding(finding, audit) for finding in audit.findings)
    return f"<h2>Findings, the gravest first</h2>\n{blocks}"


def _finding(finding: Finding, audit: Audit) -> str:
    label = next((g.station.label for g in audit.gauges if g.station.id == finding.gauge), finding.gauge)
    size = ""
    if math.isfinite(finding.value):
        spread = f" ± {finding.value_sd:.2g}" if math.isfinite(finding.value_sd) else ""
        size = f": {finding.value:+.4g}{spread} {finding.unit}".rstrip()
    return (
        f'<article class="finding {finding.severity}"><h3><span class="mark">{finding.severity}</span> '
        f"{html.escape(label)}, {KINDS[finding.kind]}{size}</h3>"
        f"<p>{html.escape(_sentence(finding.evidence))}</p>"
        f'<p class="quiet">{ADVICE[finding.kind]}</p></article>'
    )


def _wave(audit: Audit) -> str:
    measure = audit.measure
    along = svg_picture(
        [lambda axes: draw_phase_along_coast(measure, axes)], label="Delay of the tide against distance along the coast"
    )
    across = svg_picture(
        [lambda axes: draw_amplitude_across(measure, axes)], label="Amplitude of the tide against distance offshore"
    )
    faulty = {finding.gauge for finding in audit.findings if finding.severity == "error"}
    stations = [gauge.station for gauge in audit.gauges]
    place = svg_picture(
        [lambda axes: draw_map(stations, audit.network.coast, faulty, axes)], label="Map of the gauges", height=5.2
    )
    depth = "" if measure.theory is None else f" Theory: {measure.theory.depth_note}."
    return (
        "<h2>The wave</h2>\n"
        + f'<div class="pair">{_figure(place, "Where are the gauges?")}'
        + _figure(along, f"Where does the tide go? The delay grows in the direction of travel.{depth}")
        + _figure(across, "How tightly is it held to the coast?")
        + "</div>"
        + _table(audit_tables(audit)["propagation.csv"].drop(columns=["evidence"]))
    )


def _gauges(audit: Audit) -> str:
    wanted = {finding.gauge for finding in audit.findings}
    prints = [print_ for print_ in audit.measure.fingerprints if print_.gauge in wanted]
    figures = [
        _figure(
            svg_picture(
                [lambda axes, p=p: draw_phase_fingerprint(p, axes), lambda axes, p=p: draw_gain_fingerprint(p, axes)],  # type: ignore[misc]
                label=f"Fingerprint of {p.gauge}",
                width=7.2,
                height=3.0,
            ),
            "What is wrong with this gauge? A line through zero is a clock; a level off one is a gain or a unit.",
        )
        for p in prints
    ]
    fits = {gauge.station.id: gauge.fit for gauge in audit.gauges if gauge.fit is not None}
    if fits:
        faulty = {finding.gauge for finding in audit.findings if finding.severity == "error"}
        strips = svg_picture(
            [lambda axes: draw_residuals(fits, faulty, axes)],
            label="Daily non-tidal residuals of all gauges",
            width=9.0,
            height=1.6 + 0.42 * len(fits),
        )
        figures.append(_figure(strips, "Do the records move together? Weather is shared; a step or a drift is not."))
    return "<h2>The gauges</h2>\n" + "\n".join(figures) if figures else ""


def _levels(audit: Audit) -> str:
    ladders = []
    for gauge in audit.gauges:
        tables = [table for table in gauge.datums if "HAT" in table.names] or list(gauge.datums)
        if tables:
            table = tables[0]
            ladders.append(
                svg_picture(
                    [lambda axes, t=table: draw_datum_ladder(t, axes)],  # type: ignore[misc]
                    label=f"Datums of {gauge.station.id}",
                    width=3.4,
                    height=4.4,
                )
            )
    if not ladders:
        return ""
    cells = "".join(f"<figure>{ladder}</figure>" for ladder in ladders)
    return (
        "<h2>The levels</h2>\n<p>Predicted datums with 95 % intervals. Datums of a gauge with an error carry that "
        f'error.</p><div class="three">{cells}</div>'
    )


def _tables(audit: Audit) -> str:
    tables = audit_tables(audit)
    return (
        "<h2>Tables</h2>\n"
        f"<details><summary>Harmonic constants</summary>{_table(tables['constants.csv'])}</details>\n"
        f"<details><summary>Datums</summary>{_table(tables['datums.csv'])}</details>"
    )


def _run(audit: Audit) -> str:
    rows = "".join(
        f'<tr><td class="text"><code>{html.escape(source.path)}</code></td>'
        f'<td class="text"><code>{source.sha256}</code></td></tr>'
        for source in audit.inputs
    )
    ledgers = "".join(
        f'<tr><td class="text">{html.escape(gauge.station.label)}</td><td>{gauge.record.ledger.rows}</td>'
        f"<td>{gauge.record.ledger.kept}</td><td>{gauge.record.ledger.flagged}</td>"
        f"<td>{len(gauge.record.ledger.rejected)}</td>"
        f'<td class="text">{html.escape(gauge.record.layout_name)}</td></tr>'
        for gauge in audit.gauges
        if gauge.record is not None
    )
    versions = ", ".join(f"{name} {version}" for name, version in audit.versions.items())
    return (
        "<h2>The run</h2>\n"
        '<details><summary>What became of every row</summary><div class="table"><table><tr><th class="text">gauge</th>'
        '<th>rows</th><th>kept</th><th>missing</th><th>rejected</th><th class="text">layout</th></tr>'
        f"{ledgers}</table></div></details>\n"
        '<details><summary>Inputs and their SHA-256</summary><div class="table"><table>'
        f"{rows}</table></div></details>\n"
        f'<p class="quiet">{html.escape(versions)}</p>'
    )


def _figure(picture: str, caption: str) -> str:
    return f"<figure>{picture}<figcaption>{html.escape(caption)}</figcaption></figure>"


def _sentence(text: str) -> str:
    return text[:1].upper() + text[1:] + ("" if text.endswith(".") else ".")


def _table(frame: pd.DataFrame) -> str:
    texts = set(frame.select_dtypes(exclude="number").columns)
    head = "".join(f"<th{_kind(column in texts)}>{html.escape(column)}</th>" for column in frame.columns)
    rows = "".join(
        "<tr>"
        + "".join(
            f"<td{_kind(column in texts)}>{_cell(value)}</td>" for column, value in zip(frame.columns, row, strict=True)
        )
        + "</tr>"
        for row in frame.itertuples(index=False)
    )
    return f'<div class="table"><table><tr>{head}</tr>{rows}</table></div>'


def _kind(text: bool) -> str:
    return ' class="text"' if text else ""


def _cell(value: object) -> str:
    if isinstance(value, float):
        return "" if math.isnan(value) else "no limit" if math.isinf(value) else f"{value:.7g}"
    return html.escape(str(value))
