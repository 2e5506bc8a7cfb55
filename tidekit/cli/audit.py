"""`tidekit audit`: all of it for a network, with findings, a page and an exit code."""

from __future__ import annotations

import argparse
import contextlib
import sys
from collections.abc import Iterator
from pathlib import Path
from typing import Any

from tidekit.audit.execute import Progress, run_audit
from tidekit.audit.outputs import audit_document, check_folder, write_audit
from tidekit.audit.result import Audit
from tidekit.cli.main import CAUTION, EXIT_DONE, EXIT_FINDINGS
from tidekit.cli.output import print_json
from tidekit.quality.findings import SEVERITIES
from tidekit.records.network_file import read_network
from tidekit.report.page import report_page
from tidekit.report.words import size_in_words


def add_parser(commands: Any) -> None:
    """Add the command to the parser."""
    parser = commands.add_parser(
        "audit",
        help="audit a whole network: constants, datums, wave, findings, report",
        description="Read every gauge of a network, fit its tide, measure the wave along the coast, and name the "
        "gauges that break it. Leaves constants.csv, datums.csv, propagation.csv, findings.csv, audit.json and "
        "report.html.",
        epilog="example: tidekit audit sample_series/network.toml --out audit_out. Exit code 1: there are findings "
        "at or above --fail-on.",
    )
    parser.add_argument("network", metavar="NETWORK", type=Path, help="network file (TOML)")
    parser.add_argument("--out", metavar="DIR", type=Path, required=True, help="folder for the six files")
    parser.add_argument(
        "--fail-on",
        choices=SEVERITIES,
        help="mildest finding that makes the exit code 1 (default: the network file's fail_on, else error)",
    )
    parser.add_argument("--json", action="store_true", help="print audit.json too, and nothing else")
    parser.set_defaults(run=run)


def run(options: argparse.Namespace) -> int:
    """Audit the network."""
    network = read_network(options.network)
    check_folder(options.out)
    with _progress() as progress:
        audit = run_audit(network, progress=progress)
        progress("the page")
        files = write_audit(audit, options.out, page=report_page(audit))
    if options.json:
        print_json(audit_document(audit))
    else:
        print(_text(audit))
        print(f"\nWritten: {', '.join(path.name for path in files)} in {options.out}")
        print(CAUTION)
    return EXIT_FINDINGS if audit.worst_at_least(options.fail_on or network.settings.fail_on) else EXIT_DONE


@contextlib.contextmanager
def _progress() -> Iterator[Progress]:
    """Show what is being done in one line of the terminal, wiped at the end whatever happens; elsewhere nothing."""
    if not sys.stderr.isatty():
        yield lambda _: None
        return
    try:
        yield lambda text: print(f"\r\033[K{text} ...", end="", file=sys.stderr, flush=True)
    finally:
        print("\r\033[K", end="", file=sys.stderr, flush=True)


def _text(audit: Audit) -> str:
    verdict = audit.measure.propagation.verdict
    count = len(audit.gauges)
    lines = [f"{audit.network.name}: {count} gauge{'s' if count > 1 else ''}"]
    lines.append(f"Wave: {verdict.word}: {verdict.evidence}.")
    lines.append(f"Findings: {len(audit.findings)}" + (", the gravest first" if audit.findings else ""))
    gauges = max((len(finding.gauge) for finding in audit.findings), default=0)
    kinds = max((len(finding.kind) for finding in audit.findings), default=0)
    for finding in audit.findings:
        size = size_in_words(finding).replace("±", "+-")  # every terminal has these
        lines.append(f"  {finding.severity:<8}{finding.gauge:<{gauges}}  {finding.kind:<{kinds}}  {size}".rstrip())
        lines.append(f"          {finding.evidence}.")
    return "\n".join(lines)
