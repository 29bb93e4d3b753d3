"""Limits of cells: pivots stand midway."""

from __future__ import annotations

import numpy as np
import pytest

import aggsim as ag
from aggsim.schemes.cells.limits import cell_limits, continued_cells


@pytest.mark.parametrize("ratio", [1.01, 2.0 ** (1 / 3), 2.0, 10.0])
def test_limits_of_geometric_pivots_are_geometric_and_have_the_pivots_midway(ratio: float) -> None:
    x = 1e-20 * ratio ** np.arange(12.0)
    limits = cell_limits(x)
    np.testing.assert_allclose(0.5 * (limits[1:] + limits[:-1]), x, rtol=1e-12)
    np.testing.assert_allclose(limits[1:] / limits[:-1], ratio, rtol=1e-12)
    np.testing.assert_allclose(limits[1:-1], 2.0 / (1.0 / x[1:] + 1.0 / x[:-1]), rtol=1e-13)  # harmonic means


def test_limits_of_multiples_lie_half_a_monomer_above_and_below() -> None:
    x = ag.SizeGrid.monomers(3.0, 50).volume
    np.testing.assert_allclose(cell_limits(x), 3.0 * (np.arange(51.0) + 0.5), rtol=1e-14)


@pytest.mark.parametrize(
    "pivots",
    [
        [1.0, 2.0],
        [1.0, 100.0],
        [0.1, 1.1, 2.1, 3.1],
        [1.0, 2.0, 3.5, 3.6, 9.0, 11.0],
        ag.SizeGrid.monomers_then_geometric(1.0, 1e4, per_doubling=3).volume,
    ],
    ids=["two", "two far apart", "arithmetic from far below a step", "irregular", "monomers then geometric"],
)
def test_limits_are_positive_and_alternate_with_any_pivots(pivots: list[float]) -> None:
    x = np.array(pivots)
    limits = cell_limits(x)
    assert limits[0] > 0.0
    assert (limits[:-1] < x).all()
    assert (x < limits[1:]).all()


def test_pivots_stay_midway_to_second_order_where_the_spacing_changes_smoothly() -> None:
    misses = []
    for n in (40, 80):
        s = np.arange(n) / n
        x = np.exp(3.0 * s + s**2)
        limits = cell_limits(x)
        middle = 0.5 * (limits[1:] + limits[:-1])
        misses.append(np.abs((middle - x) / np.diff(limits))[2:-2].max())
    assert misses[0] < 1e-3
    assert misses[0] / misses[1] > 3.5


@pytest.mark.parametrize(
    "grid",
    [
        ag.SizeGrid.geometric(smallest=1.0, largest=64.0, per_doubling=3),
        ag.SizeGrid.monomers(1.0, 20),
        ag.SizeGrid.from_pivots([1.0, 2.0, 3.5, 3.6, 9.0, 11.0]),
        ag.SizeGrid.from_pivots([1.0, 2.0]),
    ],
    ids=["geometric", "monomers", "irregular", "two"],
)
def test_the_continuation_leaves_the_cells_of_the_grid_as_they_are(grid: ag.SizeGrid) -> None:
    x, limits = continued_cells(grid, 2)
    n = grid.sections
    np.testing.assert_array_equal(x[:n], grid.volume)
    np.testing.assert_array_equal(limits[: n + 1], cell_limits(np.array(grid.volume)))
    assert (limits[:-1] < x).all()
    assert (x < limits[1:]).all()
    assert np.sum(x > 2.0 * grid.volume[-1]) >= 2
