"""Mean sizes, percentiles and specific surface of textbook distributions."""

from __future__ import annotations

import pytest

from aggsim.verification.published import sizes


def test_figures() -> None:
    assert [check for check in sizes.mean_sizes() if not check.passed] == []


def test_falsified_figures_fail(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setitem(sizes.MEANS, (4, 3), 2.16660615)
    monkeypatch.setitem(sizes.PERCENTILES, (3, 0.9), 3.543251)
    failed = [check for check in sizes.mean_sizes() if not check.passed]
    assert [check.quantity for check in failed] == ["mean diameter [um]", "percentile [um]", "share below"]
