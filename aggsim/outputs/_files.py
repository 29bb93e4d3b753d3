"""Writing files so that a reader never meets half of one."""

from __future__ import annotations

import os
from importlib.metadata import PackageNotFoundError, version
from pathlib import Path


def write_atomically(path: str | os.PathLike[str], content: bytes) -> None:
    """Write `content` to exactly `path`, by way of a neighbour that takes its place once it is complete."""
    target = Path(os.path.realpath(path))  # through a link to the file behind it
    if not target.parent.is_dir():
        raise FileNotFoundError(
            f"the folder {target.parent} does not exist, so {target.name} cannot be written"
        )
    if target.is_dir():
        raise IsADirectoryError(f"{target} is a folder; a file name is needed")
    neighbour = target.with_name(f".{target.name}.{os.getpid()}.part")
    try:
        with open(neighbour, "wb") as file:
            file.write(content)
            file.flush()
            os.fsync(file.fileno())
        os.replace(neighbour, target)
    finally:
        neighbour.unlink(missing_ok=True)


def package_version() -> str:
    """Version of aggsim, as installed."""
    try:
        return version("aggsim")
    except PackageNotFoundError:  # run from a folder that was never installed
        return "unknown"
