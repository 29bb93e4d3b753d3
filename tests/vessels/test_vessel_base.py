from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pytest

import aggsim as ag
from aggsim.vessels import Aggregation, Process, Site, Vessel, collision_rates

GRID = ag.SizeGrid.geometric(smallest=1.0, largest=100.0, per_doubling=2)


@dataclass(frozen=True)
class TwoWays(Vessel):
    """A vessel of its own making: two processes side by side."""

    @property
    def processes(self) -> tuple[Process, ...]:
        return (Aggregation(ag.kernels.constant(0.7)), Aggregation(ag.kernels.constant(0.3).named("second")))


def test_processes_add_up_and_simulate_takes_any_vessel() -> None:
    start = ag.Monodisperse(volume=1.0, number=1.0)
    mine = ag.simulate(TwoWays(), start, [2.0])
    batch = ag.simulate(ag.Batch(ag.kernels.constant(1.0)), start, [2.0])
    np.testing.assert_allclose(mine.number, batch.number, rtol=1e-5, atol=1e-9)
    assert list(mine.contributions) == ["constant", "second"]
    assert mine.contributions["second"].event_share[0] == pytest.approx(0.3)


def rates_of(
    kernel: ag.kernels.Kernel, times: np.ndarray, number: np.ndarray
) -> tuple[np.ndarray, np.ndarray]:
    terms = ag.Batch(kernel).terms(Site(ag.FixedPivot(2).prepare(GRID)))
    return collision_rates(terms, GRID.volume, times, number)["constant"]


def test_collisions_count_each_pair_once() -> None:
    number = np.array([[2.0, 1.0] + [0.0] * (len(GRID) - 2)])
    events, flux = rates_of(ag.kernels.constant(3.0), np.array([0.0]), number)
    assert events[0] == pytest.approx(0.5 * 3.0 * (2.0 + 1.0) ** 2)
    # every particle meets with rate 3 * 3 per time and brings its own volume
    assert flux[0] == pytest.approx(3.0 * 3.0 * (number[0] @ GRID.volume))


def test_collisions_follow_the_strength() -> None:
    kernel = ag.kernels.constant(1.0) * ag.kernels.Strength.steps([1.0], [1.0, 2.0])
    events, _ = rates_of(kernel, np.array([0.5, 1.5]), np.ones((2, len(GRID))))
    assert events[1] == pytest.approx(2.0 * events[0])


def test_negative_numbers_do_not_collide() -> None:
    number = np.zeros((1, len(GRID)))
    number[0, 0], number[0, -1] = 1.0, -1e-3
    events, flux = rates_of(ag.kernels.constant(1.0), np.array([0.0]), number)
    assert events[0] == pytest.approx(0.5)
    assert flux[0] == pytest.approx(GRID.volume[0])
