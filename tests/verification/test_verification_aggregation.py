"""Printed figures of closed solutions of aggregation, against runs."""

from __future__ import annotations

import numpy as np
import pytest

from aggsim.verification import closed, record
from aggsim.verification.published import aggregation
from aggsim.verification.published.aggregation import TABLES


def test_figures(quick: record.Record) -> None:
    checks = [check for check in quick.checks if check.case.group == aggregation.GROUP]
    assert [check for check in checks if not check.passed] == []
    figures = sum(len(row[1]) + len(row[2]) for table in TABLES for row in table.rows)
    assert len(checks) == figures + 1  # the half-life


def test_times_are_those_of_the_solutions() -> None:
    for table in TABLES:
        exact = table.problem.moments(float(table.times[0]))
        assert float(table.rows[0][2][-1]) == pytest.approx(exact[3], rel=1e-8)


def test_densities_between_pivots() -> None:
    table = next(table for table in TABLES if table.problem is closed.CONSTANT_EXP)
    result = aggregation.run(table)
    points = np.array([0.0507, 0.3333, 1.7, 7.7])
    exact = closed.CONSTANT_EXP.number(points, float(result.times[-1]))
    np.testing.assert_allclose(aggregation.densities(result, -1, points), exact, rtol=1e-7)


def test_falsified_figures_fail(monkeypatch: pytest.MonkeyPatch) -> None:
    (table, *_) = TABLES
    time, numbers, moments = table.rows[1]
    rows = [table.rows[0], (time, ["0.25000001", *numbers[1:]], [*moments[:2], "13.000001"]), *table.rows[2:]]
    false = aggregation.Printed(
        table.problem, rows, table.unit, table.to_time, table.at, table.orders, table.grid
    )
    monkeypatch.setattr(aggregation, "TABLES", [false])
    failed = [check.quantity for check in aggregation.closed_solutions() if not check.passed]
    assert failed == ["number of k-mers", "M3"]
