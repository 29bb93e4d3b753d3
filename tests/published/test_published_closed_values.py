"""Tables of the closed solutions to the digits printed, against their formulas; runs are in the record."""

from __future__ import annotations

from decimal import Decimal

import numpy as np
import pytest
from scipy import optimize

from aggsim.verification import closed
from aggsim.verification.published.aggregation import TABLES, Printed, Row

ENTRIES = [
    pytest.param(table, row, id=f"{table.problem.name}, {row[0]:g}") for table in TABLES for row in table.rows
]


def test_tables_are_complete() -> None:
    assert [table.problem for table in TABLES] == closed.ALL
    for table in TABLES:
        assert len(table.rows) in (4, 5)
        assert all(len(row[1]) == table.at.size and len(row[2]) == len(table.orders) for row in table.rows)


def assert_printed(value: float, printed: str) -> None:
    """Equal to half a unit of the last digit printed; 1e-12 for the arithmetic of the formula.

    Figures of fewer than nine digits are exact where they end (M2 = 5) and rounded where they do not.
    """
    digits = len(Decimal(printed).as_tuple().digits)
    unit = 10.0 ** int(Decimal(printed).as_tuple().exponent)
    exact = digits < 9 and value == pytest.approx(float(printed), rel=1e-12, abs=0.0)
    assert exact or abs(value - float(printed)) <= 0.5 * unit + 1e-12 * abs(value)


@pytest.mark.parametrize(("table", "row"), ENTRIES)
def test_formulas_give_the_printed_figures(table: Printed, row: Row) -> None:
    time = row[0] * table.to_time
    for value, printed in zip(table.problem.number(table.at, time), row[1], strict=True):
        assert_printed(float(value), printed)
    moments = table.problem.moments(time)
    for k, printed in zip(table.orders, row[2], strict=True):
        assert_printed(float(moments[k]), printed)


@pytest.mark.parametrize(
    ("tau", "printed"), [(1.5, "0.417188356134"), (2.0, "0.20318786998")], ids=["1.5", "2"]
)
def test_mass_of_the_sol_after_gelation(tau: float, printed: str) -> None:
    """P. J. Flory, J. Am. Chem. Soc. 63 (1941) 3083: with a gel that keeps reacting, the formula of McLeod stays
    valid for every k-mer, and the sol holds x / tau with x exp(-x) = tau exp(-tau), x < 1."""
    x = optimize.brentq(lambda x: x * np.exp(-x) - tau * np.exp(-tau), 0.0, 1.0, xtol=1e-15)
    assert_printed(x / tau, printed)
    k = np.arange(1.0, 2000.0)
    assert_printed(float(closed.PRODUCT_MONO.number(k, tau) @ k), printed)
