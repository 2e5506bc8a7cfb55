"""Files written whole or not at all, and their fingerprints."""

from __future__ import annotations

import contextlib
import hashlib
import os
import tempfile
from collections.abc import Iterator
from pathlib import Path

from tidekit.errors import InputError


@contextlib.contextmanager
def replacing(path: str | Path) -> Iterator[Path]:
    """Give a temporary path beside `path`; rename it onto `path` if the block succeeds.

    A reader never sees half a file, and a failed run leaves the old file as it was.

    Parameters
    ----------
    path : path-like
        The file to write. Missing parent folders are made.

    Yields
    ------
    Path
        Where to write.

    Raises
    ------
    InputError
        If the folder cannot be made or written.

    Examples
    --------
    >>> import tempfile, pathlib
    >>> target = pathlib.Path(tempfile.mkdtemp()) / "a.txt"
    >>> with replacing(target) as part:
    ...     _ = part.write_text("whole")
    >>> target.read_text()
    'whole'
    """
    target = Path(path)
    try:
        target.parent.mkdir(parents=True, exist_ok=True)
        handle, name = tempfile.mkstemp(prefix=f".{target.name}.", suffix=".part", dir=target.parent)
        os.close(handle)
    except OSError as error:
        message = f"cannot write here ({error.strerror}); name a folder you may write to"
        raise InputError(message, path=target) from error
    part = Path(name)
    try:
        yield part
        part.chmod(0o644)
        part.replace(target)
    finally:
        part.unlink(missing_ok=True)


def write_text(path: str | Path, text: str) -> None:
    """Write UTF-8 text to `path`, whole or not at all.

    Parameters
    ----------
    path : path-like
        The file to write.
    text : str
        Its content; line ends are written as they are.

    Raises
    ------
    InputError
        If the file cannot be written.
    """
    with replacing(path) as part:
        part.write_bytes(text.encode("utf-8"))


def sha256_of(path: str | Path) -> str:
    """SHA-256 of a file's bytes, as 64 hexadecimal digits.

    Parameters
    ----------
    path : path-like
        The file to read.

    Returns
    -------
    str
        The digest.
    """
    with Path(path).open("rb") as stream:
        return hashlib.file_digest(stream, "sha256").hexdigest()
