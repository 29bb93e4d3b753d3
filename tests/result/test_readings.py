"""What is read from numbers at pivots, of one state or of many."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pytest

import aggsim as ag
from aggsim.result import Readings
from aggsim.sizes import means

Array = np.ndarray

GRID = ag.SizeGrid.geometric(smallest=1e-20, largest=1e-16, per_doubling=4)
X = GRID.volume


@dataclass(frozen=True, eq=False)
class Record(Readings):
    grid: ag.SizeGrid
    number: Array


def lognormal(shift: float) -> Array:
    return 1e12 * np.exp(-0.5 * ((np.log(X / 1e-18) - shift) / 0.7) ** 2)


STATES = np.array([lognormal(-1.0), lognormal(0.0), lognormal(1.0)])
ONE, MANY = Record(GRID, STATES[1]), Record(GRID, STATES)

READ = {
    "number": lambda r: r.total_number(),
    "moment": lambda r: r.moment(1.5),
    "mean": lambda r: r.mean_diameter(4, 3),
    "median": lambda r: r.quantile_diameter(0.5),
    "quantiles": lambda r: r.quantile_diameter([0.1, 0.5, 0.9], r=0),
    "cumulative": lambda r: r.cumulative([1e-6, 2e-6]),
    "span": lambda r: r.span(),
    "spread": lambda r: r.geometric_standard_deviation(),
    "density": lambda r: r.density(),
}
each_reading = pytest.mark.parametrize("name", READ)


@each_reading
def test_one_state_reads_as_one_of_many(name: str) -> None:
    one, many = np.asarray(READ[name](ONE)), np.asarray(READ[name](MANY))
    assert many.shape == (3, *one.shape)
    np.testing.assert_allclose(one, many[1], rtol=1e-13)


@each_reading
def test_states_without_particles_read_as_nan_and_hold_nothing(name: str) -> None:
    empty = Record(GRID, np.array([STATES[0], np.zeros(len(GRID)), STATES[2]]))
    values = np.asarray(READ[name](empty))
    np.testing.assert_allclose(values[[0, 2]], np.asarray(READ[name](MANY))[[0, 2]], rtol=1e-13)
    if name in ("number", "moment"):
        assert values[1] == 0.0
    else:
        assert np.isnan(values[1]).all()


def test_readings_are_those_of_the_plain_functions() -> None:
    np.testing.assert_allclose(MANY.moment(2), STATES @ X**2, rtol=1e-13)
    np.testing.assert_allclose(MANY.mean_diameter(3, 2), means.mean_diameter(X, STATES, 3, 2), rtol=1e-15)
    d10, d50, d90 = MANY.quantile_diameter([0.1, 0.5, 0.9]).T
    np.testing.assert_allclose(MANY.span(), (d90 - d10) / d50, rtol=1e-13)
    np.testing.assert_allclose(MANY.cumulative(float(d50[1]))[1, 0], 0.5, atol=1e-9)
    spread = MANY.geometric_standard_deviation(3)
    np.testing.assert_allclose(
        spread[:2], np.exp(0.7 / 3), rtol=1e-7
    )  # the grid cuts the largest of the third
    np.testing.assert_allclose(MANY.density(r=0, log=False), means.density(X, STATES, 0.0, log=False))


def test_the_outer_diameter_is_that_of_the_structure() -> None:
    flocs = ag.Fractal(ag.Particles(diameter=2e-7, density=2000.0), dimension=2.0)
    solid, outer = ONE.quantile_diameter(0.5), ONE.quantile_diameter(0.5, structure=flocs)
    assert outer == pytest.approx(2e-7 * (float(solid) / 2e-7) ** 1.5, rel=1e-9)


def test_steps_of_time_may_have_more_axes() -> None:
    cube = Record(GRID, np.stack([STATES, 2.0 * STATES]))
    np.testing.assert_allclose(cube.mean_diameter(4, 3)[1], MANY.mean_diameter(4, 3), rtol=1e-13)
    assert cube.quantile_diameter([0.1, 0.9]).shape == (2, 3, 2)
