"""The entry point: finds the command, runs it, turns errors into one line and exit code 2."""

from __future__ import annotations

import argparse
import importlib
import os
import sys
from collections.abc import Sequence

from tidekit import __version__
from tidekit.errors import TidekitError

COMMANDS = (
    "inspect",
    "screen",
    "constants",
    "heights",
    "tidetable",
    "datums",
    "coast",
    "theory",
    "audit",
    "demo",
)
"""The commands, in the order of the work; each is a module of this room with `add_parser` and `run`."""

EXIT_DONE, EXIT_FINDINGS, EXIT_WRONG_INPUT = 0, 1, 2

CAUTION = "Not for navigation. The national hydrographic authority's tables and datums take precedence."


class _Parser(argparse.ArgumentParser):
    """A parser whose complaints are one line, like every other error of tidekit."""

    def error(self, message: str) -> None:  # type: ignore[override]
        self.exit(EXIT_WRONG_INPUT, f"tidekit: {message}; see {self.prog} --help\n")


def build_parser() -> argparse.ArgumentParser:
    """Build the parser of all commands."""
    parser = _Parser(
        prog="tidekit",
        description="Harmonic tide-gauge analysis and coastal-wave identification over gauge networks.",
        epilog=f"example: tidekit audit sample_series/network.toml --out audit_out. {CAUTION}",
    )
    parser.add_argument("--version", action="version", version=f"tidekit {__version__}")
    commands = parser.add_subparsers(dest="command", required=True, metavar="COMMAND")
    for name in COMMANDS:
        importlib.import_module(f"tidekit.cli.{name}").add_parser(commands)
    return parser


def main(arguments: Sequence[str] | None = None) -> int:
    """Run one command.

    Parameters
    ----------
    arguments : sequence of str, optional
        The command line after the program's name; the process's own by default.

    Returns
    -------
    int
        0 done and nothing found, 1 done with findings, 2 wrong input.
    """
    options = build_parser().parse_args(arguments)
    try:
        return int(options.run(options))
    except TidekitError as error:
        print(f"tidekit {options.command}: {' '.join(str(error).split())}", file=sys.stderr)
        return EXIT_WRONG_INPUT
    except BrokenPipeError:
        # The reader of our output went away (as `| head` does): leave quietly, and keep Python from
        # complaining when it flushes at exit.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return EXIT_DONE


if __name__ == "__main__":
    raise SystemExit(main())
