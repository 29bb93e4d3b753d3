"""Hard surroundings: no place to write, two first starts at once, a newer Python."""

from __future__ import annotations

import json
import os
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parent.parent
FIRST_RUN = """
import json, aggsim as ag
result = ag.simulate(ag.Batch(ag.kernels.constant(1.0)), ag.Monodisperse(volume=1.0, number=1.0), [0.0, 2.0])
import aggsim.schemes._loops as loops
print(json.dumps({"number": result.total_number().tolist(), "file": loops.__file__,
                  "cached": type(loops.layout._cache).__name__}))
"""


def start(python: str, folder: Path, **environment: str) -> subprocess.Popen[str]:
    """A fresh process that imports the copy of aggsim in `folder` and runs it once."""
    env = {k: v for k, v in os.environ.items() if not k.startswith(("NUMBA", "PYTHON", "XDG"))}
    env |= {"PYTHONPATH": str(folder), "PYTHONDONTWRITEBYTECODE": "1", **environment}
    return subprocess.Popen(
        [python, "-W", "error", "-c", FIRST_RUN],
        env=env,
        cwd=folder,
        text=True,
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
    )


def answer(process: subprocess.Popen[str]) -> dict[str, object]:
    out, err = process.communicate(timeout=300)
    assert process.returncode == 0, err
    found: dict[str, object] = json.loads(out.splitlines()[-1])
    assert found["number"] == pytest.approx([1.0, 0.5], rel=1e-5)
    return found


@pytest.fixture
def copy(tmp_path: Path) -> Path:
    """The package without any compiled code."""
    shutil.copytree(ROOT / "aggsim", tmp_path / "aggsim", ignore=shutil.ignore_patterns("__pycache__"))
    return tmp_path


@pytest.mark.skipif(os.name == "nt", reason="a home that cannot exist is made with /dev/null")
def test_no_place_to_write(copy: Path) -> None:
    # a file where the cache folder would be, and a home inside a device: nobody, root included, can write there
    (copy / "aggsim" / "schemes" / "__pycache__").write_text("not a folder")
    found = answer(start(sys.executable, copy, HOME="/dev/null", XDG_CACHE_HOME="/dev/null"))
    assert str(copy) in str(found["file"])
    assert found["cached"] == "NullCache"


def test_two_first_starts_at_once(copy: Path) -> None:
    processes = [start(sys.executable, copy) for _ in range(2)]
    for process in processes:
        assert str(copy) in str(answer(process)["file"])
    assert list((copy / "aggsim" / "schemes" / "__pycache__").glob("*.nbi"))
    answer(start(sys.executable, copy))  # the cache that two processes wrote is read without complaint


def newer_pythons() -> list[str]:
    """Interpreters newer than this one that can make an environment."""
    names = [f"python3.{minor}" for minor in range(15, sys.version_info.minor, -1)]
    found = [shutil.which(n) for n in names]
    found += [str(p) for n in names for p in Path.home().glob(f".pyenv/versions/*/bin/{n}")]
    check = [[p, "-c", "import venv, ensurepip"] for p in found if p]
    return [c[0] for c in check if subprocess.run(c, capture_output=True, check=False).returncode == 0]


def test_a_newer_python(tmp_path: Path) -> None:
    candidates = newer_pythons()
    if not candidates:
        pytest.skip("no newer Python on this machine")
    environment = tmp_path / "environment"
    subprocess.run([candidates[0], "-m", "venv", str(environment)], check=True)
    python = str(environment / ("Scripts" if os.name == "nt" else "bin") / "python")
    install = [python, "-m", "pip", "install", "--quiet", "--disable-pip-version-check", str(ROOT)]
    subprocess.run(install, check=True)
    process = subprocess.Popen(
        [python, "-W", "error", "-c", FIRST_RUN],
        cwd=tmp_path,
        text=True,
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
    )
    assert str(environment) in str(answer(process)["file"])
