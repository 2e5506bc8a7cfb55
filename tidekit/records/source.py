"""A gauge named on the command line: an export, or a gauge of a network file."""

from __future__ import annotations

from pathlib import Path

from tidekit.errors import NetworkFileError
from tidekit.records.layout import Layout
from tidekit.records.network import GaugeEntry
from tidekit.records.network_file import read_network
from tidekit.records.reading import read_record
from tidekit.records.record import GaugeRecord


def open_source(
    text: str,
    *,
    layout: Layout | str | Path | None = None,
    column: str | None = None,
    time_zone: str | None = None,
    unit: str | None = None,
) -> GaugeRecord:
    """Read a record by what a user types.

    Parameters
    ----------
    text : str
        Path of an export, or ``NETWORK.toml:gauge_id``.
    layout, column, time_zone, unit : optional
        Declarations, see `reading.read_record`; they overrule the network file's.

    Returns
    -------
    GaugeRecord
        The record.

    Raises
    ------
    InputError
        If it cannot be read.
    """
    entry = network_gauge(text)
    if entry is None:
        return read_record(text, layout=layout, column=column, time_zone=time_zone, unit=unit)
    return open_gauge(entry, layout=layout, column=column, time_zone=time_zone, unit=unit)


def network_gauge(text: str) -> GaugeEntry | None:
    """Find the gauge that ``NETWORK.toml:gauge_id`` names; None where the text is an export's path.

    Raises
    ------
    NetworkFileError
        If the network has no such gauge.
    """
    path, _, gauge = text.rpartition(":")
    if not path.endswith(".toml"):
        if text.endswith(".toml"):
            message = "this is a network file; name one of its gauges, as in network.toml:gauge_id"
            raise NetworkFileError(message, path=text)
        return None
    network = read_network(path)
    for entry in network.gauges:
        if entry.station.id == gauge:
            return entry
    message = f"no gauge {gauge!r}; there are {', '.join(entry.station.id for entry in network.gauges)}"
    raise NetworkFileError(message, path=path)


def open_gauge(
    entry: GaugeEntry,
    *,
    layout: Layout | str | Path | None = None,
    column: str | None = None,
    time_zone: str | None = None,
    unit: str | None = None,
) -> GaugeRecord:
    """Read the exports of a gauge of a network.

    Raises
    ------
    InputError
        If they cannot be read, or the gauge is given by its constants.
    """
    if not entry.files:
        message = f"gauge {entry.station.id!r} is given by its constants and has no export to read"
        raise NetworkFileError(message, path=entry.constants_path)
    return read_record(
        entry.files,
        station=entry.station,
        layout=layout or entry.layout,
        column=column or entry.column,
        time_zone=time_zone or entry.time_zone,
        unit=unit or entry.unit,
    )
