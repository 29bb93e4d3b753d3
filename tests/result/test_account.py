from __future__ import annotations

import warnings

import numpy as np
import pytest

import aggsim as ag
from aggsim.errors import AccuracyWarning
from aggsim.result import Balance, Contributions


def test_closure_counts_what_passed_the_top() -> None:
    balance = Balance(
        initial=2.0,
        present=np.array([2.0, 1.5]),
        beyond_grid=np.array([0.0, 0.4]),
        beyond_grid_number=np.zeros(2),
        negative_share=np.array([0.0, 1e-7]),
    )
    np.testing.assert_allclose(balance.closure, [0.0, -0.05])
    assert "closure error 5.0e-02" in str(balance)


def test_shares_add_to_one_and_are_zero_where_nothing_collides() -> None:
    found = Contributions(
        {
            "slow": (np.array([1.0, 0.0]), np.array([2.0, 0.0])),
            "fast": (np.array([3.0, 0.0]), np.array([6.0, 0.0])),
        }
    )
    np.testing.assert_array_equal(found["fast"].event_share, [0.75, 0.0])
    np.testing.assert_array_equal(found["slow"].volume_share, [0.25, 0.0])
    assert list(found) == ["slow", "fast"]
    assert "slow: 25.0%" in repr(found)
    with pytest.raises(KeyError, match="parts are"):
        found["settling"]


def open_balance() -> Balance:
    return Balance(
        initial=1.0,
        present=np.array([1.0, 1.4]),
        beyond_grid=np.array([0.0, 0.1]),
        beyond_grid_number=np.zeros(2),
        negative_share=np.zeros(2),
        inward={"fed": np.array([0.0, 2.0]), "dosed": np.array([0.0, 1.0])},
        outward={
            "withdrawn": np.array([0.0, 1.5]),
            "settled": np.array([0.0, 0.7]),
            "diluted": np.array([0.0, 0.2]),
        },
    )


def test_streams_are_added_up() -> None:
    balance = open_balance()
    np.testing.assert_allclose(balance.fed, [0.0, 3.0])
    np.testing.assert_allclose(balance.withdrawn, [0.0, 1.7])
    np.testing.assert_allclose(balance.settled, [0.0, 0.7])
    assert balance.scale == 4.0
    np.testing.assert_allclose(balance.closure, [0.0, (1.4 + 0.1 + 1.7 + 0.7 - 1.0 - 3.0) / 4.0], atol=1e-16)
    text = str(balance)
    for words in ("initial 1,", "fed 2,", "dosed 1,", "settled 0.7", "diluted 0.2", "present 1.4"):
        assert words in text


def test_without_streams_nothing_is_fed_or_gone() -> None:
    balance = Balance(2.0, np.full(3, 2.0), np.zeros(3), np.zeros(3), np.zeros(3))
    for nothing in (balance.fed, balance.withdrawn, balance.settled):
        np.testing.assert_array_equal(nothing, np.zeros(3))
    assert balance.scale == 2.0


def test_the_negative_share_is_one_of_what_is_there() -> None:
    """One feed of a single size in a coarse geometric grid: the share at rest does not fall as more is fed."""
    grid = ag.SizeGrid.geometric(smallest=0.01, largest=300.0, per_doubling=3)
    tank = ag.StirredTank(
        ag.kernels.constant(1.0), residence_time=1.0, feed=ag.Monodisperse(volume=1.0, number=1.0)
    )
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", AccuracyWarning)
        result = ag.simulate(tank, None, [50.0, 500.0], grid=grid, scheme=ag.FixedPivot(moments=4))
    there = -np.minimum(result.number, 0.0) @ grid.volume / result.moment(1)
    assert there[1] == pytest.approx(there[0], rel=1e-6)
    np.testing.assert_allclose(result.balance.negative_share, there, rtol=1e-6)
