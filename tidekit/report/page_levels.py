"""Part of the page: residuals, datum ladders, tables to look things up in, and what the run was made from."""

from __future__ import annotations

import numpy as np
import pandas as pd

from tidekit.audit.outputs import audit_tables
from tidekit.audit.result import Audit, GaugeAudit
from tidekit.report.figures_levels import draw_datum_ladder, draw_residuals
from tidekit.report.html_parts import Column, escape, figure, folded, table
from tidekit.report.pictures import svg_picture
from tidekit.report.words import KINDS, in_full

_CONSTANTS: tuple[Column, ...] = (
    ("constituent", "constituent", "text"),
    ("speed_deg_per_h", "speed [deg/h]", ".7f"),
    ("amplitude_m", "amplitude [m]", ".4f"),
    ("amplitude_sd_m", "sd", ".4f"),
    ("phase_lag_deg", "phase lag [deg]", ".2f"),
    ("phase_lag_sd_deg", "sd", ".2f"),
    ("basis", "basis", "text"),
)
_TIMES = ("clock_offset", "clock_drift", "time_zone")
"""Kinds of error that leave heights alone."""
_DATUMS: tuple[Column, ...] = (
    ("datum", "datum", "text"),
    ("height_m", "height [m]", ".3f"),
    ("height_sd_m", "sd", ".3f"),
    ("method", "method", "text"),
)


def residuals_section(audit: Audit) -> str:
    """Give the daily residuals of all gauges on one time axis."""
    fits = {gauge.station.id: gauge.fit for gauge in audit.gauges if gauge.fit is not None}
    if not fits:
        return ""
    faulty = {finding.gauge for finding in audit.findings if finding.severity == "error"}
    picture = svg_picture(
        lambda axes: draw_residuals(fits, faulty, axes),
        label="Daily non-tidal residuals of all gauges on one time axis, gaps left open",
        width=9.0,
        height=1.6 + 0.42 * len(fits),
    )
    usual = 100.0 * float(np.median([np.std(fit.residual_m) for fit in fits.values()]))
    caption = (
        f"<strong>Do the records move together?</strong> The tide leaves {usual:.1f} cm (standard deviation) at the "
        "middle gauge. Weather is shared along a coast; what one gauge does alone is its own. Gaps are open."
    )
    return "<h2>What the tide leaves</h2>\n" + figure(picture, caption)


def levels_section(audit: Audit) -> str:
    """Give a datum ladder for each gauge that has datums."""
    ladders = [_ladder(gauge, audit.errors_of(gauge.station.id)) for gauge in audit.gauges if gauge.datums]
    if not ladders:
        return ""
    return (
        "<h2>The levels</h2>\n<p><strong>What are the levels?</strong> Datums predicted over a nodal cycle from each "
        "gauge's constants, above its own vertical reference, with 95 % intervals shaded. The constants are as "
        f'recorded: the levels of a gauge with an error carry it.</p>\n<div class="ladders">{"".join(ladders)}</div>'
    )


def _ladder(gauge: GaugeAudit, errors: tuple[str, ...]) -> str:
    chosen = next((table for table in gauge.datums if "HAT" in table.names), gauge.datums[0])
    picture = svg_picture(
        lambda axes: draw_datum_ladder(chosen, axes),
        label=f"Datums of {in_full(gauge.station)}",
        width=3.4,
        height=4.4,
    )
    return figure(picture, f"<strong>{escape(gauge.station.label)}</strong>{_warning(errors)}")


def _warning(errors: tuple[str, ...]) -> str:
    """What errors do to levels; a clock moves times, and heights only as far as the day's waters are told apart."""
    if wrong := [KINDS[kind] for kind in errors if kind not in _TIMES]:
        return f': <span class="wrong">do not use ({", ".join(wrong)})</span>'
    return f": levels stand, times do not ({', '.join(KINDS[kind] for kind in errors)})" if errors else ""


def tables_section(audit: Audit) -> str:
    """Give constants and datums, a folded table a gauge."""
    tables = audit_tables(audit)
    parts = ["<h2>Tables</h2>"]
    for gauge in audit.gauges:
        constants, datums = (
            frame[frame["gauge"] == gauge.station.id] for frame in (tables["constants.csv"], tables["datums.csv"])
        )
        label, errors = gauge.station.label, audit.errors_of(gauge.station.id)
        note = f" (wrong: {', '.join(KINDS[kind] for kind in errors)})" if errors else ""
        if len(constants):
            shown = table(constants, _CONSTANTS, caption=f"Harmonic constants of {label}{note}; phase lags for UTC")
            parts.append(folded(f"{label}: {len(constants)} harmonic constants{note}", shown))
        if len(datums):
            above = gauge.station.vertical_reference or "the record's zero"
            shown = table(datums, _DATUMS, caption=f"Datums of {label}{note}, above {above}")
            parts.append(folded(f"{label}: {len(datums)} datums{note}", shown))
    return "\n".join(parts)


def run_section(audit: Audit) -> str:
    """Give what became of every row, the inputs with their fingerprints, and the versions."""
    ledgers = pd.DataFrame(
        [
            {
                "gauge": gauge.station.label,
                "rows": gauge.record.ledger.rows,
                "kept": gauge.record.ledger.kept,
                "flagged": gauge.record.ledger.flagged,
                "rejected": len(gauge.record.ledger.rejected),
                "layout": gauge.record.layout_name,
            }
            for gauge in audit.gauges
            if gauge.record is not None
        ]
    )
    counts: tuple[Column, ...] = (
        ("gauge", "gauge", "text"),
        ("rows", "rows", "d"),
        ("kept", "kept", "d"),
        ("flagged", "missing", "d"),
        ("rejected", "rejected", "d"),
        ("layout", "layout", "text"),
    )
    inputs = pd.DataFrame([{"path": source.path, "sha256": source.sha256} for source in audit.inputs])
    named: tuple[Column, ...] = (("path", "file", "text"), ("sha256", "SHA-256", "text"))
    versions = ", ".join(f"{name} {version}" for name, version in audit.versions.items())
    rows = (
        folded("What became of every row", table(ledgers, counts, caption="Rows of the exports"))
        if len(ledgers)
        else ""
    )
    return (
        f"<h2>The run</h2>\n{rows}\n"
        + folded("Inputs and their SHA-256", table(inputs, named, caption="Files that were read"))
        + f'\n<p class="quiet">{escape(versions)}</p>'
    )
