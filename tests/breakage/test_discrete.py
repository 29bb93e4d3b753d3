from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from aggsim.breakage import fragments

GRID = np.array([1.0, 3.0, 6.0])


@pytest.mark.parametrize(("law", "number"), [(fragments.equal_binary(), 2.0), (fragments.ternary(), 3.0)])
def test_equal_pieces(law: Any, number: float) -> None:
    parent, volume, count = law.point_masses(GRID, np.array([1, 2]))
    np.testing.assert_array_equal(parent, [1, 2])
    np.testing.assert_array_equal(volume, GRID[1:] / number)
    np.testing.assert_array_equal(count, number)
    np.testing.assert_array_equal(law.pieces(GRID), number)


def test_erosion_leaves_a_piece_and_the_remainder() -> None:
    law = fragments.erosion(1.0)
    parent, volume, count = law.point_masses(GRID, np.array([0, 1, 2]))
    np.testing.assert_array_equal(parent, [0, 0, 1, 1, 2, 2])
    # a parent of less than two pieces splits into halves
    np.testing.assert_array_equal(volume, [0.5, 0.5, 1.0, 2.0, 1.0, 5.0])
    np.testing.assert_array_equal(count, 1.0)
    assert law.pieces(6.0) == 2.0


def test_erosion_is_continuous_at_two_pieces() -> None:
    _, volume, _ = fragments.erosion(1.0).point_masses(np.array([2.0 - 1e-9, 2.0, 2.0 + 1e-9]), np.arange(3))
    np.testing.assert_allclose(volume, 1.0, atol=2e-9)
