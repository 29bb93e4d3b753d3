"""The volume account of a run as a check."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from aggsim.sizes import SizeGrid
from aggsim.solvers import simulate
from aggsim.verification import closed
from aggsim.verification.published.account import closure
from aggsim.vessels import Batch


def test_closure_of_a_run() -> None:
    grid = SizeGrid.geometric(smallest=1e-4, largest=1e3, per_doubling=3)
    problem = closed.CONSTANT_EXP
    result = simulate(Batch(problem.kernel), problem.start, [1.0, 5.0], grid=grid)
    check = closure("a run", result)
    assert check.passed
    assert check.quantity == "closure, runs"
    assert check.error == np.abs(result.balance.closure).max()
    lost = replace(result, balance=replace(result.balance, present=result.balance.present * (1.0 - 1e-10)))
    assert not closure("a run that loses volume", lost).passed


@dataclass
class Broken:
    """A run whose account holds no numbers."""

    @property
    def balance(self) -> Broken:
        return self

    closure = np.array([0.0, np.nan])


def test_what_is_not_a_number_does_not_close() -> None:
    assert not closure("broken", Broken()).passed  # type: ignore[arg-type]
