"""An export's bytes: unpacked, in one encoding, in blocks of whole lines. Nothing but the named file is read."""

from __future__ import annotations

import gzip
import io
import zipfile
import zlib
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import IO, cast

from tidekit.errors import RecordError
from tidekit.records.as_text import EXTRAS, as_text, packing_of

LARGEST_BYTES = 8_000_000_000
"""An export that unpacks to more is refused: a century of minutes is a quarter of it."""
LONGEST_LINE_BYTES = 1_000_000
"""A longer line is no row of a gauge."""
BLOCK_BYTES = 2_000_000
"""Bytes held at a time: large enough for numpy, small beside the record (1 to 4 MB read equally fast)."""
HEAD_BYTES = 256_000
"""Bytes that show the layout."""
_TEXT_CONTROLS = b"\t\n\r\f\x1a"


@dataclass(frozen=True)
class Block:
    """Whole lines of an export."""

    data: bytes
    """Their bytes in an encoding that extends ASCII; every line ends with a line feed."""
    first_line: int
    """Line number of the first, from 1."""


@dataclass(frozen=True)
class Export:
    """A readable export."""

    path: Path
    """The file."""
    packing: str
    """``plain``, ``gzip``, ``zip``, ``workbook``, ``parquet`` or ``netcdf``."""
    encoding: str
    """``utf-8``, ``utf-16`` or ``latin-1``."""
    returns_only: bool
    """Whether lines end with a carriage return alone."""
    head: tuple[str, ...]
    """First lines, decoded."""

    def blocks(self, size: int = BLOCK_BYTES) -> Iterator[Block]:
        """Read the file anew in blocks of whole lines."""
        number, rest, total = 1, b"", 0
        with _stream(self.path, self.encoding) as stream:
            while part := _read(stream, size, self.path):
                total += len(part)
                if total > LARGEST_BYTES:
                    message = f"unpacks to more than {LARGEST_BYTES:,} bytes; split it by years"
                    raise RecordError(message, path=self.path)
                # A zero byte would pass for the end of a cell.
                part = (part.replace(b"\r", b"\n") if self.returns_only else part).replace(b"\0", b"?")
                whole, feed, after = part.rpartition(b"\n")
                if len(rest) + (len(whole.partition(b"\n")[0]) if feed else len(after)) > LONGEST_LINE_BYTES:
                    message = f"a line longer than {LONGEST_LINE_BYTES:,} bytes; wanted one row a line"
                    raise RecordError(message, path=self.path, line=number)
                if not feed:
                    rest += after
                    continue
                data = rest + whole + b"\n"
                yield Block(data, number)
                number, rest = number + data.count(b"\n"), after
        if rest.strip():
            yield Block(rest + b"\n", number)


def open_export(path: str | Path) -> Export:
    """Find how a file is packed and encoded, and read its first lines.

    Parameters
    ----------
    path : path-like
        A text export: plain, gzip, or a zip archive with one file in it; a workbook, Parquet or CF NetCDF.

    Returns
    -------
    Export
        Ready to be read in blocks.

    Raises
    ------
    RecordError
        If the file is missing, empty, or no text.
    """
    path = Path(path)
    try:
        with path.open("rb") as raw:
            start = raw.read(4)
    except IsADirectoryError as error:
        message = "this is a folder; name the export in it"
        raise RecordError(message, path=path) from error
    except (OSError, ValueError) as error:
        message = f"cannot read this export ({getattr(error, 'strerror', None) or error}); check the path"
        raise RecordError(message, path=path) from error
    with _stream(path, "utf-8") as stream:
        data = _read(stream, HEAD_BYTES, path)
    if not data.strip():
        message = "this file is empty; wanted rows of times and heights"
        raise RecordError(message, path=path)
    encoding = _encoding(data, path)
    returns_only = b"\r" in data and b"\n" not in data
    text = _decoded(data, encoding)
    lines = text.replace("\r\n", "\n").replace("\r", "\n").split("\n")
    if len(data) == HEAD_BYTES and len(lines) > 1:
        lines.pop()  # cut in the middle
    elif not lines[-1]:
        lines.pop()  # behind the last line's end
    return Export(path, _packing(path, start), encoding, returns_only, tuple(lines))


def _packing(path: Path, start: bytes) -> str:
    if start[:2] == b"\x1f\x8b":
        return "gzip"
    return packing_of(start, path.suffix) or ("zip" if start == b"PK\x03\x04" else "plain")


def _encoding(data: bytes, path: Path) -> str:
    if data[:2] in (b"\xff\xfe", b"\xfe\xff"):
        return "utf-16"
    controls = sum(byte < 32 and byte not in _TEXT_CONTROLS for byte in data[:4096])
    if b"\0" in data[:4096] or controls > len(data[:4096]) / 50:
        message = "this is a binary file; wanted a text export, plain, gzip or zip"
        raise RecordError(message, path=path)
    try:
        data[: data.rfind(b"\n")].decode("utf-8")
    except UnicodeDecodeError:
        return "latin-1"
    return "utf-8"


def _decoded(data: bytes, encoding: str) -> str:
    return data.decode("utf-8-sig" if encoding == "utf-8" else encoding, errors="replace")


def _read(stream: IO[bytes], size: int, path: Path) -> bytes:
    try:
        return stream.read(size)
    except (OSError, EOFError, zlib.error, zipfile.BadZipFile, RuntimeError, NotImplementedError) as error:
        message = f"the file is damaged or cut short ({error}); fetch it again"
        raise RecordError(message, path=path) from error


@contextmanager
def _stream(path: Path, encoding: str) -> Iterator[IO[bytes]]:
    """Bytes of the unpacked file; UTF-16 is turned into UTF-8, which other encodings of exports resemble."""
    with path.open("rb") as raw:
        packing = _packing(path, raw.read(4))
        raw.seek(0)
        if packing == "gzip":
            stream: IO[bytes] = cast(IO[bytes], gzip.GzipFile(fileobj=raw))
        elif packing == "zip":
            stream = _only_member(raw, path)
        elif packing in EXTRAS:
            stream = io.BytesIO(as_text(path, packing))
        else:
            stream = raw
        if encoding == "utf-16":
            text = _read(stream, LARGEST_BYTES, path).decode("utf-16", errors="replace")
            stream = io.BytesIO(text.encode("utf-8"))
        elif encoding == "utf-8" and packing not in EXTRAS:
            stream = _without_mark(stream, path)
        yield stream


def _without_mark(stream: IO[bytes], path: Path) -> IO[bytes]:
    """The stream past a byte-order mark of UTF-8."""
    mark = b"\xef\xbb\xbf"
    if _read(stream, len(mark), path) != mark:
        stream.seek(0)
    return stream


def _only_member(raw: IO[bytes], path: Path) -> IO[bytes]:
    try:
        archive = zipfile.ZipFile(raw)
        members = [entry for entry in archive.infolist() if not entry.is_dir()]
        if len(members) != 1:
            names = ", ".join(entry.filename for entry in members[:5]) or "none"
            message = f"wanted one file in this archive, found {len(members)} ({names}); unpack it and name the exports"
            raise RecordError(message, path=path)
        return archive.open(members[0])
    except (zipfile.BadZipFile, NotImplementedError, RuntimeError, OSError) as error:
        message = f"this archive cannot be read ({error}); fetch it again or unpack it"
        raise RecordError(message, path=path) from error
