"""No mutated export is misread without a word: a record that adds up, or one line of error."""

from __future__ import annotations

import importlib.util
from pathlib import Path

_PATH = Path(__file__).parent / "mutation.py"
_SPEC = importlib.util.spec_from_file_location("mutation", _PATH)
assert _SPEC is not None
assert _SPEC.loader is not None
mutation = importlib.util.module_from_spec(_SPEC)
_SPEC.loader.exec_module(mutation)


def test_mutated_exports(tmp_path: Path) -> None:
    found = mutation.run(300, 20261201, tmp_path)
    assert sum(found.values()) == 300
    # Mutations that leave no record, or none that fail, would test nothing.
    assert min(found["record"], found["error"]) > 30
