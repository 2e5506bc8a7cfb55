"""Packed, encoded, damaged and hostile files."""

from __future__ import annotations

import gzip
import io
import zipfile
from pathlib import Path

import pytest

from tidekit.errors import RecordError
from tidekit.records import decoding
from tidekit.records.decoding import open_export
from tidekit.records.reading import read_record

TEXT = "time (UTC),level (m)\n" + "".join(f"2021-03-13 {hour:02d}:00,{hour / 10}\n" for hour in range(24))


def zipped(content: bytes, name: str = "mole.csv") -> bytes:
    buffer = io.BytesIO()
    with zipfile.ZipFile(buffer, "w", zipfile.ZIP_DEFLATED) as archive:
        archive.writestr(name, content)
    return buffer.getvalue()


@pytest.mark.parametrize("size", [1, 7, 64, 100, 10_000])
def test_blocks_hold_every_line_once_whatever_their_size(tmp_path: Path, size: int) -> None:
    path = tmp_path / "mole.csv"
    path.write_text(TEXT.rstrip("\n"))
    blocks = list(open_export(path).blocks(size))
    assert b"".join(block.data for block in blocks).decode() == TEXT
    lines = [
        (block.first_line + n, line) for block in blocks for n, line in enumerate(block.data.decode().splitlines())
    ]
    assert lines == [*enumerate(TEXT.splitlines(), 1)]


def test_small_blocks_read_the_same_record(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = tmp_path / "mole.csv"
    path.write_text(TEXT + "2021-03-13 05:00,9.9\nend\n")
    whole = read_record(path)
    monkeypatch.setattr(decoding.Export.blocks, "__defaults__", (50,))
    parts = read_record(path)
    assert parts.heights.equals(whole.heights)
    assert parts.ledger == whole.ledger


@pytest.mark.parametrize("pack", [gzip.compress, zipped])
def test_line_without_end_in_a_small_archive(tmp_path: Path, pack: object) -> None:
    assert callable(pack)
    path = tmp_path / "bomb.bin"
    path.write_bytes(pack(TEXT.encode() + b"0" * 30_000_000))
    assert path.stat().st_size < 100_000
    with pytest.raises(RecordError, match=r"bomb\.bin:26: a line longer than 1,000,000 bytes"):
        read_record(path)


def test_archive_that_expands_too_far(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(decoding, "LARGEST_BYTES", 10_000_000)
    path = tmp_path / "bomb.gz"
    path.write_bytes(gzip.compress(TEXT.encode() + b"2021-03-14 00:00,1.0\n" * 600_000))
    with pytest.raises(RecordError, match=r"bomb\.gz: unpacks to more than 10,000,000 bytes"):
        read_record(path)


def test_member_with_a_path_outside_is_only_read(tmp_path: Path) -> None:
    (tmp_path / "in").mkdir()
    path = tmp_path / "in" / "mole.zip"
    path.write_bytes(zipped(TEXT.encode(), "../escaped.csv"))
    assert read_record(path).ledger.kept == 24
    assert sorted(file.name for file in tmp_path.rglob("*")) == ["in", "mole.zip"]


@pytest.mark.parametrize("pack", [gzip.compress, zipped])
def test_damaged_archives(tmp_path: Path, pack: object) -> None:
    assert callable(pack)
    whole = pack(TEXT.encode() * 50)
    path = tmp_path / "mole.bin"
    for cut in (12, len(whole) // 2, len(whole) - 9):
        path.write_bytes(whole[:cut])
        with pytest.raises(RecordError, match=r"mole\.bin.*(damaged|cannot be read)"):
            read_record(path)


def test_zero_byte_inside_a_number_is_no_number(tmp_path: Path) -> None:
    path = tmp_path / "mole.csv"
    rows = [f"2021-03-{1 + n // 24:02d} {n % 24:02d}:00,1.25\n" for n in range(400)]
    rows[390] = rows[390].replace("1.25", "1\0.25")
    path.write_text("time (UTC),level (m)\n" + "".join(rows))
    record = read_record(path)
    assert [(row.line, row.reason) for row in record.ledger.rejected] == [(392, "height is not a number")]


def test_text_in_utf_16_without_its_mark_is_refused(tmp_path: Path) -> None:
    path = tmp_path / "mole.csv"
    path.write_bytes(TEXT.encode("utf-16-le"))
    with pytest.raises(RecordError, match="this is a binary file"):
        read_record(path)
