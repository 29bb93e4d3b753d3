"""The account as a table: every stream in its column, and the columns add up."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from aggsim.errors import TimesError
from aggsim.outputs import tables
from aggsim.result import Balance

ROUNDED = 5e-4  # per cell with three decimals


def split(text: str) -> tuple[list[str], np.ndarray, str]:
    """Header lines, figures of the rows, and the text below."""
    lines = text.splitlines()
    end = lines.index("")
    return lines[:2], np.array([line.split() for line in lines[3:end]], dtype=float), "\n".join(lines[end:])


def test_columns_are_those_of_the_balance(tank_run):
    header, cells, notes = split(tables.account(tank_run, times=tank_run.times))
    names = "time initial fed settled beyond grid withdrawn present beyond grid closure error"
    assert header[0].split() == names.split()
    units = "[min] [%] [% in] [% out] [% out] [% out] [%] [%] [-]"
    assert header[1].split() == units.split()
    balance = tank_run.balance
    expected = [
        np.full(13, balance.initial),
        balance.inward["fed"],
        *balance.outward.values(),
        balance.present,
        balance.beyond_grid,
    ]
    np.testing.assert_allclose(cells[:, 0], tank_run.times / 60.0, rtol=1e-12)
    for k, volume in enumerate(expected, start=1):
        np.testing.assert_allclose(cells[:, k], 100.0 * volume / balance.scale, rtol=0.0, atol=1.01 * ROUNDED)
    assert np.abs(cells[:, -1]).max() < 1e-11
    assert f"100 % is a volume fraction of {balance.scale:.6g}" in notes
    assert notes.endswith(tables.CAUTION)


def test_what_comes_in_is_what_goes_and_stays(tank_run, train_run):
    for run in (tank_run, train_run, *train_run.tanks):
        _, cells, _ = split(tables.account(run))
        inward = 1 + len(run.balance.inward)
        np.testing.assert_allclose(
            cells[:, 1 : 1 + inward].sum(axis=1),
            cells[:, 1 + inward : -1].sum(axis=1),
            rtol=0.0,
            atol=cells.shape[1] * ROUNDED,
        )


def test_batch_without_streams(result):
    header, cells, _ = split(tables.account(result))
    assert header[0].split() == ["time", "initial", "present", "beyond", "grid", "closure", "error"]
    np.testing.assert_allclose(cells[:, 1], 100.0)


def test_closure_error_is_shown(make_result):
    zeros = np.zeros(5)
    lost = make_result(balance=Balance(1e-5, np.full(5, 0.9e-5), zeros, zeros, zeros))
    _, cells, notes = split(tables.account(lost))
    np.testing.assert_allclose(cells[:, -1], -0.1)
    assert "closes to 1.0e-01" in notes


def test_small_shares_keep_their_power_of_ten(make_result):
    beyond = np.array([0.0, 1e-12, 1e-9, 1e-7, 1e-5]) * 1e-5
    zeros = np.zeros(5)
    text = tables.account(make_result(balance=Balance(1e-5, 1e-5 - beyond, beyond, zeros, zeros)))
    shown = [line.split()[3] for line in text.splitlines()[3:8]]
    assert shown == ["0", "1.0e-10", "1.0e-07", "1.0e-05", "0.001"]


def test_names_of_streams_cannot_break_the_table(make_result):
    zeros = np.zeros(5)
    balance = Balance(1e-5, np.full(5, 1e-5), zeros, zeros, zeros, inward={"a\nb": zeros, "present": zeros})
    header, cells, _ = split(tables.account(make_result(balance=balance)))
    assert header[0].split()[:6] == ["time", "initial", "a", "b", "present", "present"]
    assert cells.shape == (5, 7)


def test_nothing_came_yet(make_result):
    zeros = np.zeros(5)
    run = make_result(balance=Balance(0.0, zeros, zeros, zeros, zeros, inward={"fed": zeros}))
    with np.errstate(invalid="ignore"):  # the closure of nothing
        _, cells, _ = split(tables.account(run))
    np.testing.assert_array_equal(cells[:, 1:5], 0.0)


def test_chosen_times(tank_run):
    _, cells, _ = split(tables.account(tank_run, times=[0.0, 1500.0]))
    np.testing.assert_array_equal(cells[:, 0], [0.0, 25.0])
    with pytest.raises(TimesError, match=r"times\[0\]=1e\+06 s"):
        tables.account(tank_run, times=1e6)


def test_rates_of_a_steady_state(curve):
    state = curve.states[0]
    lines = tables.account(state).splitlines()
    rows = {line.split()[0]: line.split() for line in lines[3:6]}
    assert lines[1].split() == ["[1/s]", "[%", "of", "in]"]
    assert rows["fed"][1] == "in"
    assert rows["withdrawn"][1] == "out"
    # a volume fraction of 1e-4 over a residence time of 1200 s
    assert float(rows["fed"][2]) == pytest.approx(1e-4 / 1200.0, rel=1e-4)  # five figures shown
    assert float(rows["withdrawn"][2]) == pytest.approx(1e-4 / 1200.0, rel=1e-4)
    assert [rows[name][-1] for name in ("fed", "withdrawn")] == ["100.000", "100.000"]
    assert "Present: a volume fraction of 0.0001." in lines
    assert lines[-1] == tables.CAUTION
    with pytest.raises(TimesError, match="no times"):
        tables.account(state, times=0.0)


def test_steady_state_without_streams(curve):
    balance = replace(curve.states[0].balance, inward={}, outward={}, beyond_grid=0.0)
    lines = tables.account(replace(curve.states[0], balance=balance)).splitlines()
    assert lines[3].split() == ["beyond", "grid", "out", "0.0000e+00", "-"]
