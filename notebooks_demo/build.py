"""Make the notebooks from the scripts beside them and run them; the scripts are the source.

    python notebooks_demo/build.py            write and run every notebook, renew figures/first_run.png
    python notebooks_demo/build.py --check    run every script as a notebook, compare with the notebook stored

Needs the extra `notebooks`. Stored are the cells, their text and their PNG figures; nothing that changes from one
run to the next or tells where it ran.
"""

from __future__ import annotations

import os
import re
import shutil
import sys
from pathlib import Path
from typing import Any

import jupytext
import nbformat
from nbclient import NotebookClient

HERE = Path(__file__).resolve().parent
NUMBER = re.compile(r"[-+]?\d+(?:\.\d*)?(?:e[-+]?\d+)?")


def executed(script: Path) -> Any:
    """Notebook of a script in percent format, run in its folder, without run-time metadata."""
    notebook = jupytext.read(script, fmt="py:percent")
    client = NotebookClient(
        notebook,
        timeout=600,
        kernel_name="python3",
        extra_arguments=["--log-level=ERROR"],
        resources={"metadata": {"path": str(HERE)}},
    )
    client.execute()
    notebook.metadata = {
        "kernelspec": {"display_name": "Python 3", "language": "python", "name": "python3"},
        "language_info": {"name": "python"},
    }
    for k, cell in enumerate(notebook.cells):
        cell.id = f"cell-{k:02d}"
        cell.metadata = {}
        if cell.cell_type == "code":
            cell.outputs = tidy(cell.outputs)
    nbformat.validate(notebook)
    return notebook


def tidy(outputs: list[Any]) -> list[Any]:
    """Outputs with what a stream wrote in pieces joined, and of a figure the PNG alone."""
    kept: list[Any] = []
    for output in outputs:
        if output.output_type == "stream":
            if output.name != "stdout":
                sys.exit(f"a demonstration writes to {output.name}: {output.text}")
            if kept and kept[-1].output_type == "stream":
                kept[-1].text += output.text
                continue
        elif "image/png" in output.get("data", {}):
            output.data = {"image/png": output.data["image/png"]}
            output.metadata = {}
        kept.append(output)
    return kept


def printed(notebook: Any) -> str:
    """All that the cells printed."""
    cells = [cell for cell in notebook.cells if cell.cell_type == "code"]
    return "".join(o.text for cell in cells for o in cell.outputs if o.output_type == "stream")


def last_place(figure: str) -> float:
    """One unit in the last place of a printed number."""
    mantissa, _, exponent = figure.partition("e")
    return 10.0 ** (int(exponent or 0) - len(mantissa.partition(".")[2]))


def differences(new: Any, stored: Any) -> list[str]:
    """What tells two notebooks apart: cells, printed words, numbers by more than one in the last place."""
    found = []
    if [(c.cell_type, c.source) for c in new.cells] != [(c.cell_type, c.source) for c in stored.cells]:
        found.append("the cells differ")
    texts = [re.sub("-{2,}", "", printed(notebook)) for notebook in (new, stored)]  # rules follow the widths
    if NUMBER.sub("#", texts[0]).split() != NUMBER.sub("#", texts[1]).split():
        found.append("the printed words differ")
        return found
    for a, b in zip(*map(NUMBER.findall, texts), strict=True):
        tiny = max(abs(float(a)), abs(float(b))) < 1e-4  # round-off and balance errors are not repeatable
        if not tiny and abs(float(a) - float(b)) > 1.01 * max(last_place(a), last_place(b)):
            found.append(f"{b} was printed, now {a}")
    return found


def main() -> None:
    os.environ.pop("MPLBACKEND", None)  # the kernel draws into the notebook
    os.environ["PYDEVD_DISABLE_FILE_VALIDATION"] = "1"
    check = "--check" in sys.argv[1:]
    wrong = False
    for script in sorted(HERE.glob("[0-9][0-9]_*.py")):
        path = script.with_suffix(".ipynb")
        notebook = executed(script)
        if check:
            found = differences(notebook, nbformat.read(path, as_version=4))
            print("\n  ".join([f"{path.name}: {'differs' if found else 'as stored'}", *found]))
            wrong = wrong or bool(found)
        else:
            nbformat.write(notebook, path)
            print(f"{path.name}: {path.stat().st_size / 1000:.0f} kB")
    if not check:
        figures = HERE / "figures"
        figures.mkdir(exist_ok=True)
        shutil.copy(HERE / "output" / "first_run.png", figures)
    if wrong:
        sys.exit("run `python notebooks_demo/build.py` and commit what it writes")


if __name__ == "__main__":
    main()
