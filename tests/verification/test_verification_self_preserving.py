"""The self-preserving distribution of the Brownian kernel."""

from __future__ import annotations

import pytest

from aggsim.verification import record
from aggsim.verification.published import self_preserving
from aggsim.verification.published.self_preserving import SPHERES


def test_figures(quick: record.Record) -> None:
    checks = [check for check in quick.checks if check.case.group == self_preserving.GROUP]
    assert [check for check in checks if not check.passed] == []
    assert len({check.case.name for check in checks}) == 3


def test_the_reduced_distribution_has_unit_moments() -> None:
    result = self_preserving.late(SPHERES)
    assert self_preserving.reduced_moment(result, 0.0) == pytest.approx(1.0, rel=1e-12)
    assert self_preserving.reduced_moment(result, 1.0) == pytest.approx(1.0, rel=1e-12)


def test_falsified_figures_fail(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(self_preserving, "DECAY", 1.0731358)
    monkeypatch.setitem(self_preserving.PSI, 1.0, 0.383060)
    failed = [check for check in self_preserving.self_preserving() if not check.passed]
    assert len(failed) == 4  # from both starts
