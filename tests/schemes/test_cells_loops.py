"""The compiled loops of cells against plain twins written from the published formulas, and their Jacobians."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scheme_cases import BEYOND, jacobian_of, rates_of

import aggsim as ag
from aggsim.schemes import CellAverage, FiniteVolume
from aggsim.schemes.cells.limits import continued_cells

Array = np.ndarray

SCHEMES = [CellAverage(), FiniteVolume()]
each_scheme = pytest.mark.parametrize("scheme", SCHEMES, ids=repr)
seeds = st.integers(0, 2**32 - 1)
GRIDS = [
    ag.SizeGrid.geometric(smallest=1.0, largest=64.0, per_doubling=1),
    ag.SizeGrid.geometric(smallest=1.0, largest=64.0, per_doubling=3),
    ag.SizeGrid.geometric(smallest=1e-21, largest=1e-18, per_doubling=2.3),
    ag.SizeGrid.geometric(smallest=1.0, largest=1e6, per_doubling=0.4),
    ag.SizeGrid.monomers_then_geometric(1.0, 100.0, per_doubling=3),
    ag.SizeGrid.monomers(1.0, 20),
    ag.SizeGrid.from_pivots([1.0, 2.0, 3.5, 3.6, 9.0, 11.0, 30.0]),
]


def symmetric(random: np.random.Generator, n: int) -> Array:
    half = random.lognormal(0.0, 1.0, (n, n))
    return half + half.T


def cell_of(volume: float, limits: Array) -> int:
    """Cell whose lower limit is the last one below, with the upper one for a birth on a limit."""
    return int(np.sum(limits[1:-1] * (1.0 - 1e-12) <= volume))


def averaged(x: Array, limits: Array, births: list[tuple[float, float]], n: int) -> Array:
    """Net births (n + 2,) of (events, volume), shared by the published formula of the cell average technique.

    With a^-(v) = (v - x_(k-1)) / (x_k - x_(k-1)), a^+(v) = (v - x_(k+1)) / (x_k - x_(k+1)) and H(0) = 1/2, section
    k gets B_k a^-(v_k) H(x_k - v_k) + B_k a^+(v_k) H(v_k - x_k) of its own cell, B_(k-1) a^-(v_(k-1)) H(v_(k-1) -
    x_(k-1)) of the one below and B_(k+1) a^+(v_(k+1)) H(x_(k+1) - v_(k+1)) of the one above.
    """
    born, volume = np.zeros(x.size), np.zeros(x.size)
    for events, size in births:
        cell = cell_of(size, limits)
        born[cell] += events
        volume[cell] += events * size

    def heaviside(side: float) -> float:
        return 0.5 if side == 0.0 else float(side > 0.0)

    net = np.zeros(x.size)
    for k in range(x.size):
        if born[k] == 0.0:
            continue
        mean = volume[k] / born[k]
        for q, side in ((k + 1, mean - x[k]), (k - 1, x[k] - mean)):
            if 0 <= q < x.size:
                share = (mean - x[q]) / (x[k] - x[q])
                net[k] += heaviside(side) * born[k] * share
                net[q] += heaviside(side) * born[k] * (1.0 - share)
    return np.concatenate([net[:n], [net[n:].sum(), net[n:] @ x[n:]]])


def pairs(x: Array, matrix: Array, number: Array) -> list[tuple[float, int, int]]:
    """Collisions per second of i and j <= i."""
    n = number.size
    return [
        ((0.5 if i == j else 1.0) * matrix[i, j] * number[i] * number[j], i, j)
        for i in range(n)
        for j in range(i + 1)
    ]


def losses(x: Array, matrix: Array, number: Array) -> Array:
    return np.append(number * (matrix @ number), [0.0, 0.0])


def gross(x: Array, matrix: Array, number: Array) -> Array:
    """What collides, and its volume: births and losses cancel, so that this is the scale of round-off."""
    met = np.abs(number)[:, None] * matrix * np.abs(number)
    scale = np.full(number.size + BEYOND, met.sum())
    scale[-1] = (met * x[: number.size]).sum()
    return scale


def plain_average(grid: ag.SizeGrid, matrix: Array, number: Array) -> Array:
    """Rates of the cell average technique; cells go on past the top, and what they hold is beyond."""
    n = grid.sections
    x, limits = continued_cells(grid, 6)
    events = [(rate, x[i] + x[j]) for rate, i, j in pairs(x, matrix, number)]
    return averaged(x, limits, events, n) - losses(x, matrix, number)


def plain_flux(grid: ag.SizeGrid, matrix: Array, number: Array) -> Array:
    """Rates of the finite volume scheme from the fluxes through all limits, those past the top included."""
    n = grid.sections
    x, limits = continued_cells(grid, 6)
    low, high = limits[:n], limits[1 : n + 1]
    flux = np.zeros(x.size + 1)
    for e in range(1, x.size):
        for k in range(min(e, n)):
            share = np.log(high / np.clip(limits[e] - x[k], low, high)) / np.log(high / low)
            flux[e] += x[k] * number[k] * (matrix[k] * number * share).sum()
    rates = -np.diff(flux) / x
    return np.concatenate([rates[:n], [rates[n:].sum(), rates[n:] @ x[n:]]])


PLAIN = {CellAverage(): plain_average, FiniteVolume(): plain_flux}


@given(seed=seeds, grid=st.sampled_from(GRIDS), scheme=st.sampled_from(SCHEMES))
def test_rates_equal_the_published_formula(seed: int, grid: ag.SizeGrid, scheme: ag.schemes.Scheme) -> None:
    random = np.random.default_rng(seed)
    n = grid.sections
    matrix = symmetric(random, n)
    number = random.uniform(0.0, 1.0, n) * 10.0 ** random.uniform(-6, 0, n)
    number[random.integers(n)] = 0.0
    operator = scheme.prepare(grid).aggregation(matrix)
    plain = PLAIN[scheme](grid, matrix, number)
    # dividing by the distance of two pivots multiplies round-off
    closest = min(1.0, float(np.min(np.diff(grid.volume) / grid.volume[1:])))
    difference = np.abs(rates_of(operator, number) - plain)
    assert (difference <= 1e-13 / closest * gross(grid.volume, matrix, number)).all()


@given(seed=seeds, grid=st.sampled_from(GRIDS), scheme=st.sampled_from(SCHEMES))
def test_jacobian_equals_central_differences(seed: int, grid: ag.SizeGrid, scheme: ag.schemes.Scheme) -> None:
    """Quadratic wherever no mean passes its pivot: exact differences for a small step, but for round-off over it."""
    random = np.random.default_rng(seed)
    n = grid.sections
    operator = scheme.prepare(grid).aggregation(symmetric(random, n))
    number = random.uniform(0.1, 1.0, n)
    exact = jacobian_of(operator, number)
    assert not exact[:, n:].any()
    scale = np.abs(exact).max(axis=1)
    for k in range(n):
        step = np.zeros(n)
        step[k] = 1e-7
        slope = (rates_of(operator, number + step) - rates_of(operator, number - step)) / 2e-7
        assert (np.abs(exact[:, k] - slope) <= 1e-6 * scale).all()


@each_scheme
def test_loops_add_a_multiple_to_what_is_there(scheme: ag.schemes.Scheme) -> None:
    random = np.random.default_rng(1)
    for grid in GRIDS:
        n = grid.sections
        prepared = scheme.prepare(grid)
        fragments = (np.ones(n), np.arange(n), 0.5 * grid.volume, np.full(n, 2.0))
        for operator in (prepared.aggregation(symmetric(random, n)), prepared.breakage(*fragments)):
            # entries past the two beyond the top belong to others
            state = np.append(random.uniform(0.0, 1.0, n), [5.0, 7.0, 11.0])
            once, before = rates_of(operator, state[:n]), random.normal(size=n + 3)
            out = before.copy()
            operator.add_rates(state, 0.25, out)
            np.testing.assert_allclose(out, before + 0.25 * np.append(once, 0.0), rtol=1e-12, atol=1e-12)
            jacobian, matrix = jacobian_of(operator, state[:n]), random.normal(size=(n + 3, n + 3))
            out = matrix.copy()
            operator.add_jacobian(state, 0.25, out)
            added = np.zeros((n + 3, n + 3))
            added[:-1, :-1] = 0.25 * jacobian
            np.testing.assert_allclose(out, matrix + added, rtol=1e-12, atol=1e-12)


@each_scheme
@pytest.mark.parametrize("bad", [np.nan, np.inf])
def test_a_number_that_is_not_finite_shows_in_the_sum_that_is_returned(
    scheme: ag.schemes.Scheme, bad: float
) -> None:
    random = np.random.default_rng(2)
    grid = GRIDS[1]
    n = grid.sections
    prepared = scheme.prepare(grid)
    fragments = (np.ones(n), np.arange(n), 0.5 * grid.volume, np.full(n, 2.0))
    for operator in (prepared.aggregation(symmetric(random, n)), prepared.breakage(*fragments)):
        for k in range(1, n):
            state = np.append(random.uniform(0.1, 1.0, n), [0.0, 0.0])
            state[k] = bad
            with np.errstate(invalid="ignore"):
                assert not np.isfinite(operator.add_rates(state, 1.0, np.zeros(n + 2)))


@each_scheme
def test_tiny_partners_keep_the_digits_of_a_large_one(scheme: ag.schemes.Scheme) -> None:
    """A particle that takes up one of 1e-15 of its volume changes by that, not by its own round-off."""
    grid = ag.SizeGrid.geometric(smallest=1.0, largest=2.0**50, per_doubling=1)
    n = grid.sections
    matrix = np.zeros((n, n))
    matrix[0, 40] = matrix[40, 0] = 1.0
    number = np.zeros(n)
    number[[0, 40]] = 1.0
    rates = rates_of(scheme.prepare(grid).aggregation(matrix), number)
    assert rates[0] == -1.0
    assert grid.volume[40:42] @ rates[40:42] == pytest.approx(1.0, rel=1e-12)
