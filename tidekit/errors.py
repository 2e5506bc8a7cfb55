"""The errors tidekit raises: one base, few children.

Every message says what was wanted, what was found and what to do. The command line turns any of
these into one line on standard error and exit code 2.
"""

from __future__ import annotations

from pathlib import Path


class TidekitError(Exception):
    """Base of every error that tidekit raises on purpose."""


class InputError(TidekitError, ValueError):
    """A file or a request is wrong; carries where, so that the message names it.

    Parameters
    ----------
    message : str
        What was wanted, what was found, what to do.
    path : path-like, optional
        The file at fault.
    line : int, optional
        Its line, counted from 1.
    key : str, optional
        The key at fault, for files that have keys.
    """

    def __init__(
        self, message: str, *, path: str | Path | None = None, line: int | None = None, key: str | None = None
    ) -> None:
        self.path = None if path is None else Path(path)
        self.line = line
        self.key = key
        place = "" if path is None else str(path)
        if line is not None:
            place += f":{line}"
        if key is not None:
            place += f" [{key}]" if place else f"[{key}]"
        super().__init__(f"{place}: {message}" if place else message)


class RecordError(InputError):
    """An export cannot be read as a gauge record."""


class NetworkFileError(InputError):
    """A network file has an unknown key, a missing file or an impossible value."""


class ConstituentError(TidekitError, ValueError):
    """A constituent's name or make-up is not understood."""


class AnalysisError(TidekitError, ValueError):
    """A record or a request cannot be analysed, predicted or compared."""


class UnfitRecordError(RecordError, AnalysisError):
    """A record that was read but cannot be analysed; carries its file."""
