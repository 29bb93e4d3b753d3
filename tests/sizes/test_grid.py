from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

import aggsim as ag
from aggsim.errors import GridError


def test_geometric_grid_covers_its_span_with_one_ratio() -> None:
    grid = ag.SizeGrid.geometric(smallest=1e-21, largest=1e-15, per_doubling=3)
    assert grid.volume[0] == 1e-21
    assert grid.volume[-2] < 1e-15 <= grid.volume[-1]
    np.testing.assert_allclose(grid.volume[1:] / grid.volume[:-1], 2 ** (1 / 3), rtol=1e-13)
    assert grid.is_geometric
    assert not grid.is_monomers


def test_width_and_limits_of_a_geometric_grid() -> None:
    grid = ag.SizeGrid.geometric(smallest=1.0, largest=64.0, per_doubling=2)
    np.testing.assert_allclose(grid.width, grid.volume * np.log(2) / 2, rtol=1e-12)
    np.testing.assert_allclose(grid.limits[1:] / grid.limits[:-1], np.sqrt(2), rtol=1e-12)


def test_monomers() -> None:
    grid = ag.SizeGrid.monomers(2.0, 5)
    np.testing.assert_array_equal(grid.volume, [2, 4, 6, 8, 10])
    np.testing.assert_allclose(grid.width, 2.0, rtol=1e-12)
    assert grid.is_monomers


def test_monomers_then_geometric_changes_over_where_the_spacing_reaches_one_monomer() -> None:
    grid = ag.SizeGrid.monomers_then_geometric(1.0, 100.0, per_doubling=3)
    np.testing.assert_array_equal(grid.volume[:4], [1, 2, 3, 4])
    steps = np.diff(grid.volume)
    assert (steps >= 1.0 - 1e-12).all()
    assert grid.volume[-1] >= 100.0
    assert (np.diff(steps) > -1e-9).all()


def test_diameter_is_that_of_the_sphere_of_equal_volume() -> None:
    grid = ag.SizeGrid.from_pivots(np.pi / 6 * np.array([1e-6, 2e-6]) ** 3)
    np.testing.assert_allclose(grid.diameter, [1e-6, 2e-6], rtol=1e-14)


@pytest.mark.parametrize(
    "grid",
    [
        ag.SizeGrid.geometric(smallest=1.0, largest=10.0, per_doubling=4),
        ag.SizeGrid.monomers(1.0, 10),
        ag.SizeGrid.monomers_then_geometric(1.0, 20.0, per_doubling=2),
        ag.SizeGrid.from_pivots([1.0, 2.0, 5.0]),
    ],
    ids=["geometric", "monomers", "monomers then geometric", "given"],
)
def test_extension_keeps_the_pivots_and_the_rule(grid: ag.SizeGrid) -> None:
    longer = grid.extended(100.0)
    np.testing.assert_array_equal(longer.volume[: len(grid)], grid.volume)
    assert longer.volume[-1] >= 100.0 * (1 - 1e-12)
    assert grid.extended(grid.volume[-1]) is grid
    if grid.is_geometric:
        assert longer.is_geometric
    if grid.is_monomers:
        assert longer.is_monomers


@given(
    grid=st.sampled_from(
        [
            ag.SizeGrid.geometric(smallest=1.0, largest=10.0, per_doubling=4),
            ag.SizeGrid.geometric(smallest=1.0, largest=10.0, per_doubling=0.5),
            ag.SizeGrid.monomers(1.0, 10),
            ag.SizeGrid.monomers_then_geometric(1.0, 20.0, per_doubling=2),
            ag.SizeGrid.from_pivots([1.0, 2.0, 5.0]),
        ]
    ),
    smallest=st.floats(1e-9, 0.99),
)
def test_extension_downward_reaches_the_size_and_keeps_the_pivots(grid: ag.SizeGrid, smallest: float) -> None:
    longer = grid.extended_down(smallest)
    more = longer.sections - grid.sections
    np.testing.assert_array_equal(longer.volume[more:], grid.volume)
    assert longer.volume[0] == smallest
    below = longer.volume[1 : more + 1] / longer.volume[:more]
    # geometric, and no coarser than the top of the grid; a quarter of a doubling below whole monomers
    assert np.ptp(below) <= 1e-12 * below[0]
    finest = 2.0**0.25 if grid.ratio is None else grid.ratio
    assert below[0] <= finest * (1.0 + 1e-9)
    assert below[0] ** (more / (more - 1)) > finest * (1.0 - 1e-9) if more > 1 else below[0] > 1.0
    # it can still be continued upward
    top = 3.0 * float(grid.volume[-1])
    higher = longer.extended(top)
    np.testing.assert_array_equal(higher.volume[: longer.sections], longer.volume)
    assert higher.volume[-1] >= top * (1 - 1e-12)


def test_extension_downward_by_whole_sections_keeps_a_geometric_grid_geometric() -> None:
    grid = ag.SizeGrid.geometric(smallest=1.0, largest=64.0, per_doubling=3)
    longer = grid.extended_down(2.0**-7)
    assert longer.sections == grid.sections + 21
    assert longer.is_geometric
    assert not ag.SizeGrid.monomers(1.0, 5).extended_down(0.5).is_monomers


@pytest.mark.parametrize("smallest", [1.0, 2.0, 0.0, -1.0, np.nan, np.inf, "small"])
def test_extension_downward_wants_a_smaller_size(smallest: object) -> None:
    with pytest.raises(GridError, match=r"smallest=.*below 1"):
        ag.SizeGrid.geometric(smallest=1.0, largest=10.0).extended_down(smallest)


@given(st.floats(1e-27, 1e-3), st.floats(1.5, 1e9), st.floats(0.5, 12.0), st.floats(1.0, 1e6))
def test_any_geometric_grid_is_increasing_and_extends(
    smallest: float, span: float, density: float, more: float
) -> None:
    grid = ag.SizeGrid.geometric(smallest=smallest, largest=smallest * span, per_doubling=density)
    longer = grid.extended(smallest * span * more)
    assert (np.diff(longer.volume) > 0).all()
    assert longer.volume[-1] >= smallest * span * more * (1 - 1e-9)


def test_grids_are_equal_by_value_and_cannot_be_written_to() -> None:
    a, b = ag.SizeGrid.monomers(1.0, 5), ag.SizeGrid.from_pivots([1.0, 2.0, 3.0, 4.0, 5.0])
    assert a == b
    assert hash(a) == hash(b)
    with pytest.raises(ValueError, match="read-only"):
        a.volume[0] = 2.0


@pytest.mark.parametrize(
    ("make", "words"),
    [
        (lambda: ag.SizeGrid.geometric(smallest=-1.0, largest=1.0), "smallest=-1"),
        (lambda: ag.SizeGrid.geometric(smallest=2.0, largest=1.0), "largest=1"),
        (lambda: ag.SizeGrid.geometric(smallest=float("nan"), largest=1.0), "smallest=nan"),
        (lambda: ag.SizeGrid.geometric(smallest=1e-20, largest=1e20, per_doubling=0.0), "per_doubling=0"),
        (lambda: ag.SizeGrid.from_pivots([1.0, 3.0, 2.0]), r"volume\[2\]=2 after 3"),
        (lambda: ag.SizeGrid.from_pivots([]), "empty"),
        (lambda: ag.SizeGrid.from_pivots([1.0]), "at least 2"),
        (lambda: ag.SizeGrid.from_pivots([[1.0, 2.0]]), r"shape \(1, 2\)"),
        (lambda: ag.SizeGrid.from_pivots([1.0, np.inf]), r"volume\[1\]=inf"),
        (lambda: ag.SizeGrid.geometric(smallest=1e-300, largest=1e300, per_doubling=50), "at most 20000"),
    ],
)
def test_malformed_grids_are_refused(make, words: str) -> None:  # type: ignore[no-untyped-def]
    with pytest.raises(GridError, match=words):
        make()


def test_gaps_among_monomers_close() -> None:
    grid = ag.SizeGrid.monomers_then_geometric(1.0, 100.0, per_doubling=3)
    filled = grid.without_gaps()
    assert set(grid.volume.tolist()) <= set(filled.volume.tolist())
    assert (filled.volume[1:] / filled.volume[:-1]).max() <= 2.0 ** (1.0 / 3.0) * (1.0 + 1e-12)
    geometric = ag.SizeGrid.geometric(smallest=1.0, largest=100.0)
    np.testing.assert_allclose(geometric.without_gaps().volume, geometric.volume, rtol=1e-13)
    assert ag.SizeGrid.monomers(1.0, 9).without_gaps() == ag.SizeGrid.monomers(1.0, 9)


@pytest.mark.parametrize("factor", [0.5, 1.5, 2.0, 3.0])
def test_coarser_grids_cover_the_same_range(factor: float) -> None:
    for grid in (
        ag.SizeGrid.geometric(smallest=1.0, largest=1e4, per_doubling=4),
        ag.SizeGrid.geometric(smallest=1.0, largest=1e4, per_doubling=4).extended_down(1e-3),
        ag.SizeGrid.monomers_then_geometric(1.0, 1e4, 4),
    ):
        coarse = grid.coarser(factor)
        assert coarse.volume[0] == grid.volume[0]
        assert coarse.volume[-1] >= grid.volume[-1] * (1.0 - 1e-9)
        assert len(coarse) == pytest.approx(len(grid) / factor, abs=10)
    assert ag.SizeGrid.monomers(1.0, 9).coarser(factor) == ag.SizeGrid.monomers(1.0, 9)
