"""Settled shares against closed forms for a lognormal distribution, their limits, and what is refused."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
import pytest
from scipy import special

import aggsim as ag
from aggsim._checks import FloatArray
from aggsim.errors import DistributionError, InputError
from aggsim.kernels import SettlingVelocity
from aggsim.sizes import SizeGrid, means, project
from aggsim.studies.clarifier import overflow_volume_fraction, settled_share, slower_share

WATER = ag.Medium.water(temperature=283.15)
CLAY = ag.Particles(diameter=1e-6, density=2600.0)
GSD = 1.6
SPREAD = 3.0 * math.log(GSD)  # of ln v
MEDIAN = 1e-13  # m3, of the volume
POWER = 0.6  # w ~ v**0.6
RATES = np.geomspace(1e-6, 1.0, 61)


@dataclass(frozen=True)
class State:
    grid: SizeGrid
    number: FloatArray


def speed(volume: FloatArray) -> FloatArray:
    return np.asarray(1e-3 * (volume / MEDIAN) ** POWER)


def lognormal(per_doubling: float) -> State:
    grid = SizeGrid.geometric(smallest=MEDIAN * 1e-5, largest=MEDIAN * 1e5, per_doubling=per_doubling)
    z = np.log(grid.volume / MEDIAN) / SPREAD
    return State(grid, np.exp(-0.5 * z**2) / grid.volume)


def closed_form(rates: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Cumulative share of speed, and Hazen's removal 1 - F(u) + 1/u int_0^u w dF, for lognormal speeds."""
    s = POWER * SPREAD
    z = np.log(rates / 1e-3) / s
    slower = special.ndtr(z)
    return slower, 1.0 - slower + 1e-3 * math.exp(0.5 * s**2) / rates * special.ndtr(z - s)


@pytest.mark.parametrize(("per_doubling", "tolerance"), [(2.0, 7e-6), (4.0, 4e-6), (8.0, 4e-6)])
def test_lognormal_against_the_closed_form(per_doubling: float, tolerance: float) -> None:
    # 3e-6 from cells across which the speed is linear, and as much from the spline at 2 per doubling
    state = lognormal(per_doubling)
    slower, removed = closed_form(RATES)
    np.testing.assert_allclose(slower_share(state, speed, RATES), slower, rtol=0, atol=tolerance)
    np.testing.assert_allclose(settled_share(state, speed, RATES), removed, rtol=0, atol=tolerance)
    upflow = settled_share(state, speed, RATES, upflow=True)
    np.testing.assert_allclose(upflow, 1.0 - slower, rtol=0, atol=tolerance)


def test_smooth_and_falling_where_a_sum_over_sections_has_steps() -> None:
    rates = np.geomspace(1e-4, 1e-2, 2001)
    state = lognormal(2.0)
    for upflow in (False, True):
        share = settled_share(state, speed, rates, upflow=upflow)
        assert (np.diff(share) < 0.0).all()
    volume = state.number * state.grid.volume
    steps = [volume[speed(state.grid.volume) >= u].sum() / volume.sum() for u in rates]
    # one of the 2000 steps of a staircase is a whole section
    assert -np.diff(share).min() < 0.02 * -np.diff(steps).min()


def test_limits() -> None:
    state = lognormal(3.0)
    slow, quick = speed(state.grid.volume[[0, -1]])
    for upflow in (False, True):
        assert settled_share(state, speed, 0.99 * slow, upflow=upflow) == 1.0
    assert slower_share(state, speed, 1.01 * quick) == 1.0
    assert slower_share(state, speed, 0.0) == 0.0
    # all particles slower than the overflow: the mean speed over u
    gentle = settled_share(state, lambda v: 1e-6 * speed(v), 1.0)
    mean = means.moment(state.grid.volume, state.number, 1.0 + POWER)
    mean *= 1e-9 / MEDIAN**POWER / means.moment(state.grid.volume, state.number, 1.0)
    assert gentle == pytest.approx(float(mean), rel=1e-5)  # the same cells


def test_one_size_follows_the_textbook() -> None:
    grid = SizeGrid.geometric(smallest=1e-15, largest=1e-9, per_doubling=3)
    number = np.zeros(grid.sections)
    number[30] = 1e6
    u = float(speed(grid.volume[30:31])[0])
    rates = u * np.array([0.5, 0.999, 1.001, 2.0, 10.0])
    state = State(grid, number)
    np.testing.assert_allclose(settled_share(state, speed, rates), np.minimum(1.0, u / rates), rtol=1e-9)
    np.testing.assert_allclose(settled_share(state, speed, rates, upflow=True), [1, 1, 0, 0, 0], atol=1e-12)
    np.testing.assert_allclose(slower_share(state, speed, rates), [0, 0, 1, 1, 1], atol=1e-12)


@pytest.mark.parametrize("where", [0, -1])
def test_one_size_at_an_end_of_the_grid(where: int) -> None:
    grid = SizeGrid.geometric(smallest=1e-15, largest=1e-12, per_doubling=3)
    number = np.zeros(grid.sections)
    number[where] = 1.0
    u = float(speed(grid.volume)[where])
    share = settled_share(State(grid, number), speed, [0.5 * u, 4.0 * u])
    np.testing.assert_allclose(share, [1.0, 0.25], rtol=1e-9)


def test_two_sizes_by_hand() -> None:
    grid = SizeGrid.geometric(smallest=1e-15, largest=1e-9, per_doubling=3)
    number = np.zeros(grid.sections)
    number[[20, 40]] = [3.0 / grid.volume[20], 1.0 / grid.volume[40]]  # volumes 3 : 1
    slow, fast = speed(grid.volume[[20, 40]])
    u = math.sqrt(slow * fast)
    expected = 0.75 * slow / u + 0.25
    assert settled_share(State(grid, number), speed, u) == pytest.approx(expected, rel=1e-9)
    assert slower_share(State(grid, number), speed, u) == pytest.approx(0.75, rel=1e-9)


def test_rising_particles_are_not_caught() -> None:
    state = lognormal(3.0)
    np.testing.assert_array_equal(settled_share(state, lambda v: -speed(v), RATES), 0.0)
    np.testing.assert_array_equal(settled_share(state, np.zeros_like, RATES), 0.0)
    assert slower_share(state, lambda v: -speed(v), 0.0) == 1.0


def test_what_settles_as_fast_as_the_water_rises_is_caught() -> None:
    state = lognormal(3.0)
    for upflow in (False, True):
        assert settled_share(state, lambda v: np.full_like(v, 1e-3), 1e-3, upflow=upflow) == 1.0


def test_speeds_that_step_down_with_size() -> None:
    """As for flocs with a prefactor below 1: the density is integrated over size, whatever the speed does."""
    state = lognormal(4.0)

    def stepping(volume: FloatArray) -> FloatArray:
        return np.where(volume <= MEDIAN, 2e-3, 1e-3)

    share = settled_share(state, stepping, [0.5e-3, 4e-3])
    # half of the volume on each side; the step is spread over one cell of 1 % of the size, 0.3 % of the volume
    np.testing.assert_allclose(share, [1.0, 0.375], atol=1e-3)


def test_a_monomer_grid_and_leading_axes() -> None:
    grid = SizeGrid.monomers(1e-18, 400)
    k = np.arange(1.0, 401.0)
    number = np.stack([np.exp(-k / 20.0), np.exp(-k / 40.0)])
    state = State(grid, number)
    velocity = SettlingVelocity(ag.Fractal(CLAY, dimension=2.0), WATER)
    rates = np.array([1e-6, 5e-6, 2e-5])
    share = settled_share(state, velocity, rates)
    assert share.shape == (2, 3)
    assert settled_share(state, velocity, 5e-6).shape == (2,)
    by_row = settled_share(State(grid, number[1]), velocity, rates)
    np.testing.assert_allclose(share[1], by_row, rtol=1e-13)
    # a plain sum over the monomers; a cell of one monomer moves little across the kink
    w = velocity(grid.volume)
    plain = [(number[1] * k * np.minimum(1.0, w / u)).sum() / (number[1] * k).sum() for u in rates]
    np.testing.assert_allclose(by_row, plain, rtol=3e-4)


def test_long_tables_are_cut_without_a_seam(monkeypatch: pytest.MonkeyPatch) -> None:
    state = lognormal(3.0)
    whole = settled_share(state, speed, RATES)
    monkeypatch.setattr("aggsim.studies.clarifier._ENTRIES", 5000)
    np.testing.assert_array_equal(settled_share(state, speed, RATES), whole)


def test_what_is_not_removed_leaves() -> None:
    state = lognormal(3.0)
    total = means.moment(state.grid.volume, state.number, 1.0)
    for upflow in (False, True):
        left = overflow_volume_fraction(state, speed, RATES, upflow=upflow)
        share = settled_share(state, speed, RATES, upflow=upflow)
        np.testing.assert_allclose(left + total * share, total, rtol=1e-13)
    twice = State(state.grid, np.stack([state.number, 2.0 * state.number]))
    left = overflow_volume_fraction(twice, speed, RATES)
    # what is left is a difference of two numbers near the total
    np.testing.assert_allclose(left[1], 2.0 * left[0], rtol=0, atol=1e-14 * float(total))
    assert overflow_volume_fraction(twice, speed, 1e-3).shape == (2,)


def test_flocculation_improves_settling_and_cold_water_hinders_it() -> None:
    flocs = ag.Fractal(CLAY, dimension=2.2)
    kernel = 0.1 * ag.kernels.shear(flocs, ag.Flow(shear_rate=30.0))
    start = ag.LogNormal(median_diameter=3e-6, gsd=1.5, volume_fraction=2e-5)
    result = ag.simulate(ag.Batch(kernel), start, [0.0, 300.0, 900.0])
    warm, cold = (SettlingVelocity(flocs, ag.Medium.water(temperature=t)) for t in (293.15, 277.15))
    share = settled_share(result, warm, 1e-3 / 3.6)
    assert share.shape == (3,)
    assert (np.diff(share) > 0.0).all()
    assert (settled_share(result, cold, 1e-3 / 3.6) < share).all()


def test_the_grid_of_a_start_does_not_matter() -> None:
    start = ag.LogNormal(median_diameter=30e-6, gsd=1.5, volume_fraction=1e-4)
    velocity = SettlingVelocity(ag.Compact(CLAY), WATER)
    low, high = start.limits(1e-9)
    shares = []
    for per_doubling in (3, 6, 12):
        grid = SizeGrid.geometric(smallest=low, largest=high, per_doubling=per_doubling)
        shares.append(settled_share(State(grid, project(start, grid, moments=6)), velocity, RATES))
    np.testing.assert_allclose(shares[1], shares[2], rtol=0, atol=3e-7)
    np.testing.assert_allclose(shares[0], shares[2], rtol=0, atol=8e-6)


@pytest.mark.parametrize(
    ("velocity", "rate", "words"),
    [
        (speed, 0.0, r"overflow_rate\[0\]=0"),
        (speed, [1e-3, -1e-3], r"overflow_rate\[1\]"),
        (speed, 40.0, "40/86400"),
        (speed, [[1e-3]], "shape"),
        (1e-3, 1e-3, "velocity=0.001"),
        (lambda v: 1e-3, 1e-3, "one speed"),
        (lambda v: np.full_like(v, np.nan), 1e-3, "NaN or infinity"),
    ],
)
def test_bad_input_is_refused(velocity: object, rate: object, words: str) -> None:
    with pytest.raises(InputError, match=words):
        settled_share(lognormal(3.0), velocity, rate)  # type: ignore[arg-type]


def test_an_empty_suspension_is_refused() -> None:
    state = lognormal(3.0)
    with pytest.raises(DistributionError):
        settled_share(State(state.grid, 0.0 * state.number), speed, 1e-3)


def test_a_state_without_particles_has_no_share() -> None:
    grid = ag.SizeGrid.geometric(smallest=1e-18, largest=1e-12)
    number = np.zeros((2, len(grid)))
    number[1, 10] = 1e12
    state = ag.result.Snapshot(grid, number)
    share = ag.settled_share(state, lambda v: 1e3 * np.cbrt(v) ** 2, [1e-6, 1e-5])
    assert np.isnan(share[0]).all()
    assert np.isfinite(share[1]).all()
