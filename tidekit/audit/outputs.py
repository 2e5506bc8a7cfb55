"""The files that an audit leaves: all of them, or none."""

from __future__ import annotations

import json
import math
import os
import shutil
from collections.abc import Mapping
from dataclasses import asdict
from pathlib import Path
from typing import Any, cast

import pandas as pd

from tidekit.audit.result import Audit
from tidekit.audit.summary import gauges_table
from tidekit.errors import InputError
from tidekit.records.ledger import RowLedger

CAUTION = (
    "Not for navigation. Heights, times and datums computed here defer to the national hydrographic authority and to "
    "licensed survey practice."
)
FILES = ("constants.csv", "datums.csv", "propagation.csv", "findings.csv", "audit.json", "report.html")


def audit_tables(audit: Audit) -> dict[str, pd.DataFrame]:
    """The four tables of an audit, by file name."""
    return {
        "constants.csv": _rounded(audit.constants_table()),
        "datums.csv": _rounded(audit.datums_table()),
        "propagation.csv": _rounded(audit.measure.propagation.to_frame()),
        "findings.csv": _rounded(audit.findings_table()),
    }


def audit_document(audit: Audit) -> dict[str, Any]:
    """Everything an audit says, as JSON values."""
    tables = {name.removesuffix(".csv"): _records(frame) for name, frame in audit_tables(audit).items()}
    propagation = audit.measure.propagation
    return {
        "network": audit.network.name,
        "verdict": audit.verdict,
        "verdict_evidence": propagation.verdict.evidence,
        "caution": CAUTION,
        "started_utc": audit.started_utc,
        "gauges": [
            {
                **row,
                "rows": None if gauge.record is None else _ledger(gauge.record.ledger),
                "layout": None if gauge.record is None else gauge.record.layout_name,
            }
            for gauge, row in zip(audit.gauges, _records(_rounded(gauges_table(audit))), strict=True)
        ],
        "dispersion_p": propagation.dispersion_p if math.isfinite(propagation.dispersion_p) else None,
        "depth": audit.measure.theory.depth_note if audit.measure.theory else None,
        **tables,
        "inputs": [asdict(source) for source in audit.inputs],
        "versions": dict(audit.versions),
        "settings": asdict(audit.network.settings),
    }


def check_folder(folder: str | Path) -> None:
    """See that files can be left in a folder, before the work that is to go there.

    Parameters
    ----------
    folder : path-like
        May be absent.

    Raises
    ------
    InputError
        If it is a file, holds a folder by the name of one of `FILES`, or may not be written.
    """
    target = Path(folder)
    if target.exists() and not target.is_dir():
        message = "wanted a folder for the files of the audit, found a file; name another"
        raise InputError(message, path=target)
    for name in FILES:
        if (target / name).is_dir():
            message = "wanted to write a file here, found a folder; name another folder for the audit"
            raise InputError(message, path=target / name)
    above = next(place for place in (target, *target.absolute().parents) if place.exists())
    if not above.is_dir() or not os.access(above, os.W_OK | os.X_OK):
        message = "cannot write here; name a folder you may write to"
        raise InputError(message, path=above)


def write_audit(audit: Audit, folder: str | Path, *, page: str) -> tuple[Path, ...]:
    """Write the files of an audit into a folder: all of them, or none.

    Parameters
    ----------
    audit : Audit
        What was found.
    folder : path-like
        Made if absent; files of the same names are replaced, others stay.
    page : str
        The report, as HTML.

    Returns
    -------
    tuple of Path
        The files, in the order of `FILES`.

    Raises
    ------
    InputError
        If the folder cannot be written.
    """
    target = Path(folder)
    check_folder(target)
    texts = {name: frame.to_csv(index=False, lineterminator="\n") for name, frame in audit_tables(audit).items()}
    texts["audit.json"] = json.dumps(audit_document(audit), indent=2, allow_nan=False) + "\n"
    texts["report.html"] = page
    whole = {name: texts[name].encode("utf-8") for name in FILES}
    try:
        _leave(target, whole)
    except OSError as error:
        message = f"cannot write here ({error.strerror}); name a folder you may write to"
        raise InputError(message, path=target) from error
    return tuple(target / name for name in FILES)


def _leave(target: Path, whole: Mapping[str, bytes]) -> None:
    """Write all files beside their places, then move them there, one rename each; a new folder appears at once."""
    new = not target.exists()
    if new:
        target.absolute().parent.mkdir(parents=True, exist_ok=True)
    parts = (target.absolute().parent if new else target) / f".audit.{os.getpid()}.part"
    parts.mkdir()
    try:
        for name, content in whole.items():
            (parts / name).write_bytes(content)
        if new:
            parts.rename(target)
        else:
            for name in whole:
                (parts / name).replace(target / name)
    finally:
        shutil.rmtree(parts, ignore_errors=True)


_DIGITS = {"speed_deg_per_h": 7}


def _rounded(frame: pd.DataFrame) -> pd.DataFrame:
    """Digits that mean something: a tenth of a millimetre, a thousandth of a degree."""
    digits = {column: _DIGITS.get(column, 5) for column in frame.select_dtypes("number").columns}
    return frame.round(digits)


def _records(frame: pd.DataFrame) -> list[Mapping[str, Any]]:
    """Rows as JSON values; what is not finite becomes null."""
    finite = frame.replace([float("inf"), float("-inf")], float("nan"))
    return cast(list[Mapping[str, Any]], json.loads(finite.to_json(orient="records")))


def _ledger(ledger: RowLedger) -> dict[str, int]:
    return {
        "rows": ledger.rows,
        "kept": ledger.kept,
        "flagged": ledger.flagged,
        "rejected": len(ledger.rejected),
    }
