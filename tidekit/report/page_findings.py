"""Part of the page: the findings in order of gravity, each with the picture that shows it and what to do."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass

from tidekit.audit.result import Audit
from tidekit.network.fingerprints import Fingerprint
from tidekit.quality.daily import DailyLevels, against_neighbours, daily_levels
from tidekit.quality.findings import SEVERITIES, Finding
from tidekit.quality.steps import find_steps, season_m
from tidekit.report.figures_faults import draw_gain_fingerprint, draw_phase_fingerprint, draw_step
from tidekit.report.html_parts import escape, figure, sentence
from tidekit.report.pictures import svg_picture
from tidekit.report.words import ADVICE, KINDS, in_full, size_in_words

_FROM_THE_WAVE = ("clock_offset", "time_zone", "unit_scale", "gain", "inverted", "phase_outlier", "amplitude_outlier")
"""Kinds that a fingerprint shows."""


@dataclass(frozen=True, eq=False)
class _Evidence:
    """What the pictures of findings are drawn from."""

    prints: dict[str, Fingerprint]
    gauges: tuple[str, ...]
    levels: DailyLevels | None


def findings_section(audit: Audit) -> str:
    """Give the findings, the gravest first; a gauge's fingerprint stands with the first finding that it shows."""
    if not audit.findings:
        return "<h2>Findings</h2><p>None: no gauge departs from what the others and its own record lead to expect.</p>"
    evidence = _evidence(audit)
    stations = {gauge.station.id: gauge.station for gauge in audit.gauges}
    shown: set[tuple[str, str]] = set()
    blocks = []
    for finding in audit.findings:
        what = "print" if finding.kind in _FROM_THE_WAVE else finding.kind
        first_of_gauge = not any(gauge == finding.gauge for gauge, _ in shown)
        picture = (
            "" if (finding.gauge, what) in shown else _picture(finding, in_full(stations[finding.gauge]), evidence)
        )
        shown.add((finding.gauge, what))
        blocks.append(_block(finding, stations[finding.gauge].label, picture, first_of_gauge=first_of_gauge))
    return "<h2>Findings, the gravest first</h2>\n" + "\n".join(blocks)


def counted(findings: Sequence[Finding]) -> str:
    """How many findings of each severity, in words."""
    counts = Counter(finding.severity for finding in findings)
    parts = [f"{counts[name]} {name}{'s' if counts[name] > 1 else ''}" for name in reversed(SEVERITIES) if counts[name]]
    return ", ".join(parts) or "none"


def _evidence(audit: Audit) -> _Evidence:
    fits = {gauge.station.id: gauge.fit for gauge in audit.gauges if gauge.fit is not None}
    levels = daily_levels([f.t_h for f in fits.values()], [f.residual_m for f in fits.values()]) if fits else None
    return _Evidence({print_.gauge: print_ for print_ in audit.measure.fingerprints}, tuple(fits), levels)


def _block(finding: Finding, label: str, picture: str, *, first_of_gauge: bool) -> str:
    size = size_in_words(finding).replace("-", "\u2212")
    anchor = f' id="gauge-{escape(finding.gauge)}"' if first_of_gauge else ""
    return (
        f'<article class="finding {finding.severity}"{anchor}><h3><span class="mark">{finding.severity}</span> '
        f"{escape(label)}: {KINDS[finding.kind]}{f' {escape(size)}' if size else ''}</h3>"
        f"<p>{sentence(finding.evidence)}</p>"
        f"<p><strong>What to do.</strong> {ADVICE[finding.kind]}</p>{picture}</article>"
    )


def _picture(finding: Finding, label: str, evidence: _Evidence) -> str:
    if finding.kind in _FROM_THE_WAVE and finding.gauge in evidence.prints:
        return _fingerprint(evidence.prints[finding.gauge], label)
    if finding.kind == "datum_step" and evidence.levels is not None and finding.gauge in evidence.gauges:
        return _step(evidence.levels, evidence.gauges.index(finding.gauge), label)
    return ""


def _fingerprint(print_: Fingerprint, label: str) -> str:
    phase = svg_picture(
        lambda axes: draw_phase_fingerprint(print_, axes),
        label=f"Phase residual of {label} against speed",
        width=3.9,
        height=2.7,
    )
    gain = svg_picture(
        lambda axes: draw_gain_fingerprint(print_, axes),
        label=f"Amplitude ratio of {label} against speed",
        width=3.9,
        height=2.7,
    )
    return figure(
        f'<div class="panels">{phase}{gain}</div>',
        "Each point is a constituent against the wave at the other gauges. Phases on a slope through zero: a clock. "
        "Phases on zero: the clock is right. Amplitudes on a level other than one: a unit or a gain.",
    )


def _step(levels: DailyLevels, row: int, label: str) -> str:
    against = against_neighbours(levels, row)
    steps = find_steps(levels.days, against)
    if not steps:
        return ""  # found otherwise than beside neighbours
    plain = against - season_m(levels.days, against, steps)
    picture = svg_picture(
        lambda axes: draw_step(levels.days, plain, steps, axes),
        label=f"Daily level of {label} less what its neighbours share, with the steps found",
        width=7.6,
        height=2.6,
    )
    return figure(
        picture, "Weather that neighbours share and the season are taken off; what remains, this gauge did alone."
    )
