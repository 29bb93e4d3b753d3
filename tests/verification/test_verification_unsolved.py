"""Tables of kernels without a closed solution."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from aggsim.verification import record
from aggsim.verification.published import unsolved
from aggsim.verification.published.unsolved import SHEAR, UNSOLVED


def test_figures(quick: record.Record) -> None:
    checks = [check for check in quick.checks if check.case.group == unsolved.GROUP]
    assert [check for check in checks if not check.passed] == []
    assert len({check.case.name for check in checks}) == 2 * len(UNSOLVED)


def test_columns_have_the_same_times() -> None:
    for problem in UNSOLVED:
        np.testing.assert_array_equal(problem.numbers[:, 0], problem.times)
        assert problem.numbers.shape[1] == problem.kmers.size + 1


def test_falsified_figures_fail(monkeypatch: pytest.MonkeyPatch) -> None:
    moments = SHEAR.moments.copy()
    moments[2, 1] *= 1.0 + 3e-7
    monkeypatch.setattr(unsolved, "UNSOLVED", [replace(SHEAR, moments=moments)])
    failed = [check for check in unsolved.kernels_without_solution() if not check.passed]
    assert [(check.quantity, check.at) for check in failed] == [("M0", "t = 1"), ("M0", "t = 1")]
