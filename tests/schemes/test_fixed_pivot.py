"""Fixed pivots: what each order keeps, and the options it refuses."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scheme_cases import operator_for, rates_of

import aggsim as ag
from aggsim.errors import InputError

Array = np.ndarray

ORDERS = [2, 4, 6]
KEPT = {
    2: [0, 1],
    4: [0, 1, 2, 3],
    6: [0, 0.5, 1, 1.5, 2, 2.5],
}  # orders in v of the moments that births keep
GRIDS = {
    "1 per doubling": ag.SizeGrid.geometric(smallest=1.0, largest=2.0**14, per_doubling=1),
    "3 per doubling": ag.SizeGrid.geometric(smallest=1.0, largest=2.0**10, per_doubling=3),
    "monomers then 3 per doubling": ag.SizeGrid.monomers_then_geometric(1.0, 2.0**10, per_doubling=3),
    "monomers": ag.SizeGrid.monomers(1.0, 64),
}


def low_half(grid: ag.SizeGrid, seed: int = 3) -> Array:
    """Numbers so far below the top that no stencil reaches it."""
    number = np.random.default_rng(seed).uniform(0.1, 1.0, grid.sections)
    number[grid.volume > grid.volume[-1] / 16.0] = 0.0
    return number


@pytest.mark.parametrize("moments", [1, 3, 5, 8, 0, -2, True, 2.5, "4", None])
def test_orders_that_do_not_exist_are_refused(moments: object) -> None:
    with pytest.raises(InputError, match=r"moments=.*2, 4 or 6.*Try"):
        ag.FixedPivot(moments=moments)


def test_six_moments_are_kept_without_a_choice() -> None:
    assert ag.FixedPivot() == ag.FixedPivot(moments=6)


@pytest.mark.parametrize("name", GRIDS)
@pytest.mark.parametrize("moments", ORDERS)
def test_births_of_each_pair_keep_their_moments(name: str, moments: int) -> None:
    grid = GRIDS[name]
    x = grid.volume
    prepared = ag.FixedPivot(moments=moments).prepare(grid)
    inside = np.flatnonzero(x <= x[-1] / 16.0)
    for i in inside[::2]:
        for j in inside[inside <= i]:
            matrix = np.zeros((x.size, x.size))
            matrix[i, j] = matrix[j, i] = 1.0
            number = np.zeros(x.size)
            number[[i, j]] = 1.0
            rates = rates_of(prepared.aggregation(matrix), number)
            events = 0.5 if i == j else 1.0
            assert rates[-2] == rates[-1] == 0.0
            born = x[i] + x[j]
            for k in KEPT[moments]:
                expected = events * (born**k - x[i] ** k - x[j] ** k)
                gross = events * (born**k + np.abs(rates[:-2]) @ x**k)
                assert rates[:-2] @ x**k == pytest.approx(expected, abs=1e-12 * gross)


@pytest.mark.parametrize("name", GRIDS)
@pytest.mark.parametrize("moments", ORDERS)
def test_moments_of_closed_kernels_grow_as_their_equations_say(name: str, moments: int) -> None:
    """dM_k/dt of the constant, sum and product kernels closes in the moments: exact for those that births keep."""
    grid, number = GRIDS[name], low_half(GRIDS[name])
    x = grid.volume
    m = [number @ x**k for k in range(7)]
    expected = {
        "constant": [-0.5 * m[0] ** 2, 0.0, m[1] ** 2, 3 * m[1] * m[2]],
        "sum": [-m[0] * m[1], 0.0, 2 * m[1] * m[2], 3 * (m[1] * m[3] + m[2] ** 2)],
        "product": [-0.5 * m[1] ** 2, 0.0, m[2] ** 2, 3 * m[2] * m[3]],
    }
    kernels = {
        "constant": ag.kernels.constant(1.0),
        "sum": ag.kernels.additive(1.0),
        "product": ag.kernels.multiplicative(1.0),
    }
    for key, kernel in kernels.items():
        rates = rates_of(operator_for(ag.FixedPivot(moments=moments), kernel, grid), number)
        assert rates[-2] == rates[-1] == 0.0
        for k in set(KEPT[moments]) & {0, 1, 2, 3}:
            gross = np.abs(rates[:-2]) @ x**k
            assert rates[:-2] @ x**k == pytest.approx(expected[key][k], abs=1e-12 * gross)


def test_two_moments_never_make_a_negative_birth() -> None:
    """With linear sharing a section loses by its own collisions only: an empty one cannot be drawn below zero."""
    for grid in GRIDS.values():
        operator = operator_for(ag.FixedPivot(moments=2), ag.kernels.constant(1.0), grid)
        for k in range(grid.sections):
            number = np.ones(grid.sections)
            number[k] = 0.0
            assert rates_of(operator, number)[k] >= 0.0


@given(seed=st.integers(0, 2**32 - 1), moments=st.sampled_from(ORDERS))
def test_all_orders_agree_where_every_birth_is_a_pivot(seed: int, moments: int) -> None:
    grid = ag.SizeGrid.monomers(1.0, 24)
    number = np.random.default_rng(seed).uniform(0.0, 1.0, 24)
    number[12:] = 0.0  # births stay on the grid
    kernel = ag.kernels.from_function(lambda v, w: np.sqrt(v * w))
    rates = rates_of(operator_for(ag.FixedPivot(moments=moments), kernel, grid), number)
    exact = rates_of(operator_for(ag.Monomer(), kernel, grid), number)
    assert np.abs(rates - exact).max() <= 1e-13 * np.abs(exact).max()


@pytest.mark.parametrize("moments", ORDERS)
@pytest.mark.parametrize(
    ("start", "tolerance"),
    [
        # far below what a grid can do in a run, and above the quadrature of the law (1e-10)
        (ag.Exponential(mean_volume=1.0, number=1.0), 1e-8),
        (ag.Gamma(mean_volume=1.0, shape=2.0, number=1.0), 1e-8),
        (ag.LogNormal(median_diameter=1e-6, gsd=1.3, number=1.0), 1e-8),
        # its edges leave negative numbers at first; the non-negative ones are found by least squares
        (ag.Box(smallest_diameter=0.5e-6, largest_diameter=2e-6, number=1.0), 1e-7),
    ],
    ids=["exponential", "gamma", "lognormal", "box"],
)
def test_the_start_keeps_its_moments(start: ag.StartingDistribution, tolerance: float, moments: int) -> None:
    smallest, largest = start.limits(1e-6)[0], start.limits(1e-16)[1]
    grid = ag.SizeGrid.geometric(smallest=smallest / 7, largest=8 * largest, per_doubling=4)
    number = ag.FixedPivot(moments=moments).project(start, grid)
    assert (number >= 0.0).all()
    for k in range(moments):
        assert number @ grid.volume**k / start.moment(k) == pytest.approx(1.0, abs=tolerance)


@pytest.mark.parametrize(("moments", "least"), [(2, 8), (4, 4), (6, 4)])
def test_default_grids_are_finer_for_linear_sharing(moments: int, least: int) -> None:
    broad = ag.Exponential(mean_volume=1.0, number=1.0)
    grid = ag.FixedPivot(moments=moments).default_grid(broad)
    assert np.log(2.0) / np.log(grid.ratio) == pytest.approx(least)
    single = ag.FixedPivot(moments=moments).default_grid(ag.Monodisperse(volume=2.0, number=1.0))
    assert single.monomer == 2.0
    np.testing.assert_allclose(single.volume[:4], [2.0, 4.0, 6.0, 8.0], rtol=1e-12)
