"""Part of the page: where the gauges are, and the wave they tell of; each picture with its answer in a sentence."""

from __future__ import annotations

import math

from tidekit.audit.result import Audit
from tidekit.audit.summary import gauges_table
from tidekit.network.measure import NetworkMeasure
from tidekit.network.propagation import GroupFit
from tidekit.report.figures_map import draw_map
from tidekit.report.figures_wave import draw_amplitude_across, draw_phase_along_coast
from tidekit.report.html_parts import Column, escape, figure, sentence, table
from tidekit.report.pictures import svg_picture
from tidekit.report.words import KINDS

_GAUGES: tuple[Column, ...] = (
    ("name", "gauge", "text"),
    ("wrong", "errors", "text"),
    ("along_coast_km", "along [km]", ".0f"),
    ("offshore_km", "offshore [km]", ".0f"),
    ("days", "record", "text"),
    ("coverage", "coverage", ".1%"),
    ("m2_amplitude_m", "M2 [m]", ".3f"),
    ("m2_phase_lag_deg", "M2 lag [deg]", ".1f"),
    ("residual_sd_m", "residual sd [m]", ".3f"),
    ("form_number", "form number", ".2f"),
)
_GROUPS: tuple[Column, ...] = (
    ("group", "group", "text"),
    ("direction_deg", "toward [deg]", ".0f"),
    ("speed_m_per_s", "speed [m/s]", ".2f"),
    ("speed_low_m_per_s", "low", ".2f"),
    ("speed_high_m_per_s", "high", ".2f"),
    ("theory_speed_m_per_s", "sqrt(g h) [m/s]", ".2f"),
    ("cross_shore_ratio", "ratio offshore", ".3f"),
    ("cross_shore_ratio_sd", "sd", ".3f"),
    ("theory_cross_shore_ratio", "exp(-x f/c)", ".3f"),
    ("verdict", "verdict", "text"),
)


def gauges_section(audit: Audit) -> str:
    """Give the gauges at a glance, a row each; names lead to their findings."""
    frame = gauges_table(audit)
    frame["wrong"] = [", ".join(KINDS[kind] for kind in errors.split()) for errors in frame["errors"]]
    frame["days"] = [
        f"{first[:10]} to {last[:10]}" if first and last else "constants given"
        for first, last in zip(frame["first_utc"], frame["last_utc"], strict=True)
    ]
    accused = {finding.gauge for finding in audit.findings}
    links = {gauge.station.label: f"gauge-{gauge.station.id}" for gauge in audit.gauges if gauge.station.id in accused}
    caption = "The gauges: times in UTC; heights and phases as recorded, faults included"
    return "<h2>The gauges</h2>\n" + table(frame, _GAUGES, caption=caption, links=links)


def wave_section(audit: Audit) -> str:
    """Give the map, the phases along the coast, the amplitudes across it, and the table of constituents."""
    measure, together = audit.measure, audit.measure.propagation.groups[-1]
    faulty = {finding.gauge for finding in audit.findings if finding.severity == "error"}
    stations = [gauge.station for gauge in audit.gauges]
    place = svg_picture(
        lambda axes: draw_map(stations, audit.network.coast, faulty, axes, travels_toward_deg=together.direction_deg),
        label=f"Map of the {len(stations)} gauges",
        width=4.8,
        height=5.6,
        trimmed=True,
    )
    if measure.propagation.delay_fit is None:
        return (
            f'<h2>The wave</h2>\n<div class="pair">{figure(place, _where(audit))}<p>{_way(audit, together)}</p></div>'
        )
    along = svg_picture(
        lambda axes: draw_phase_along_coast(measure, axes), label="Phase lag against distance along the coast"
    )
    caption = f"The wave, constituent by constituent; intervals at {100 * measure.propagation.confidence:.0f} %"
    return (
        f'<h2>The wave</h2>\n<div class="pair">{figure(place, _where(audit))}<div>'
        f"{figure(along, _way(audit, together))}{_across(measure, together)}</div></div>"
        + table(measure.propagation.to_frame(), _GROUPS, caption=caption)
    )


def _across(measure: NetworkMeasure, together: GroupFit) -> str:
    if not math.isfinite(together.cross_shore_ratio):
        return f"<p>{_hold(together)}</p>"
    picture = svg_picture(
        lambda axes: draw_amplitude_across(measure, axes),
        label="Amplitude relative to the coast against distance offshore",
        height=3.4,
    )
    return figure(picture, _hold(together))


def _where(audit: Audit) -> str:
    outside = sum(not gauge.station.open_coast for gauge in audit.gauges)
    inner = f" Squares, {outside} of them, stand in inner waters and do not enter the wave fit." if outside else ""
    count = len(audit.gauges)
    line = "; the line joins those on the coast and is no shoreline" if count > 1 else ""
    return f"<strong>Where are the gauges?</strong> {count} gauge{'s' if count > 1 else ''}{line}.{inner}"


def _way(audit: Audit, together: GroupFit) -> str:
    question = "<strong>Where does the tide go?</strong> "
    fit, theory = audit.measure.propagation, audit.measure.theory
    if fit.delay_fit is None or not math.isfinite(together.speed_m_per_s):
        return question + sentence(fit.verdict.evidence)
    low, high = together.speed_interval_m_per_s
    ends = f"{low:.1f} m/s or more" if math.isinf(high) else f"{low:.1f} to {high:.1f} m/s"
    toward = f"toward {together.direction_deg:.0f} deg " if math.isfinite(together.direction_deg) else ""
    travels = "Undetermined; most likely it travels" if together.verdict.word == "undetermined" else "It travels"
    off = [name for name, used in zip(fit.tides.ids, fit.used, strict=True) if not used]
    return (
        f"{question}{travels} {toward}at {together.speed_m_per_s:.1f} m/s ({ends})"
        + ("" if theory is None else f"; theory {theory.wave.speed_m_per_s:.1f} m/s ({escape(theory.depth_note)})")
        + (f". Off the line, hollow: {escape(', '.join(off))}." if off else ". Every gauge agrees.")
    )


def _hold(together: GroupFit) -> str:
    question = "<strong>How tightly is it held to the coast?</strong> "
    if not math.isfinite(together.cross_shore_ratio):
        return question + "No gauge stands offshore to tell."
    theory = together.theory_cross_shore_ratio
    expected = f"; exp(-x f/c) leaves {theory:.3f}" if math.isfinite(theory) else ""
    return (
        f"{question}At the farthest gauge offshore {together.cross_shore_ratio:.3f} ± "
        f"{together.cross_shore_ratio_sd:.3f} of the coast's amplitude is left{expected}."
    )
