"""Observed orders: the fit, and that a wrong reference does not pass."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from aggsim.verification import orders
from aggsim.verification.orders import FOURTH, LINEAR, PROBLEMS, SCHEMES


def test_every_scheme_has_refinements_and_a_least_order() -> None:
    for table in (orders.REFINEMENTS, orders.WITH_BREAKAGE, orders.LEAST):
        assert set(table) == set(SCHEMES)
    assert all(orders.LEAST[scheme] < scheme.order for scheme in SCHEMES)


def test_slopes() -> None:
    rows = list(PROBLEMS[0].rows(FOURTH))
    assert [row.quantity for row in rows] == ["D[4,3]", "d50", orders.ALL_QUANTILES]  # M2 is exact
    for row in rows:
        slope = -np.polyfit(np.log(row.refinements), np.log(row.errors), 1)[0]
        assert row.order == pytest.approx(slope)
        assert 3.5 < row.order < 4.5


def test_a_falsified_reference_fails() -> None:
    exact = {name: 1.001 * values for name, values in PROBLEMS[0].known.items()}
    false = replace(PROBLEMS[0], exact=lambda problem: exact)
    rows = [*false.rows(LINEAR), *false.rows(FOURTH)]
    failed = [check for check in orders.checks(rows) if not check.passed]
    assert any("moments=4" in check.at for check in failed)
