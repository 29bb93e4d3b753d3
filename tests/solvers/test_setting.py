from __future__ import annotations

import warnings

import numpy as np
import pytest

import aggsim as ag
from aggsim.errors import AccuracyWarning, InputError
from aggsim.solvers.setting import FRAGMENT_ROOM, default_grid, project_or_none, starts_of

MONO = ag.Monodisperse(volume=1.0, number=1.0)
LARGE = ag.Monodisperse(volume=100.0, number=1.0)
EXPONENTIAL = ag.Exponential(mean_volume=1.0, number=1.0)
SCHEME = ag.FixedPivot(moments=4)
KERNEL = ag.kernels.constant(1.0)


def law(smallest: float | None = None) -> ag.Breakage:
    rate = ag.rates.power_law(coefficient=1.0, exponent=1.0 / 3.0)
    return ag.Breakage(rate=rate, fragments=ag.fragments.uniform_binary(), smallest=smallest)


def train(feed: ag.StartingDistribution | None = None) -> ag.Train:
    return ag.Train([ag.Tank(KERNEL, volume=1.0), ag.Tank(KERNEL, volume=2.0)], flow=1.0, feed=feed)


def test_every_tank_gets_a_start() -> None:
    assert starts_of(ag.Batch(KERNEL), MONO) == [MONO]
    assert starts_of(ag.Batch(KERNEL), [MONO]) == [MONO]
    assert starts_of(train(), MONO) == [MONO, MONO]
    assert starts_of(train(), (MONO, None)) == [MONO, None]
    assert starts_of(train(MONO), None) == [None, None]


@pytest.mark.parametrize(
    ("vessel", "start", "words"),
    [
        (ag.Batch(KERNEL), 1.0, "start=1.0 is not a StartingDistribution"),
        (ag.Batch(KERNEL), None, "start=None leaves a vessel without particles"),
        (train(), [None, None], "start=None leaves a vessel without particles"),
        (ag.Batch(KERNEL), [MONO, MONO], "start has 2 distributions for 1 tanks"),
        (train(), [MONO], "start has 1 distributions for 2 tanks"),
        (train(), [], "start has 0 distributions for 2 tanks"),
    ],
)
def test_starts_that_do_not_fit_are_refused(vessel: ag.vessels.Vessel, start: object, words: str) -> None:
    with pytest.raises(InputError, match=words):
        starts_of(vessel, start)


def test_the_grid_covers_starts_feeds_and_doses() -> None:
    alone = default_grid(SCHEME, ag.Batch(KERNEL), [MONO])
    assert alone == SCHEME.default_grid(MONO)
    fed = ag.StirredTank(KERNEL, residence_time=1.0, feed=LARGE)
    dosed = ag.Schedule(
        [
            ag.Stage(ag.Batch(KERNEL), start=0.0, stop=1.0),
            ag.Stage(ag.Batch(KERNEL), start=1.0, stop=2.0, dose=LARGE),
        ]
    )
    for vessel, starts in ((fed, [MONO]), (dosed, [MONO]), (train(LARGE), [MONO, None])):
        grid = default_grid(SCHEME, vessel, starts)
        assert grid.volume[0] <= 1.0
        assert grid.volume[-1] >= 4.0 * 100.0
    assert default_grid(SCHEME, fed, [None]) == SCHEME.default_grid(LARGE)


def test_the_same_law_twice_counts_once() -> None:
    fed = ag.StirredTank(KERNEL, residence_time=1.0, feed=EXPONENTIAL)
    assert default_grid(SCHEME, fed, [EXPONENTIAL]) == SCHEME.default_grid(EXPONENTIAL)


def test_breakage_wants_room_below() -> None:
    for start in (MONO, EXPONENTIAL):
        usual = SCHEME.default_grid(start)
        without = default_grid(SCHEME, ag.Batch(KERNEL, breakage=law()), [start])
        assert without.volume[0] == pytest.approx(usual.volume[0] / 2.0**FRAGMENT_ROOM, rel=1e-12)
        assert without.volume[-1] >= usual.volume[-1]
        quarter = float(usual.volume[0]) / 4.0
        limited = default_grid(SCHEME, ag.Batch(KERNEL, breakage=law(quarter)), [start])
        assert limited.volume[0] == pytest.approx(quarter, rel=1e-12)
    # pieces no smaller than the start: the grid as it is
    for smallest in (1.0, 1.0 - 1e-12, 5.0):
        assert default_grid(SCHEME, ag.Batch(KERNEL, breakage=law(smallest)), [MONO]) == SCHEME.default_grid(
            MONO
        )


@pytest.mark.parametrize("moments", [2, 4, 6])
@pytest.mark.parametrize("smallest", [None, 1.0])
def test_one_size_that_aggregates_and_breaks_runs_by_default(moments: int, smallest: float | None) -> None:
    """The plainest case of all: primary particles, a shear kernel, breakage, and no numerical option but the order."""
    kernel = ag.kernels.from_function(lambda v, w: (np.cbrt(v) + np.cbrt(w)) ** 3 / 8.0)
    vessel = ag.Batch(kernel, breakage=law(smallest))
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", AccuracyWarning)
        result = ag.simulate(vessel, MONO, [0.0, 0.1, 1.0, 10.0], scheme=ag.FixedPivot(moments=moments))
    assert np.abs(result.balance.closure).max() <= 1e-12
    assert result.balance.negative_share.max() <= 1e-4


def test_nothing_is_projected_for_clear_liquid() -> None:
    grid = ag.SizeGrid.geometric(smallest=1.0, largest=64.0)
    np.testing.assert_array_equal(project_or_none(SCHEME, None, grid), np.zeros(len(grid)))
    np.testing.assert_array_equal(project_or_none(SCHEME, MONO, grid), SCHEME.project(MONO, grid))
