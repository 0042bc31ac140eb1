"""Every notebook runs from its first cell to its last, in a kernel of its own, and is kept without outputs."""

from __future__ import annotations

import warnings
from pathlib import Path

import pytest

nbformat = pytest.importorskip("nbformat")
pytest.importorskip("ipykernel")
nbclient = pytest.importorskip("nbclient")

NOTEBOOKS = sorted((Path(__file__).resolve().parents[1] / "notebooks").glob("*.ipynb"))


def named(file: Path) -> str:
    return file.stem


@pytest.fixture(scope="module", params=NOTEBOOKS, ids=named)
def executed(request):
    notebook = nbformat.read(request.param, as_version=4)
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")  # of the kernel's packages, not ours
        client = nbclient.NotebookClient(
            notebook, timeout=120, kernel_name="python3", resources={"metadata": {"path": str(request.param.parent)}}
        )
        client.execute()
    return notebook


def outputs(notebook) -> list:
    return [output for cell in notebook.cells if cell.cell_type == "code" for output in cell.outputs]


def test_runs_without_errors_or_warnings(executed):
    assert not [output for output in outputs(executed) if output.output_type == "error"]
    assert not [output.text for output in outputs(executed) if output.get("name") == "stderr"]


def test_results_and_pictures_show_themselves(executed):
    kinds = {kind for output in outputs(executed) for kind in output.get("data", {})}
    assert {"text/html", "image/png"} <= kinds


@pytest.mark.parametrize("file", NOTEBOOKS, ids=named)
def test_is_kept_small_and_without_outputs(file):
    notebook = nbformat.read(file, as_version=4)
    nbformat.validate(notebook)
    assert not outputs(notebook)
    assert file.stat().st_size < 20_000


def test_there_is_a_notebook():
    assert NOTEBOOKS
