"""Files whole or not at all."""

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


def test_a_folder_that_cannot_be_written_is_named(audit, tmp_path: Path) -> None:  # type: ignore[no-untyped-def]
    (tmp_path / "file").write_text("x")
    with pytest.raises(InputError, match="cannot write here"):
        write_audit(audit, tmp_path / "file" / "out", page="<p>")
