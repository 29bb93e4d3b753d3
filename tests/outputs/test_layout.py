"""Cells, lines and closing sentences of the tables."""

from __future__ import annotations

import numpy as np
import pytest

from aggsim.outputs import _layout
from aggsim.result import Balance


def test_page_is_aligned_and_ends_with_the_caution():
    text = _layout.page(
        [("time", "[min]", ["0", "10"]), ("a long name", "[-]", ["1.0", "-"])], ["note"], ["word " * 40]
    )
    lines = text.splitlines()
    assert lines[:5] == [
        " time  a long name",
        "[min]          [-]",
        "------------------",
        "    0          1.0",
        "   10            -",
    ]
    assert lines[5:7] == ["", "note"]
    assert len(lines[7:-1]) == 2
    assert all(len(line) <= 100 for line in lines[7:-1])
    assert lines[-1] == _layout.CAUTION


@pytest.mark.parametrize(
    ("share", "shown"),
    [(0.0, "0"), (1.0, "100.000"), (0.25, "25.000"), (5.1e-6, "0.001"), (1e-8, "1.0e-06"), (-1e-16, "0")],
)
def test_percent(share, shown):
    assert _layout.percent(np.array([share])) == [shown]


def test_figures_of_sizes():
    assert _layout.decimals(np.array([1.234, 56.7, np.nan])) == ["1.23", "56.70", "-"]
    assert _layout.decimals(np.array([np.nan])) == ["-"]
    assert _layout.fixed(np.array([1.5, np.nan]), 3) == ["1.500", "-"]
    assert _layout.times(np.array([0.0, 2.5, 1234.56])) == ["0", "2.5", "1235"]


def test_names_stay_on_their_line():
    assert _layout.one_line(" drawn\noff  by sieve ") == "drawn off by sieve"


def test_closing_says_what_the_balance_is_a_share_of(make_result):
    t = np.zeros(5)
    present = np.full(5, 1e-5)
    closed = make_result(balance=Balance(1e-5, present, t, t, t))
    fed = make_result(balance=Balance(1e-5, present, t, t, t, inward={"fed": t}))
    assert "0.0e+00 of the start;" in _layout.closing(closed)[1]
    assert "0.0e+00 of what was there or came in;" in _layout.closing(fed)[1]


def test_closing_of_a_steady_state(curve):
    lines = _layout.steady(curve.states[0])
    assert lines[0].startswith("Steady state: stable, relaxes in ")
    assert lines[0].endswith(f"{curve.states[0].relaxation_time:.4g} s.")
