from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pytest

import aggsim as ag
from aggsim.errors import InputError
from aggsim.vessels import Aggregation, Process, Site, Vessel, collision_rates
from aggsim.vessels.base import several

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


# ---- what every vessel says of itself

MONO = ag.Monodisperse(volume=1.0, number=1.0)


def test_a_vessel_of_ones_own_is_one_tank_for_all_time() -> None:
    vessel = TwoWays()
    assert vessel.volumes == (1.0,)
    (span,) = vessel.spans
    assert (span.start, span.stop, span.vessel) == (0.0, np.inf, vessel)
    assert vessel.streams == ()
    assert vessel.feeds == ()
    assert vessel.smallest is None


def test_streams_of_one_name_are_kept_once() -> None:
    losses = [ag.Withdrawal(0.1), ag.Withdrawal(0.2, name="sampling")]
    tank = ag.StirredTank(
        None, residence_time=1.0, feed=[ag.Feed(distribution=MONO, share=0.2)] * 2, losses=losses
    )
    assert [stream.name for stream in tank.streams] == ["withdrawn", "sampling", "fed"]
    assert tank.feeds == (MONO, MONO)


def test_a_site_finds_the_entries_of_its_streams() -> None:
    tank = ag.StirredTank(None, residence_time=1.0, feed=MONO)
    scheme = ag.FixedPivot(2)
    site = Site(scheme.prepare(GRID), tank.streams, lambda law: scheme.project(law, GRID), len(GRID) + 2)
    assert [site.entry(stream) for stream in tank.streams] == [len(GRID) + 2, len(GRID) + 3]
    assert site.grid is GRID
    np.testing.assert_array_equal(site.numbers(MONO), scheme.project(MONO, GRID))


def test_one_object_or_several_are_taken() -> None:
    loss = ag.Withdrawal(0.1)
    assert several("losses", None, ag.Withdrawal, "...") == ()
    assert several("losses", loss, ag.Withdrawal, "...") == (loss,)
    assert several("losses", [loss, loss], ag.Withdrawal, "...") == (loss, loss)
    with pytest.raises(
        InputError, match="losses=3 is not allowed; allowed: None, one Withdrawal or a sequence"
    ):
        several("losses", [loss, 3], ag.Withdrawal, "...")
