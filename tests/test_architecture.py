"""The house plan, checked: who imports whom, what a file may hold, and that every file has its tests."""

from __future__ import annotations

import ast
import inspect
import re
from pathlib import Path

import pytest

import aggsim as ag

ROOT = Path(__file__).resolve().parent.parent
PACKAGE = ROOT / "aggsim"
SOURCES = sorted(PACKAGE.rglob("*.py"))

# room -> rooms of aggsim that it may import (errors and _checks are open to all)
ROOMS = {
    "inputs": set(),
    "interaction": {"inputs"},
    "sizes": set(),
    "kernels": {"inputs"},
    "breakage": {"inputs"},
    "schemes": {"sizes"},
    "vessels": {"sizes"},
    "result": {"sizes"},
    "solvers": {"sizes", "schemes", "vessels", "result"},
    "outputs": {"sizes", "result"},
    "ensembles": {"sizes"},
    "verification": {
        "inputs",
        "interaction",
        "sizes",
        "kernels",
        "breakage",
        "schemes",
        "vessels",
        "result",
        "solvers",
        "studies",
    },
    "studies": {"inputs", "interaction", "kernels", "sizes", "vessels", "result", "solvers"},
}
# room -> libraries from outside
LIBRARIES = {
    "inputs": {"numpy", "scipy"},
    "interaction": {"numpy", "scipy"},
    "sizes": {"numpy", "scipy"},
    "kernels": {"numpy", "scipy"},
    "breakage": {"numpy", "scipy"},
    "schemes": {"numpy", "scipy", "numba"},
    "vessels": {"numpy"},
    "result": {"numpy", "scipy"},
    "solvers": {"numpy", "scipy", "sksundae"},
    "outputs": {"numpy", "matplotlib"},
    "ensembles": {"numpy", "scipy", "numba"},
    "studies": {"numpy", "scipy"},
    "verification": {"numpy", "scipy"},
}
OPEN_TO_ALL = {"errors", "_checks"}
STANDARD = set(__import__("sys").stdlib_module_names)


def room_of(path: Path) -> str | None:
    parts = path.relative_to(PACKAGE).parts
    return parts[0] if len(parts) > 1 else None


def imported_modules(tree: ast.AST) -> list[tuple[str, ast.stmt]]:
    found: list[tuple[str, ast.stmt]] = []
    for node in ast.walk(tree):
        if isinstance(node, ast.Import):
            found += [(alias.name, node) for alias in node.names]
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, "imports are absolute"
            module = node.module or ""
            if module == "aggsim":
                found += [(f"aggsim.{alias.name}", node) for alias in node.names]
            else:
                found.append((module, node))
            assert all(alias.name != "*" for alias in node.names), "no star imports"
    return found


def parse(path: Path) -> ast.Module:
    return ast.parse(path.read_text(encoding="utf-8"))


def name(path: Path) -> str:
    return path.relative_to(ROOT).as_posix()


@pytest.mark.parametrize("path", SOURCES, ids=name)
def test_imports_keep_to_the_plan(path: Path) -> None:
    room = room_of(path)
    tree = parse(path)
    top_level = set(map(id, tree.body))
    for module, node in imported_modules(tree):
        head, *rest = module.split(".")
        if head == "aggsim":
            assert rest or room is None, "nothing inside the package imports its top"
            target = rest[0]
            if room is not None and target not in OPEN_TO_ALL and target != room:
                assert target in ROOMS[room], f"{room} may not import {target}"
        elif head not in STANDARD:
            allowed = LIBRARIES[room] if room else {"numpy"}
            assert head in allowed, f"{room} may not import {head}"
            if head == "numba":
                assert path.name == "_loops.py"
            if head == "matplotlib":
                assert id(node) not in top_level, "matplotlib is imported inside functions"
                drawing = path.stem.endswith("figures") or path.name in {"kernel_maps.py", "_axes.py"}
                assert drawing, "matplotlib is imported where figures are drawn"
            if head == "sksundae":
                assert id(node) not in top_level, "sksundae is imported inside functions"
            if room == "solvers" and head in {"scipy", "sksundae"}:
                assert path.name.endswith("_methods.py")


@pytest.mark.parametrize("path", SOURCES, ids=name)
def test_the_library_does_not_print(path: Path) -> None:
    if path == PACKAGE / "verify.py":  # the command whose job it is
        return
    calls = [n for n in ast.walk(parse(path)) if isinstance(n, ast.Call) and isinstance(n.func, ast.Name)]
    assert not [c.lineno for c in calls if c.func.id == "print"]  # type: ignore[attr-defined]


@pytest.mark.parametrize("path", SOURCES, ids=name)
def test_files_are_opened_where_files_are_the_job(path: Path) -> None:
    if room_of(path) == "outputs" or path.name in {"measured.py", "_table.py"}:
        return
    calls = [n.func for n in ast.walk(parse(path)) if isinstance(n, ast.Call)]
    names = {f.id for f in calls if isinstance(f, ast.Name)}
    names |= {f.attr for f in calls if isinstance(f, ast.Attribute)}
    assert not names & {"open", "read_text", "write_text", "read_bytes", "write_bytes"}


def test_files_stay_short() -> None:
    folders = ("aggsim", "tests", "benchmarks", "notebooks_demo")
    files = [p for folder in folders for p in (ROOT / folder).rglob("*.py")]
    long = {name(p): n for p in files if (n := len(p.read_text(encoding="utf-8").splitlines())) > 400}
    assert not long


def test_every_source_file_has_its_tests() -> None:
    missing = []
    for path in SOURCES:
        room = room_of(path)
        if room is None or path.name == "__init__.py":
            continue
        stem = path.stem.lstrip("_")
        wanted = [p for p in (ROOT / "tests" / room).glob("test_*.py") if p.stem.endswith(stem)]
        if not wanted:
            missing.append(name(path))
    assert not missing


def public_objects() -> list[tuple[str, object]]:
    out: list[tuple[str, object]] = []
    for key, value in vars(ag).items():
        if key.startswith("_"):
            continue
        if inspect.ismodule(value):
            members = {k: v for k, v in vars(value).items() if not k.startswith("_")}
            public = [k for k, v in members.items() if getattr(v, "__module__", "").startswith("aggsim")]
            out += [(f"{key}.{k}", members[k]) for k in public]
        else:
            out.append((key, value))
    return out


@pytest.mark.parametrize(("label", "thing"), public_objects(), ids=lambda x: x if isinstance(x, str) else "")
def test_public_names_are_documented(label: str, thing: object) -> None:
    assert inspect.getdoc(thing), f"{label} has no docstring"
    if inspect.isclass(thing):
        methods = {k: v for k, v in vars(thing).items() if inspect.isfunction(v) and not k.startswith("_")}
        bare = [k for k in methods if not inspect.getdoc(getattr(thing, k))]
        assert not bare, f"{label}: no docstring on {bare}"


def test_the_top_level_holds_what_it_should() -> None:
    allowed = {"README.md", "DEVELOPERS.md", "pyproject.toml", "LICENSE"}
    allowed |= {"aggsim", "tests", "benchmarks", "notebooks_demo"}
    there = {p.name for p in ROOT.iterdir() if not p.name.startswith(".")}
    assert allowed <= there
    assert there - allowed <= {"dist", "build"} | {p for p in there if p.endswith(".egg-info")}


def test_prose_and_metadata_agree() -> None:
    metadata = (ROOT / "pyproject.toml").read_text(encoding="utf-8")
    version = re.search(r'^version = "(.+)"$', metadata, re.MULTILINE)
    assert version is not None
    assert version.group(1) == ag.__version__
    developers = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
    for room in ROOMS:
        assert f"{room}/" in developers, f"DEVELOPERS.md does not describe the room {room}"
