"""Mutate exports by a seed and see that the reader answers with a record that adds up, or one line of error.

Run many from the repository: ``python tests/records/mutation.py 20000``.
"""

from __future__ import annotations

import sys
import tempfile
from collections import Counter
from pathlib import Path

import numpy as np

from tidekit.errors import TidekitError
from tidekit.records.reading import read_record

EXPORTS = Path(__file__).parent / "exports"
SEEDS = sorted(path for path in EXPORTS.iterdir() if path.suffix not in (".py", ".json", ".toml"))
_HUGE = (b"9" * 400, b"1e999", b"-1e308", b"99999999999999999999", b"0" * 60, b"1e-400", b"NaN", b"inf")


def mutated(data: bytes, rng: np.random.Generator) -> bytes:
    """One to three mutations of a file's bytes."""
    for _ in range(rng.integers(1, 4)):
        data = _MUTATIONS[rng.integers(len(_MUTATIONS))](data, rng)
    return data


def _truncate(data: bytes, rng: np.random.Generator) -> bytes:
    return data[: rng.integers(0, len(data) + 1)]


def _flip(data: bytes, rng: np.random.Generator) -> bytes:
    out = np.frombuffer(data, dtype=np.uint8).copy()
    if len(out):
        places = rng.integers(0, len(out), size=rng.integers(1, 12))
        out[places] = rng.integers(0, 256, size=len(places))
    return out.tobytes()


def _drop_column(data: bytes, rng: np.random.Generator) -> bytes:
    mark = (b",", b";", b"\t", b" ")[rng.integers(4)]
    place = int(rng.integers(0, 4))
    lines = [line.split(mark) for line in data.split(b"\n")]
    return b"\n".join(mark.join(cells[:place] + cells[place + 1 :]) for cells in lines)


def _shuffle(data: bytes, rng: np.random.Generator) -> bytes:
    lines = data.split(b"\n")
    return b"\n".join(lines[n] for n in rng.permutation(len(lines)))


def _drop_lines(data: bytes, rng: np.random.Generator) -> bytes:
    return b"\n".join(line for line in data.split(b"\n") if rng.random() < 0.7)


def _repeat_lines(data: bytes, rng: np.random.Generator) -> bytes:
    lines = data.split(b"\n")
    return b"\n".join(lines[n] for n in np.sort(rng.integers(0, len(lines), size=2 * len(lines))))


def _huge(data: bytes, rng: np.random.Generator) -> bytes:
    cells = data.split(b",")
    cells[rng.integers(len(cells))] = _HUGE[rng.integers(len(_HUGE))]
    return b",".join(cells)


def _insert(data: bytes, rng: np.random.Generator) -> bytes:
    place = int(rng.integers(0, len(data) + 1))
    piece = (b'"', b"\0\0", b"\r", b"\n\n", b'""', b",,,,", b"\xff\xfe", b"\xef\xbb\xbf", b"24:00", b"#", b"\x1a")
    return data[:place] + piece[rng.integers(len(piece))] + data[place:]


def _swap_bytes(data: bytes, rng: np.random.Generator) -> bytes:
    old, new = (bytes([byte]) for byte in rng.integers(32, 127, size=2).tolist())
    return data.replace(old, new)


_MUTATIONS = (
    _truncate, _flip, _drop_column, _shuffle, _drop_lines, _repeat_lines, _huge, _insert, _swap_bytes,
)  # fmt: skip
_DECLARED = ({}, {"time_zone": "UTC", "unit": "m"}, {"time_zone": "Europe/Paris", "unit": "cm"})


def outcome(path: Path, **declared: str) -> str:
    """Read a file: ``record`` or the kind of its error; anything else is a failure of the reader.

    Raises
    ------
    AssertionError
        If a record's ledger does not add up, its times do not increase, or an error is not one line.
    """
    try:
        record = read_record(path, **declared)
    except TidekitError as error:
        told = str(error)
    else:
        assert record.ledger.adds_up
        assert record.heights.index.is_monotonic_increasing
        assert record.heights.index.is_unique
        return "record"
    assert "\n" not in told, f"more than one line: {told}"
    assert path.name in told, f"names no file: {told}"
    return "error"


def run(count: int, seed: int, folder: Path) -> Counter[str]:
    """Outcomes of `count` mutated exports."""
    found: Counter[str] = Counter()
    for number in range(count):
        rng = np.random.default_rng([seed, number])
        source = SEEDS[number % len(SEEDS)]
        path = folder / f"mutated{''.join(source.suffixes)}"
        path.write_bytes(mutated(source.read_bytes(), rng))
        try:
            found[outcome(path, **_DECLARED[rng.integers(len(_DECLARED))])] += 1
        except Exception as error:
            error.add_note(f"seed {seed}, number {number}, from {source.name}")
            raise
    return found


if __name__ == "__main__":
    with tempfile.TemporaryDirectory() as name:
        print(dict(run(int(sys.argv[1]), int(sys.argv[2]) if len(sys.argv) > 2 else 1, Path(name))))
