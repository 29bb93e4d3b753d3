"""The demonstrations: scripts that run, notebooks that hold the same cells, data that say they are invented."""

from __future__ import annotations

import base64
import json
import os
import re
import shutil
import struct
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest

ROOT = Path(__file__).resolve().parents[2]
DEMOS = ROOT / "notebooks_demo"
SCRIPTS = sorted(DEMOS.glob("[0-9][0-9]_*.py"))
TABLES = sorted((DEMOS / "data").glob("*"))
LARGEST_NOTEBOOK = 500_000  # bytes
LARGEST_FIGURE = 200_000  # bytes; the README shows it


def name(path: Path) -> str:
    return path.name


def notebook(script: Path) -> dict[str, Any]:
    content: dict[str, Any] = json.loads(script.with_suffix(".ipynb").read_text(encoding="utf-8"))
    return content


def cells_of_script(text: str) -> list[tuple[str, str]]:
    """(type, source) of each cell of a script in percent format."""
    cells: list[tuple[str, list[str]]] = []
    for line in text.splitlines():
        if line.startswith("# %%"):
            assert line in {"# %%", "# %% [markdown]"}, f"unknown cell marker {line!r}"
            cells.append(("markdown" if line.endswith("[markdown]") else "code", []))
        else:
            assert cells, "the script begins with a cell"
            kind, lines = cells[-1]
            if kind == "markdown" and line:
                assert line == "#" or line.startswith("# "), f"not a line of text: {line!r}"
                line = line[2:]
            lines.append(line)
    return [(kind, "\n".join(lines).strip("\n")) for kind, lines in cells]


def cells_of_notebook(content: dict[str, Any]) -> list[tuple[str, str]]:
    return [(cell["cell_type"], "".join(cell["source"])) for cell in content["cells"]]


def stored_outputs(content: dict[str, Any]) -> list[dict[str, Any]]:
    return [output for cell in content["cells"] for output in cell.get("outputs", [])]


def png_size(png: bytes) -> tuple[int, int]:
    assert png.startswith(b"\x89PNG\r\n\x1a\n")
    width, height = struct.unpack(">II", png[16:24])
    return width, height


def test_there_is_something_to_test() -> None:
    assert [script.name for script in SCRIPTS] == [
        "01_first_run.py",
        "02_swapping_kernels.py",
        "03_shelf_life.py",
        "04_tapered_flocculation.py",
        "05_transfer_pump.py",
    ]
    assert len(TABLES) >= 2  # those from the third on state their invented figures in the script


@pytest.mark.parametrize("script", SCRIPTS, ids=name)
def test_script_runs_from_the_top_folder(script: Path, tmp_path: Path) -> None:
    copy = tmp_path / "notebooks_demo"
    shutil.copytree(DEMOS, copy, ignore=shutil.ignore_patterns("output", ".ipynb_checkpoints", "__pycache__"))
    run = subprocess.run(
        [sys.executable, "-W", "error", f"notebooks_demo/{script.name}"],
        cwd=tmp_path,
        env=os.environ | {"MPLBACKEND": "Agg", "PYTHONPATH": str(ROOT), "PYTHONIOENCODING": "utf-8"},
        capture_output=True,
        encoding="utf-8",
        timeout=600,
        check=False,
    )
    assert run.returncode == 0, run.stderr
    assert run.stderr == ""
    assert f"figures are in {Path('notebooks_demo', 'output')}" in run.stdout
    figures = sorted((copy / "output").glob("*.png"))
    assert figures
    for figure in figures:
        width, height = png_size(figure.read_bytes())
        assert min(width, height) >= 300
    if script.name.startswith("01"):
        assert "first_run.png" in {figure.name for figure in figures}


@pytest.mark.parametrize("script", SCRIPTS, ids=name)
def test_notebook_holds_the_cells_of_the_script(script: Path) -> None:
    assert cells_of_notebook(notebook(script)) == cells_of_script(script.read_text(encoding="utf-8"))


@pytest.mark.parametrize("script", SCRIPTS, ids=name)
def test_notebook_is_executed_and_clean(script: Path) -> None:
    content = notebook(script)
    code = [cell for cell in content["cells"] if cell["cell_type"] == "code"]
    assert [cell["execution_count"] for cell in code] == list(range(1, len(code) + 1))
    outputs = stored_outputs(content)
    assert not [o for o in outputs if o["output_type"] == "error" or o.get("name") == "stderr"]
    assert [o for o in outputs if o["output_type"] == "stream"]
    pictures = [o["data"]["image/png"] for o in outputs if "image/png" in o.get("data", {})]
    assert pictures
    for picture in pictures:
        width, _ = png_size(base64.b64decode("".join(picture)))
        assert 400 <= width <= 1300  # at 100 dots per inch, no wider than a page
    assert all(cell["metadata"] == {} for cell in content["cells"])
    assert set(content["metadata"]) == {"kernelspec", "language_info"}
    printed = "".join("".join(output.get("text", "")) for output in outputs)
    assert not re.search(r"(?:/(?:home|root|tmp|Users|work|usr|opt)/|[A-Z]:\\)", printed), (
        "a path of the machine"
    )


@pytest.mark.parametrize("script", SCRIPTS, ids=name)
def test_notebook_is_small(script: Path) -> None:
    assert script.with_suffix(".ipynb").stat().st_size < LARGEST_NOTEBOOK


@pytest.mark.parametrize("table", TABLES, ids=name)
def test_data_say_that_they_are_invented(table: Path) -> None:
    assert table.suffix == ".csv"
    lines = table.read_text(encoding="utf-8").splitlines()
    assert lines[0].startswith("#")
    assert "invented" in lines[0].lower()


def test_figure_of_the_readme() -> None:
    figure = (DEMOS / "figures" / "first_run.png").read_bytes()
    assert len(figure) < LARGEST_FIGURE
    assert png_size(figure) == (1200, 900)
