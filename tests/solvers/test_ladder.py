from __future__ import annotations

import numpy as np
import pytest

import aggsim as ag
from aggsim.solvers.ladder import LARGEST_AUTOMATIC_GRID, Ladder

WHOLE = ag.SizeGrid.geometric(smallest=1.0, largest=2.0**40, per_doubling=3)


def test_a_run_begins_above_its_largest_particles_and_climbs_to_the_top() -> None:
    number = np.zeros(len(WHOLE))
    number[:7] = 1.0
    ladder = Ladder(ag.FixedPivot(6), WHOLE, automatic=False)
    grid = ladder.first(number)
    kept = ladder.cut(number, grid)
    assert grid.volume[-1] == pytest.approx(WHOLE.volume[6] * 16)
    np.testing.assert_array_equal(kept, number[: len(grid)])
    steps = [grid]
    while (longer := ladder.next(steps[-1])) is not None:
        np.testing.assert_array_equal(longer.volume[: len(steps[-1])], steps[-1].volume)
        steps.append(longer)
    assert steps[-1] == WHOLE
    assert ladder.result_grid(grid) is WHOLE


def test_an_automatic_grid_goes_on_beyond_its_top_up_to_a_limit() -> None:
    ladder = Ladder(ag.FixedPivot(6), WHOLE, automatic=True)
    grid: ag.SizeGrid | None = WHOLE
    last = WHOLE
    while (grid := ladder.next(last)) is not None:
        assert grid.volume[-1] >= 32 * last.volume[-1] * (1 - 1e-9)
        last = grid
    assert LARGEST_AUTOMATIC_GRID - 16 < len(last) <= LARGEST_AUTOMATIC_GRID
    assert ladder.result_grid(last) is last


def test_the_unseen_tail_keeps_its_volume() -> None:
    number = np.exp(-WHOLE.volume / 3.0)
    ladder = Ladder(ag.FixedPivot(6), WHOLE, automatic=False)
    grid = ladder.first(number)
    kept = ladder.cut(number, grid)
    assert len(grid) < len(WHOLE)
    assert kept @ grid.volume == pytest.approx(number @ WHOLE.volume, rel=1e-15)


def test_a_scheme_that_needs_more_sections_gets_them() -> None:
    grid = ag.SizeGrid.geometric(smallest=1.0, largest=1e4, per_doubling=0.5)
    number = np.zeros(len(grid))
    number[0] = 1.0
    assert Ladder(ag.FixedPivot(6), grid, automatic=False).first(number) == grid


def test_a_long_grid_gives_the_same_as_a_short_one() -> None:
    start = ag.Monodisperse(volume=1.0, number=1.0)
    results = [
        ag.simulate(
            ag.Batch(ag.kernels.constant(1.0)),
            start,
            [0.0, 20.0],
            grid=ag.SizeGrid.monomers_then_geometric(1.0, top),
        )
        for top in (1e3, 1e12)
    ]
    short, long = results
    np.testing.assert_allclose(long.number[:, : len(short.grid)], short.number, rtol=1e-5, atol=1e-12)
    assert long.number.shape[1] == len(long.grid)
    assert not long.number[:, -50:].any()
