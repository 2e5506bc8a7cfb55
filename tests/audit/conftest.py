"""One audit of the shipped network, run through the command line, for all tests that look at it."""

import time
from dataclasses import dataclass
from pathlib import Path

import pytest

from tidekit.cli.main import main

SAMPLES = Path(__file__).parents[2] / "sample_series"


@dataclass(frozen=True)
class DemoAudit:
    folder: Path
    exit_code: int
    seconds: float


@pytest.fixture(scope="session")
def demo_audit(tmp_path_factory: pytest.TempPathFactory) -> DemoAudit:
    folder = tmp_path_factory.mktemp("audit") / "out"
    started = time.process_time()
    code = main(["audit", str(SAMPLES / "network.toml"), "--out", str(folder)])
    return DemoAudit(folder, code, time.process_time() - started)
