"""The steps of Newton's method in pseudo time, one by one."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

import aggsim as ag
from aggsim.errors import InputError
from aggsim.solvers.ladder import Ladder
from aggsim.solvers.newton import Search, in_turn
from aggsim.verification import closed

Array = np.ndarray

SCHEME = ag.FixedPivot(moments=4)
GRID = ag.SizeGrid.geometric(smallest=1e-4, largest=300.0, per_doubling=3)


def search_for(
    vessel: ag.vessels.Vessel, start: ag.StartingDistribution | None, grid: ag.SizeGrid = GRID
) -> Any:
    """A search, and the numbers (n_tanks, n_sections) to begin from."""
    feeds = {id(feed): SCHEME.project(feed, grid) for feed in vessel.feeds}
    guess = np.zeros(grid.sections) if start is None else SCHEME.project(start, grid)
    everything = sum(feeds.values(), start=guess)
    volume = None if feeds else float(guess @ grid.volume)
    search = Search(vessel, SCHEME, Ladder(SCHEME, grid, False), feeds, everything, volume)
    return search, np.tile(everything if feeds else guess, (len(vessel.volumes), 1))


def test_a_closed_vessel_keeps_its_volume_in_every_step() -> None:
    problem = closed.Reversible(2.0)
    search, number = search_for(problem.vessel, closed.EXPONENTIAL)
    found = search.newton(number, GRID, None)
    assert found is not None
    assert float(found.number[0] @ GRID.volume) == pytest.approx(1.0, rel=1e-13)
    assert found.change < 1e-10
    rates = search.rates(found.system, found.number)
    assert float(np.abs(rates[0]) @ GRID.volume) <= 1e-10


def test_the_last_steps_converge_quadratically() -> None:
    """Errors 1e-2, 1e-4, 1e-8 or better: after few steps from nearby the change is below 1e-10."""
    problem = closed.Reversible(2.0)
    search, number = search_for(problem.vessel, closed.EXPONENTIAL)
    found = search.newton(number, GRID, None)
    before = search.iterations
    away = found.number * (1.0 + 0.01 * np.cos(np.arange(GRID.sections)))
    again = search.newton(away, GRID, np.inf)
    assert again is not None
    assert search.iterations - before <= 4
    np.testing.assert_allclose(again.number, found.number, rtol=1e-7, atol=1e-12)


def test_a_short_pseudo_time_step_is_a_step_in_time() -> None:
    """(1 / h - J) change = rates with h far below all times: change = h rates."""
    tank = ag.StirredTank(ag.kernels.constant(1.0), residence_time=1.0, feed=closed.EXPONENTIAL)
    search, number = search_for(tank, None)
    system = search.system(GRID)
    rates = search.rates(system, number)
    change = search._step(search._jacobian(system, number), rates, number, GRID.volume, 1e-9)
    np.testing.assert_allclose(change, 1e-9 * rates, rtol=1e-6, atol=1e-16 * np.abs(rates).max())


def test_the_jacobian_is_that_of_the_rates_of_all_tanks() -> None:
    train = ag.Train(
        [ag.Tank(ag.kernels.constant(k), volume=v) for k, v in ((1.0, 1.0), (0.5, 3.0))],
        flow=1.0,
        feed=closed.EXPONENTIAL,
        recycles=ag.Recycle(source=1, target=0, flow=0.4),
    )
    search, number = search_for(train, None)
    system = search.system(GRID)
    jacobian = search._jacobian(system, number)
    direction = np.random.default_rng(0).uniform(0.0, 1.0, number.shape) * number
    slope = 0.5 * (search.rates(system, number + direction) - search.rates(system, number - direction))
    np.testing.assert_allclose(
        (jacobian @ direction.ravel()).reshape(slope.shape), slope, rtol=0.0, atol=1e-12 * np.abs(slope).max()
    )


def test_particles_that_never_come_to_rest_leave_no_solution() -> None:
    search, number = search_for(ag.Batch(ag.kernels.constant(1.0)), closed.EXPONENTIAL)
    assert search.newton(number, GRID, None) is None


def test_states_are_placed_where_pivots_agree() -> None:
    tank = ag.StirredTank(ag.kernels.constant(1.0), residence_time=1.0, feed=closed.EXPONENTIAL)
    state = ag.steady_state(tank, grid=GRID, scheme=SCHEME)
    longer, _ = search_for(tank, None, GRID.extended(5000.0))
    placed = longer.placed(state)
    np.testing.assert_array_equal(placed[:, : GRID.sections], state.tanks)
    assert not placed[:, GRID.sections :].any()
    other, _ = search_for(tank, None, ag.SizeGrid.geometric(smallest=1e-4, largest=300.0, per_doubling=4))
    with pytest.raises(InputError, match="near has another grid"):
        other.placed(state)


def test_a_strength_is_met_when_the_vessel_is_prepared() -> None:
    pulse = ag.kernels.Strength.steps([1.0], [1.0, 0.0])
    vessel = ag.StirredTank(ag.kernels.constant(1.0) * pulse, residence_time=1.0, feed=closed.EXPONENTIAL)
    search, _ = search_for(vessel, None)
    with pytest.raises(InputError, match="changes in time"):
        search.system(GRID)


@pytest.mark.parametrize("back", [False, True], ids=["in turn", "with a recycle"])
def test_tanks_in_turn_are_recognised(back: bool) -> None:
    size, tanks = 4, 3
    matrix = np.random.default_rng(2).normal(size=(tanks * size, tanks * size))
    for k in range(0, tanks * size, size):
        if not back:
            matrix[k : k + size, k + size :] = 0.0
    assert in_turn(matrix, size) is not back
