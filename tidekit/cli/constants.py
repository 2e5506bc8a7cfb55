"""`tidekit constants`: harmonic analysis of one record."""

from __future__ import annotations

import argparse
import math
from dataclasses import asdict
from typing import Any, get_args

from tidekit.cli.output import add_output_options, add_reading_options, print_json, reading_options, write_table
from tidekit.constituents.catalogue import resolve_names
from tidekit.constituents.constants import NodalConvention
from tidekit.constituents.constants_table import constants_frame, read_constants
from tidekit.constituents.resolution import Companion, companions_from, resolvable
from tidekit.harmonic.analysis import analyse_record
from tidekit.records.record import GaugeRecord
from tidekit.records.source import open_source


def add_parser(commands: Any) -> None:
    """Add the command to the parser."""
    parser = commands.add_parser(
        "constants",
        help="harmonic analysis: amplitudes and phase lags with their errors",
        description="Fit mean level and constituents to a record by least squares, with nodal modulation exact in time "
        "and errors from the residual's spectrum. Close companions that a short record cannot part are inferred.",
        epilog="example: tidekit constants sample_series/network.toml:avelhead --out avelhead_constants.csv",
    )
    parser.add_argument("source", metavar="SOURCE", help="an export, or NETWORK.toml:gauge_id")
    parser.add_argument("--constituents", nargs="+", metavar="NAME", help="fit these, such as M2 S2 '2*M2 + S2'")
    parser.add_argument("--trend", action="store_true", help="fit a linear trend too")
    parser.add_argument(
        "--nodal", choices=get_args(NodalConvention), default="exact", help="nodal convention (default exact)"
    )
    parser.add_argument(
        "--reference",
        metavar="CONSTANTS",
        help="infer close companions from this table of a gauge whose tide is alike, not from the equilibrium tide",
    )
    add_reading_options(parser)
    add_output_options(parser, table="the constants")
    parser.set_defaults(run=run)


def run(options: argparse.Namespace) -> int:
    """Analyse the record."""
    record = open_source(options.source, **reading_options(options))
    fitted, companions = _chosen(record, options)
    fit = analyse_record(record, constituents=fitted, infer=companions, trend=options.trend, nodal=options.nodal)
    frame = constants_frame(fit.constants, record.station.id)
    if options.out:
        write_table(frame, options.out)
    if options.json:
        print_json(
            {
                "gauge": record.station.id,
                "samples": len(fit.t_h),
                "span_days": fit.span_days,
                "residual_sd_m": fit.residual_sd_m,
                "trend_m_per_year": fit.trend_m_per_year if options.trend else None,
                "trend_sd_m_per_year": fit.trend_sd_m_per_year if math.isfinite(fit.trend_sd_m_per_year) else None,
                "condition_number": fit.condition_number,
                "close_pairs": [asdict(pair) for pair in fit.close_pairs],
                "constants": frame,
            }
        )
    else:
        print(fit.summary())
        if options.out:
            print(f"Written: {options.out}")
    return 0


def _chosen(
    record: GaugeRecord, options: argparse.Namespace
) -> tuple[tuple[str, ...] | None, tuple[Companion, ...] | None]:
    """Constituents to fit and to infer; None leaves the choice to the analyser."""
    fitted = resolve_names(options.constituents) if options.constituents else None
    if options.reference is None or len(record.times_h) < 2:
        return fitted, None
    reference = read_constants(options.reference)
    span_h = float(record.times_h[-1] - record.times_h[0]) + record.step_h
    fitted = fitted or resolvable(span_h, step_h=record.step_h)
    return fitted, companions_from(reference, fitted, span_h, source=str(options.reference))
