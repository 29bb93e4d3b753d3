from __future__ import annotations

from typing import Any

import numpy as np
import pytest

import aggsim as ag
from aggsim.ensembles.mechanisms import (
    Interval,
    breakage_mechanisms,
    collision_mechanisms,
    intervals,
    laws_of,
)
from aggsim.errors import InputError

CONSTANT = ag.kernels.constant(1.0)
STEP = ag.kernels.Strength.steps([2.0], [1.0, 3.0])


def law(rate: Any = lambda v: v, **options: Any) -> ag.Breakage:
    return ag.Breakage(rate=rate, fragments=ag.fragments.uniform_binary(), **options)


class Averages:
    """Halves that are known by their averages alone."""

    def __init__(self) -> None:
        law = ag.fragments.equal_binary()
        self.pieces, self.point_masses = law.pieces, law.point_masses


def test_parts_without_strength_are_one_mechanism() -> None:
    kernel = CONSTANT + ag.kernels.additive(2.0) + ag.kernels.constant(5.0) * STEP
    steady, varying = collision_mechanisms(kernel)
    one, two = np.array([1.0, 2.0]), np.array([3.0, 4.0])
    np.testing.assert_allclose(steady.rate(one, two), 1.0 + 2.0 * (one + two))
    np.testing.assert_allclose(varying.rate(one, two), 5.0)
    assert steady.strength is None
    interval = Interval(2.0, 4.0)
    np.testing.assert_array_equal(interval.factors([steady, varying], np.array([2.0, 3.0])), [[1, 1], [3, 3]])
    np.testing.assert_array_equal(interval.largest([steady, varying]), [1.0, 3.0])
    assert collision_mechanisms(None) == []


def test_the_largest_strength_is_a_bound() -> None:
    pulse = ag.kernels.Strength(lambda t: np.exp(-((t - 0.53) ** 2) * 20.0))
    (mechanism,) = collision_mechanisms(CONSTANT * pulse)
    assert 1.0 <= Interval(0.0, 1.0).largest([mechanism])[0] <= 1.1


def test_time_is_cut_at_jumps() -> None:
    (mechanism,) = collision_mechanisms(CONSTANT * STEP)
    parts = intervals(0.0, 5.0, [mechanism])
    ends = [part.stop for part in parts]
    assert 2.0 in ends
    assert (parts[0].start, ends[-1]) == (0.0, 5.0)
    assert [part.start for part in parts[1:]] == ends[:-1]
    assert intervals(0.0, 5.0, collision_mechanisms(CONSTANT)) == [Interval(0.0, 5.0)]
    assert intervals(0.0, 0.0, [mechanism]) == []


def test_small_particles_do_not_break() -> None:
    (mechanism,) = breakage_mechanisms([law(smallest=2.0)])
    np.testing.assert_array_equal(mechanism.rate(np.array([1.0, 2.0 * (1.0 + 1e-12), 3.0])), [0.0, 0.0, 3.0])


@pytest.mark.parametrize("rate", [-1.0, np.inf, np.nan])
def test_rates_of_breakage_are_checked(rate: float) -> None:
    (mechanism,) = breakage_mechanisms([law(rate=lambda v: np.full(v.shape, rate))])
    with pytest.raises(InputError, match="'breakage': rate"):
        mechanism.rate(np.array([1.0]))


def test_only_a_closed_batch_is_simulated() -> None:
    assert laws_of(ag.Batch(CONSTANT)) == (CONSTANT, ())
    start = ag.Monodisperse(volume=1.0, number=1.0)
    tank = ag.StirredTank(CONSTANT, residence_time=1.0, feed=start)
    settling = ag.Batch(CONSTANT, losses=ag.SettlingOut(lambda v: v, depth=1.0))
    for vessel in (tank, settling):
        with pytest.raises(InputError, match="streams or losses"):
            laws_of(vessel)
    with pytest.raises(InputError, match="closed batch"):
        laws_of(CONSTANT)


def test_fragments_must_be_drawable() -> None:
    one, two = law(), ag.Breakage(rate=lambda v: v, fragments=Averages())
    assert laws_of(ag.Batch(CONSTANT, breakage=one)) == (CONSTANT, (one,))
    with pytest.raises(InputError, match="sample"):
        laws_of(ag.Batch(None, breakage=(one, two)))
