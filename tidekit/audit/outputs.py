"""The files that an audit leaves: all of them, or none."""

from __future__ import annotations

import json
import math
import shutil
import tempfile
from collections.abc import Mapping
from dataclasses import asdict
from pathlib import Path
from typing import Any, cast

import pandas as pd

from tidekit.audit.result import Audit
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
    agrees = dict(zip(propagation.tides.ids, propagation.used, strict=True))
    return {
        "network": audit.network.name,
        "verdict": audit.verdict,
        "verdict_evidence": propagation.verdict.evidence,
        "caution": CAUTION,
        "started_utc": audit.started_utc,
        "gauges": [
            {
                "gauge": gauge.station.id,
                "name": gauge.station.label,
                "in_wave_fit": gauge.station.id in propagation.tides.ids,
                "agrees_with_wave": bool(agrees.get(gauge.station.id, False)),
                "rows": None if gauge.record is None else _ledger(gauge.record.ledger),
                "layout": None if gauge.record is None else gauge.record.layout_name,
            }
            for gauge in audit.gauges
        ],
        "dispersion_p": propagation.dispersion_p if math.isfinite(propagation.dispersion_p) else None,
        "depth": audit.measure.theory.depth_note if audit.measure.theory else None,
        **tables,
        "inputs": [asdict(source) for source in audit.inputs],
        "versions": dict(audit.versions),
        "settings": asdict(audit.network.settings),
    }


def write_audit(audit: Audit, folder: str | Path, *, page: str) -> tuple[Path, ...]:
    """Write the six files into a folder; a failure leaves what was there.

    Parameters
    ----------
    audit : Audit
        What to write.
    folder : path-like
        Made if absent; other files in it are left alone.
    page : str
        The report's HTML.

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
    texts = {name: frame.to_csv(index=False, lineterminator="\n") for name, frame in audit_tables(audit).items()}
    texts["audit.json"] = json.dumps(audit_document(audit), indent=2, allow_nan=False) + "\n"
    texts["report.html"] = page
    try:
        target.mkdir(parents=True, exist_ok=True)
        parts = Path(tempfile.mkdtemp(prefix=".audit.", dir=target))
        try:
            for name in FILES:
                (parts / name).write_bytes(texts[name].encode("utf-8"))
            # Only whole files are moved in, one rename each.
            for name in FILES:
                (parts / name).replace(target / name)
        finally:
            shutil.rmtree(parts, ignore_errors=True)
    except OSError as error:
        message = f"cannot write here ({error.strerror}); name a folder you may write to"
        raise InputError(message, path=target) from error
    return tuple(target / name for name in FILES)


_DIGITS = {"speed_deg_per_h": 7, "latitude": 6}


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
