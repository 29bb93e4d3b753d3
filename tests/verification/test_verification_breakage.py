"""Published figures of breakage, equilibria and stirred tanks."""

from __future__ import annotations

import numpy as np
import pytest

from aggsim.verification import closed, record
from aggsim.verification.published import breakage


def test_figures(quick: record.Record) -> None:
    groups = (breakage.BREAKAGE, breakage.TANK)
    checks = [check for check in quick.checks if check.case.group in groups]
    assert [check for check in checks if not check.passed] == []
    assert {check.case.group for check in checks} == set(groups)


@pytest.mark.parametrize("problem", closed.BREAKING, ids=lambda p: p.name)
@pytest.mark.parametrize("volume", [0.01, 0.1])
def test_grids_go_through_the_printed_volumes(problem: closed.Breaking, volume: float) -> None:
    grid, k = breakage.grid_for(problem, volume)
    assert grid.volume[k] == pytest.approx(volume, rel=1e-12)
    if problem.start is closed.MONO:
        assert grid.volume[-1] == pytest.approx(1.0, rel=1e-12)


def test_the_kernel_of_the_decay_has_the_rate_of_equal_spheres() -> None:
    rate = 2.0 * breakage.PER_FRACTION * (np.pi / 6.0 * 2e-6**3)
    assert rate == pytest.approx(0.1 * 4.0 / 3.0 * 50.0 * 2e-6**3, rel=1e-13)


def test_falsified_figures_fail(monkeypatch: pytest.MonkeyPatch) -> None:
    row = breakage.TABLE[closed.B2, 3.0]
    monkeypatch.setitem(breakage.TABLE, (closed.B2, 3.0), row.replace("3.27932150039", "3.27933"))
    monkeypatch.setitem(breakage.LAST, 2.0, 2.000001)
    monkeypatch.setitem(breakage.KMERS, 1.0, [0.5773503, *breakage.KMERS[1.0][1:]])
    groups = (breakage.breakage_alone, breakage.equilibria, breakage.stirred_tanks)
    failed = [check.quantity for group in groups for check in group() if not check.passed]
    assert failed == ["M0", "M0", "number of k-mers"]
