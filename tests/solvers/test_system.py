from __future__ import annotations

import numpy as np

import aggsim as ag
from aggsim.solvers.system import System

GRID = ag.SizeGrid.geometric(smallest=1.0, largest=1e3, per_doubling=3)


def test_rates_follow_the_strengths_of_the_interval() -> None:
    steps = ag.kernels.Strength.steps([1.0], [1.0, 3.0])
    system = System(ag.Batch(ag.kernels.constant(1.0) * steps), ag.FixedPivot(2), GRID)
    assert system.jumps == [1.0]
    state = np.concatenate([np.ones(len(GRID)), [0.0, 0.0]])
    system.on(0.0, 1.0)
    before = system.rates(1.0, state)
    system.on(1.0, 2.0)
    np.testing.assert_allclose(system.rates(1.0, state), 3.0 * before, rtol=1e-13)


def test_evaluations_are_counted_and_volume_is_kept() -> None:
    system = System(ag.Batch(ag.kernels.additive(1.0)), ag.FixedPivot(6), GRID)
    system.on(0.0, 1.0)
    state = np.concatenate([np.linspace(1.0, 0.0, len(GRID)), [0.0, 0.0]])
    weight = np.concatenate([GRID.volume, [0.0, 1.0]])
    rates, jacobian = system.rates(0.0, state), system.jacobian(0.0, state)
    assert abs(weight @ rates) < 1e-13 * (weight @ np.abs(rates))
    assert np.abs(weight @ jacobian).max() < 1e-13 * (weight @ np.abs(jacobian)).max()
    assert (system.rate_evaluations, system.jacobian_evaluations) == (1, 1)
