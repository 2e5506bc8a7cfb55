"""`tidekit constants`: harmonic analysis of a record."""

from __future__ import annotations

import argparse
from pathlib import Path

import numpy as np

from tidekit.cli.main import CAUTION, EXIT_DONE
from tidekit.cli.output import add_output_options, add_reading_options, print_json, reading_options
from tidekit.constituents.constants_table import constants_frame, read_constants, write_constants
from tidekit.constituents.resolution import Companion, reference_companions
from tidekit.errors import InputError
from tidekit.harmonic.analysis import analyse_record
from tidekit.harmonic.results import HarmonicFit
from tidekit.records.source import open_source


def add_parser(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Add the command."""
    parser = commands.add_parser(
        "constants",
        help="harmonic analysis: amplitudes and phase lags with their errors",
        description="Fit mean level, constituents and, where asked for, a trend to a record by least squares. "
        "Constituents too close to be parted by the record are inferred and marked so.",
        epilog="example: tidekit constants network.toml:quill --trend --out constants.csv",
    )
    parser.add_argument("source", metavar="SOURCE", help="an export or NETWORK.toml:gauge_id")
    parser.add_argument(
        "--constituents",
        metavar="NAMES",
        help="what to fit, such as M2,S2,N2,K1,O1 (default: all that the record can tell apart)",
    )
    parser.add_argument(
        "--infer", metavar="NAMES", help="constituents to infer instead of fit, such as P1,K2; needs --reference"
    )
    parser.add_argument(
        "--reference", metavar="FILE", type=Path, help="constants of a gauge with a like tide, to infer from"
    )
    parser.add_argument("--reference-gauge", metavar="ID", help="whose rows of it, where it has several gauges")
    parser.add_argument("--no-inference", action="store_true", help="infer nothing by the equilibrium tide's ratios")
    parser.add_argument("--trend", action="store_true", help="fit a linear trend")
    parser.add_argument(
        "--nodal",
        choices=("exact", "mid_year"),
        default="exact",
        help="nodal modulation in time, or held at each mid-year as agencies do (default: %(default)s)",
    )
    parser.add_argument("--summary", action="store_true", help="print the whole summary even where --out is given")
    add_reading_options(parser)
    add_output_options(parser, table="the constants")
    parser.set_defaults(run=run)


def run(options: argparse.Namespace) -> int:
    """Run the command."""
    names = _names(options.constituents)
    companions = _companions(options, names)
    record = open_source(options.source, **reading_options(options))
    fit = analyse_record(record, constituents=names, infer=companions, trend=options.trend, nodal=options.nodal)
    if options.out:
        write_constants(fit.constants, options.out, gauge=record.station.id)
    if options.json:
        print_json(_document(fit, record.station.id))
        return EXIT_DONE
    if options.out:
        print(f"{len(fit.constants.names)} constituents and the mean level in {options.out}")
    if options.summary or not options.out:
        print(f"{record.station.label}\n{fit.summary()}")
    print(CAUTION)
    return EXIT_DONE


def _names(text: str | None) -> tuple[str, ...] | None:
    if text is None:
        return None
    return tuple(name.strip() for name in text.split(",") if name.strip())


def _companions(options: argparse.Namespace, names: tuple[str, ...] | None) -> tuple[Companion, ...] | None:
    """Give what is to be inferred; None leaves the choice to the analysis."""
    if options.no_inference and (options.infer or options.reference):
        message = "--no-inference forbids what --infer and --reference ask for; leave one out"
        raise InputError(message, key="--no-inference")
    if options.no_inference:
        return ()
    wanted = _names(options.infer)
    if bool(wanted) != bool(options.reference):
        message = "--infer and --reference go together: what to infer, and the constants to infer it from"
        raise InputError(message, key="--infer" if wanted else "--reference")
    if not wanted:
        return None
    if names is None:
        message = "--infer needs --constituents, so that it is clear what is fitted"
        raise InputError(message, key="--infer")
    reference = read_constants(options.reference, gauge=options.reference_gauge)
    source = options.reference_gauge or options.reference.stem
    return reference_companions(wanted, names, reference, source=source)


def _document(fit: HarmonicFit, gauge: str) -> dict[str, object]:
    constants = fit.constants
    return {
        "gauge": gauge,
        "vertical_reference": constants.vertical_reference,
        "nodal": constants.nodal,
        "samples": len(fit.t_h),
        "span_days": fit.span_days,
        "mean_level_m": constants.mean_level_m,
        "mean_level_sd_m": constants.mean_level_sd_m,
        "trend_m_per_year": fit.trend_m_per_year if fit.plan.trend else None,
        "trend_sd_m_per_year": fit.trend_sd_m_per_year,
        "residual_sd_m": fit.residual_sd_m,
        "effective_samples": fit.effective_samples,
        "condition_number": fit.condition_number,
        "constants": constants_frame(constants, gauge).assign(
            white_amplitude_sd_m=np.concatenate([[np.nan], fit.white_amplitude_sd_m])
        ),
        "inferred": [
            {
                "constituent": companion.name,
                "from": companion.from_name,
                "amplitude_ratio": companion.amplitude_ratio,
                "lag_difference_deg": companion.lag_difference_deg,
                "source": companion.source,
            }
            for companion in fit.plan.companions
        ],
        "close_pairs": [vars(pair) for pair in fit.close_pairs],
        "caution": CAUTION,
    }
