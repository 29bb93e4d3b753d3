"""States of tanks, of a run and at a steady state."""

from __future__ import annotations

import numpy as np
import pytest

from aggsim.errors import DistributionError, TimesError
from aggsim.outputs._tanks import States, tanks_at
from aggsim.sizes import SizeGrid


def test_tanks_of_a_run_at_the_nearest_output(train_run):
    for time, row in ((None, 12), (310.0, 3), (1200.0, 12), (0.0, 0)):
        tanks = tanks_at(train_run, time)
        assert (tanks.row, tanks.time) == (row, train_run.times[row])
        for k, tank in enumerate(train_run.tanks):
            np.testing.assert_array_equal(tanks.states.number[k], tank.number[row])
            assert tanks.contributions[k] is tank.contributions
    assert tanks_at(train_run, None).when == "t = 20 min"


@pytest.mark.parametrize("time", [-1.0, 1201.0, np.nan, [0.0, 1.0], "last"])
def test_other_times_are_refused(train_run, time):
    with pytest.raises(TimesError, match="time="):
        tanks_at(train_run, time)


def test_one_vessel_is_one_tank(result):
    tanks = tanks_at(result, 600.0)
    np.testing.assert_array_equal(tanks.states.number, result.number[1:2])
    assert tanks.contributions == (result.contributions,)


def test_steady_tanks_have_no_time(curve):
    tanks = tanks_at(curve.states[0], None)
    np.testing.assert_array_equal(tanks.states.number, curve.states[0].tanks)
    assert (tanks.time, tanks.contributions, tanks.when) == (None, (), "the steady state")
    with pytest.raises(TimesError, match="steady state has no times"):
        tanks_at(curve.states[0], 1.0)


def test_filled_states():
    grid = SizeGrid.monomers(1e-20, 3)
    assert States(grid, np.array([[0.0, 0.0, 0.0], [0.0, 1.0, 0.0], [1.0, 1.0, 1.0]])).filled == [1, 2]
    with pytest.raises(DistributionError, match="no particles"):
        _ = States(grid, np.zeros((2, 3))).filled
