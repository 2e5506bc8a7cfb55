"""Files whole or not at all."""

import errno
import os
from pathlib import Path

import pytest

from tidekit.audit.execute import run_audit
from tidekit.audit.outputs import FILES, write_audit
from tidekit.errors import InputError
from tidekit.records.network_file import read_network

NETWORK = """
[network]
name = "two <gauges> & more"
[coast]
side = "left"
depth_m = 60.0
[[gauge]]
id = "a"
constants = "a.csv"
along_coast_km = 0.0
latitude = -41.0
[[gauge]]
id = "b"
constants = "a.csv"
along_coast_km = 90.0
latitude = -40.2
"""


@pytest.fixture
def audit(tmp_path: Path):  # type: ignore[no-untyped-def]
    (tmp_path / "a.csv").write_text("constituent,amplitude_m,phase_lag_deg\nM2,1.0,40\nK1,0.3,80\n")
    (tmp_path / "network.toml").write_text(NETWORK)
    return run_audit(read_network(tmp_path / "network.toml"))


def test_other_files_stay(audit, tmp_path: Path) -> None:  # type: ignore[no-untyped-def]
    folder = tmp_path / "out"
    folder.mkdir()
    (folder / "mine.txt").write_text("mine")
    written = write_audit(audit, folder, page="<p>")
    assert [path.name for path in written] == list(FILES)
    assert (folder / "mine.txt").read_text() == "mine"
    assert {path.name for path in folder.iterdir()} == {*FILES, "mine.txt"}


def test_a_failure_leaves_the_old_files(audit, tmp_path: Path) -> None:  # type: ignore[no-untyped-def]
    folder = tmp_path / "out"
    write_audit(audit, folder, page="old")
    with pytest.raises(UnicodeEncodeError, match="surrogates not allowed"):
        write_audit(audit, folder, page="new \ud800")
    assert (folder / "report.html").read_text() == "old"
    assert {path.name for path in folder.iterdir()} == set(FILES)


def test_a_failure_leaves_no_new_folder(audit, tmp_path: Path) -> None:  # type: ignore[no-untyped-def]
    with pytest.raises(UnicodeEncodeError, match="surrogates not allowed"):
        write_audit(audit, tmp_path / "deep" / "new", page="\ud800")
    assert not (tmp_path / "deep").exists()


def test_a_disk_that_fails_midway_leaves_nothing(  # type: ignore[no-untyped-def]
    audit, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """The fourth file meets a full disk, made by hand: a new folder is not seen, an old one stays as it was."""
    write_audit(audit, tmp_path / "old", page="old")
    before = {path.name: path.read_bytes() for path in (tmp_path / "old").iterdir()}
    written = Path.write_bytes

    def full_disk(path: Path, content: bytes) -> int:
        if path.name == "findings.csv":
            raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))
        return written(path, content)

    monkeypatch.setattr(Path, "write_bytes", full_disk)
    for folder in ("old", "new"):
        with pytest.raises(InputError, match="No space left on device"):
            write_audit(audit, tmp_path / folder, page="new")
    assert not (tmp_path / "new").exists()
    assert {path.name: path.read_bytes() for path in (tmp_path / "old").iterdir()} == before
    assert [path for path in tmp_path.iterdir() if path.name.startswith(".")] == []


def test_a_new_folder_is_open_to_others_as_the_user_has_it(audit, tmp_path: Path) -> None:  # type: ignore[no-untyped-def]
    (tmp_path / "plain").mkdir()
    write_audit(audit, tmp_path / "out", page="<p>")
    assert (tmp_path / "out").stat().st_mode == (tmp_path / "plain").stat().st_mode


def test_a_folder_in_the_place_of_a_file_is_named(audit, tmp_path: Path) -> None:  # type: ignore[no-untyped-def]
    (tmp_path / "out" / "findings.csv").mkdir(parents=True)
    with pytest.raises(InputError, match=r"findings\.csv: wanted to write a file here, found a folder"):
        write_audit(audit, tmp_path / "out", page="<p>")
    assert [path.name for path in (tmp_path / "out").iterdir()] == ["findings.csv"]


def test_a_folder_that_cannot_be_written_is_named(audit, tmp_path: Path) -> None:  # type: ignore[no-untyped-def]
    (tmp_path / "file").write_text("x")
    with pytest.raises(InputError, match="cannot write here; name a folder"):
        write_audit(audit, tmp_path / "file" / "out", page="<p>")


def test_the_folder_may_be_the_one_we_stand_in(  # type: ignore[no-untyped-def]
    audit, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    (tmp_path / "here").mkdir()
    monkeypatch.chdir(tmp_path / "here")
    write_audit(audit, ".", page="<p>")
    assert {path.name for path in (tmp_path / "here").iterdir()} == set(FILES)
