"""The report: one self-contained HTML page, the verdict first."""

from __future__ import annotations

from importlib.resources import files

from tidekit.audit.outputs import CAUTION
from tidekit.audit.result import Audit
from tidekit.report.html_parts import escape, sentence
from tidekit.report.page_findings import counted, findings_section
from tidekit.report.page_levels import levels_section, residuals_section, run_section, tables_section
from tidekit.report.page_wave import gauges_section, wave_section
from tidekit.report.words import VERDICTS

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
    name = escape(audit.network.name)
    parts = [
        _head(audit),
        _verdict(audit),
        findings_section(audit),
        gauges_section(audit),
        wave_section(audit),
        residuals_section(audit),
        levels_section(audit),
        tables_section(audit),
        run_section(audit),
    ]
    body = "\n".join(part for part in parts if part)
    return (
        '<!DOCTYPE html>\n<html lang="en">\n<head>\n<meta charset="utf-8">\n'
        '<meta name="viewport" content="width=device-width, initial-scale=1">\n'
        f"<title>{name}: gauge audit</title>\n<style>{_STYLE}</style>\n</head>\n<body>\n<main>\n{body}\n</main>\n"
        f"<footer>{_caution()}</footer>\n</body>\n</html>\n"
    )


def _head(audit: Audit) -> str:
    day, clock = audit.started_utc[:10], audit.started_utc[11:16]
    return (
        f"<header><h1>{escape(audit.network.name)}</h1>\n"
        f'<p class="quiet">Audit of {len(audit.gauges)} gauge{"s" if len(audit.gauges) > 1 else ""} by tidekit '
        f"{escape(audit.versions['tidekit'])}, {escape(day)} {escape(clock)} UTC</p>\n{_caution()}</header>"
    )


def _caution() -> str:
    return f'<p class="caution" role="note"><strong>Caution.</strong> {escape(CAUTION)}</p>'


def _verdict(audit: Audit) -> str:
    verdict = audit.measure.propagation.verdict
    gauges = {finding.gauge for finding in audit.findings}
    where = f" at {len(gauges)} of {len(audit.gauges)} gauges" if gauges else ""
    return (
        f'<section class="verdict {verdict.word}" aria-label="Verdict"><h2>{VERDICTS[verdict.word]}</h2>'
        f"<p><strong>Wave: {verdict.word}.</strong> {sentence(verdict.evidence)}</p>"
        f"<p><strong>Findings:</strong> {counted(audit.findings)}{where}.</p></section>"
    )
