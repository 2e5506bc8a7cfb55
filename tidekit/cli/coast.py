"""`tidekit coast`: propagation along a coast and across it, tested against the boundary wave."""

from __future__ import annotations

import argparse
import math
from pathlib import Path
from typing import Any

from tidekit.audit.execute import measure_gauges
from tidekit.cli.main import CAUTION, EXIT_DONE, EXIT_FINDINGS
from tidekit.cli.output import add_output_options, print_json, write_table
from tidekit.network.measure import NetworkMeasure
from tidekit.quality.findings import SEVERITIES, findings_frame
from tidekit.records.network_file import read_network


def add_parser(commands: Any) -> None:
    """Add the command to the parser."""
    parser = commands.add_parser(
        "coast",
        help="speed along the coast and decay across it, against the boundary wave",
        description="Fit the tide at every gauge of a network and measure the wave: its speed and direction along the "
        "coast, its decay offshore, and whether both are those of a boundary (Kelvin) wave.",
        epilog="example: tidekit coast sample_series/network.toml",
    )
    parser.add_argument("network", metavar="NETWORK", type=Path, help="network file (TOML)")
    parser.add_argument("--fail-on", choices=SEVERITIES, help="mildest finding that gives exit code 1 (default error)")
    add_output_options(parser, table="propagation.csv")
    parser.set_defaults(run=run)


def run(options: argparse.Namespace) -> int:
    """Measure the wave."""
    network = read_network(options.network)
    measure = measure_gauges(network)
    frame = measure.propagation.to_frame()
    if options.out:
        write_table(frame, options.out)
    if options.json:
        fit = measure.propagation
        print_json(
            {
                "verdict": fit.verdict.word,
                "evidence": fit.verdict.evidence,
                "gauges": {gauge: bool(used) for gauge, used in zip(fit.tides.ids, fit.used, strict=True)},
                "dispersion_p": fit.dispersion_p,
                "propagation": frame,
                "findings": findings_frame(measure.findings),
                "caution": CAUTION,
            }
        )
    else:
        print(_text(measure))
        print(CAUTION)
    level = SEVERITIES.index(options.fail_on or network.settings.fail_on)
    grave = any(SEVERITIES.index(finding.severity) >= level for finding in measure.findings)
    return EXIT_FINDINGS if grave else EXIT_DONE


def _text(measure: NetworkMeasure) -> str:
    fit = measure.propagation
    lines = [
        f"{'group':<8}{'toward':>8}{'speed':>9}{'low':>8}{'high':>8}{'theory':>8}{'ratio':>8}{'theory':>8}  verdict"
    ]
    lines.append(f"{'':<8}{'deg':>8}{'m/s':>9}{'m/s':>8}{'m/s':>8}{'m/s':>8}{'':>8}{'':>8}")
    for group in fit.groups:
        low, high = group.speed_interval_m_per_s
        numbers = [
            _number(group.direction_deg, 8, 0),
            _number(group.speed_m_per_s, 9, 1),
            _number(low, 8, 1),
            _number(high, 8, 1),
            _number(group.theory_speed_m_per_s, 8, 1),
            _number(group.cross_shore_ratio, 8, 3),
            _number(group.theory_cross_shore_ratio, 8, 3),
        ]
        lines.append(f"{group.group:<8}{''.join(numbers)}  {group.verdict.word}")
    out = [gauge for gauge, used in zip(fit.tides.ids, fit.used, strict=True) if not used]
    lines.append(f"\nVerdict: {fit.verdict.word}: {fit.verdict.evidence}.")
    if measure.theory:
        lines.append(f"Theory: {measure.theory.depth_note}.")
    if out:
        lines.append(f"Gauges off the wave, left out of the speed: {', '.join(out)}.")
    lines += [
        f"{f.severity}: {f.gauge}: {f.kind} {f.value:+.4g} +- {f.value_sd:.2g} {f.unit}: {f.evidence}."
        for f in measure.findings
    ]
    return "\n".join(lines)


def _number(value: float, width: int, digits: int) -> str:
    text = "-" if math.isnan(value) else "inf" if math.isinf(value) else f"{value:.{digits}f}"
    return f"{text:>{width}}"
