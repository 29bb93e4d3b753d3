from __future__ import annotations

import numpy as np
import pytest

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
