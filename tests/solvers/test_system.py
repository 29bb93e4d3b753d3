from __future__ import annotations

import numpy as np
import pytest

import aggsim as ag
from aggsim.solvers.system import NotFiniteError, System, WorkLimitError

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


# ---- several tanks and streams

MONO = ag.Monodisperse(volume=1.0, number=1.0)


def train() -> ag.Train:
    law = ag.Breakage(
        rate=ag.rates.power_law(coefficient=0.3, exponent=0.5), fragments=ag.fragments.uniform_binary()
    )
    return ag.Train(
        [
            ag.Tank(ag.kernels.constant(1.0) * ag.kernels.Strength.steps([5.0], [1.0, 2.0]), volume=1.0),
            ag.Tank(ag.kernels.additive(0.1), volume=2.0, breakage=law),
            ag.Tank(None, volume=3.0, losses=ag.SettlingOut(lambda v: 0.1 * np.cbrt(v), depth=1.0)),
        ],
        flow=1.0,
        feed=MONO,
        recycles=ag.Recycle(source=2, target=0, flow=0.5),
    )


def filled(system: System, seed: int = 0) -> np.ndarray:
    return np.random.default_rng(seed).uniform(0.0, 1.0, system.size)


def test_a_train_has_a_state_for_each_tank() -> None:
    system = System(train(), ag.FixedPivot(2), GRID)
    # numbers, two entries beyond the grid, and fed, withdrawn, settled, and to and from other tanks
    assert (system.tanks, system.width, system.size) == (3, len(GRID) + 2 + 5, 3 * (len(GRID) + 2 + 5))
    assert system.jumps == [5.0]


def test_the_jacobian_of_a_train_is_exact() -> None:
    """All but the constant feed is at most quadratic: central differences are exact for a step of any size."""
    tank = ag.StirredTank(ag.kernels.constant(1.0), residence_time=2.0, feed=MONO)
    for vessel in (train(), tank):
        system = System(vessel, ag.FixedPivot(4), GRID)
        system.on(0.0, 1.0)
        state = filled(system)
        exact = system.jacobian(0.0, state)
        for k in range(system.size):
            step = np.zeros(system.size)
            step[k] = 1.0
            slope = 0.5 * (system.rates(0.0, state + step) - system.rates(0.0, state - step))
            np.testing.assert_allclose(exact[:, k], slope, rtol=0.0, atol=1e-12 * np.abs(exact).max())


def test_a_train_keeps_its_volume_with_its_streams() -> None:
    vessel = train()
    system = System(vessel, ag.FixedPivot(6), GRID)
    system.on(0.0, 1.0)
    rates = system.rates(0.0, filled(system)).reshape(3, -1)
    n = len(GRID)
    signs = np.array([-1.0 if stream.inward else 1.0 for stream in vessel.streams])
    for row in rates:  # each tank by itself, with what comes from the others and goes to them
        assert (
            abs(row[:n] @ GRID.volume + row[n + 1] + row[n + 2 :] @ signs)
            <= 1e-12 * np.abs(row[:n]) @ GRID.volume
        )
    outside = np.array([0.0 if stream.internal else 1.0 for stream in vessel.streams])
    shares = np.array(vessel.volumes)
    whole = shares @ rates
    kept = whole[:n] @ GRID.volume + whole[n + 1] + whole[n + 2 :] @ (signs * outside)
    assert abs(kept) <= 1e-12 * np.abs(whole[:n]) @ GRID.volume


def test_tanks_that_are_alike_and_full_of_the_same_change_alike() -> None:
    tanks = [ag.Tank(ag.kernels.constant(1.0), volume=2.0) for _ in range(3)]
    fed = ag.Train(tanks, flow=1.0)
    system = System(fed, ag.FixedPivot(2), GRID)
    system.on(0.0, 1.0)
    number = np.linspace(1.0, 0.1, len(GRID))
    state = np.zeros((3, system.width))
    state[:, : len(GRID)] = number
    rates = system.rates(0.0, state.ravel()).reshape(3, -1)
    np.testing.assert_allclose(rates[1, : len(GRID)], rates[2, : len(GRID)], rtol=1e-12)
    # the first is fed clear liquid
    np.testing.assert_allclose(rates[0, : len(GRID)], rates[1, : len(GRID)] - number / 2.0, rtol=1e-11)


def test_streams_may_be_those_of_a_whole_schedule() -> None:
    vessel = ag.Batch(ag.kernels.constant(1.0))
    more = ag.StirredTank(None, residence_time=1.0, feed=MONO).streams
    system = System(vessel, ag.FixedPivot(2), GRID, streams=more)
    assert system.width == len(GRID) + 2 + 2
    system.on(0.0, 1.0)
    assert not system.rates(0.0, filled(system))[len(GRID) + 2 :].any()


def test_work_and_rates_that_are_not_finite_end_it() -> None:
    system = System(train(), ag.FixedPivot(2), GRID, allowed=2)
    system.on(0.0, 1.0)
    state = filled(system)
    for tank in range(3):  # one bad number in any tank shows
        bad = state.copy()
        bad[tank * system.width + 3] = np.nan
        system.rate_evaluations = 0
        with pytest.raises(NotFiniteError, match=r"not finite at t = 0\.5"):
            system.rates(0.5, bad)
    system.rate_evaluations = 0
    system.rates(0.0, state)
    system.rates(0.0, state)
    with pytest.raises(WorkLimitError):
        system.rates(0.0, state)
