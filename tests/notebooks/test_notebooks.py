"""Notebooks run from end to end, and are kept without their outputs."""

from pathlib import Path

import pytest

nbclient = pytest.importorskip("nbclient", reason="nbclient comes with the extra `test`")
nbformat = pytest.importorskip("nbformat", reason="nbformat comes with the extra `test`")

ROOT = Path(__file__).parents[2]
NOTEBOOKS = sorted((ROOT / "notebooks").glob("*.ipynb"))


def test_there_are_notebooks() -> None:
    assert NOTEBOOKS


@pytest.mark.filterwarnings("ignore::DeprecationWarning")  # of the kernel's own libraries
@pytest.mark.parametrize("path", NOTEBOOKS, ids=lambda path: path.stem)
def test_it_runs(path: Path) -> None:
    notebook = nbformat.read(path, as_version=4)
    assert all(cell.get("outputs", []) == [] for cell in notebook.cells), "clear the outputs before committing"
    client = nbclient.NotebookClient(notebook, timeout=300, resources={"metadata": {"path": str(ROOT)}})
    client.execute()
    shown = "".join(str(output) for cell in notebook.cells for output in cell.get("outputs", []))
    pictures = [
        output for cell in notebook.cells for output in cell.get("outputs", []) if "image/png" in output.get("data", {})
    ]
    assert len(pictures) == sum("\nfigure" in cell.source for cell in notebook.cells if cell.cell_type == "code") > 0
    for word in ("consistent", "clock_offset", "datum_step", "unit_scale", "time_zone"):
        assert word in shown
