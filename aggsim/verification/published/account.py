"""The account of particle volume, checked on every run of the record."""

from __future__ import annotations

import numpy as np

from aggsim.result import Result, SteadyState
from aggsim.verification.checks import Case, Check

CASE = Case(
    "Volume account",
    "volume present, fed, withdrawn and beyond the grid, less that of the start",
    "conservation of particle volume",
    "round-off",
)
TOLERANCE = 1e-11


def closure(title: str, result: Result | SteadyState) -> Check:
    """Largest closure error of a run or a steady state, over the volume."""
    largest = float(np.abs(result.balance.closure).max())
    kind = "closure, steady states" if isinstance(result, SteadyState) else "closure, runs"
    return CASE.check(kind, title, 0.0, largest, absolute=TOLERANCE)
