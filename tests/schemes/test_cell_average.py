"""The cell average technique: what births keep, where the mean passes a pivot, and fragments."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from reference_runs import shear
from scheme_cases import jacobian_of, operator_for, rates_of

import aggsim as ag
from aggsim.schemes import CellAverage
from aggsim.schemes.cells.limits import cell_limits

Array = np.ndarray

EXPONENTIAL = ag.Exponential(mean_volume=1.0, number=1.0)
OCTAVES = ag.SizeGrid.geometric(smallest=1.0, largest=16.0, per_doubling=1)
THIRDS = ag.SizeGrid.geometric(smallest=1.0, largest=64.0, per_doubling=3)


def meeting(*pairs: tuple[int, int], sections: int = 5) -> Array:
    """Kernel matrix that is 1 for these pairs and 0 for all others."""
    matrix = np.zeros((sections, sections))
    for i, j in pairs:
        matrix[i, j] = matrix[j, i] = 1.0
    return matrix


@pytest.mark.parametrize(
    "grid",
    [
        ag.SizeGrid.geometric(smallest=1.0, largest=2.0**10, per_doubling=0.5),
        THIRDS,
        ag.SizeGrid.monomers_then_geometric(1.0, 2.0**6, per_doubling=3),
    ],
    ids=["0.5 per doubling", "3 per doubling", "monomers then 3 per doubling"],
)
def test_births_of_each_pair_keep_number_and_volume(grid: ag.SizeGrid) -> None:
    x, n = grid.volume, grid.sections
    prepared = CellAverage().prepare(grid)
    for i in range(n):
        for j in range(i + 1):
            number = np.zeros(n)
            number[[i, j]] = 1.0
            rates = rates_of(prepared.aggregation(meeting((i, j), sections=n)), number)
            events = 0.5 if i == j else 1.0
            assert rates[:-1].sum() == pytest.approx(-events, rel=1e-12)
            assert abs(rates[:-2] @ x + rates[-1]) <= 1e-12 * events * (x[i] + x[j])


def test_births_on_both_sides_of_a_pivot_do_not_spread() -> None:
    """Births of 3 and 5 with their mean at the pivot 4 are particles of 4; linear sharing spreads them."""
    matrix, number = meeting((0, 1), (0, 2)), np.array([1.0, 1.0, 1.0, 0.0, 0.0])
    rates = rates_of(CellAverage().prepare(OCTAVES).aggregation(matrix), number)
    np.testing.assert_allclose(rates, [-2.0, -1.0, 1.0, 0.0, 0.0, 0.0, 0.0], rtol=1e-14, atol=1e-15)
    spread = rates_of(ag.FixedPivot(moments=2).prepare(OCTAVES).aggregation(matrix), number)
    np.testing.assert_allclose(spread, [-2.0, -0.5, 0.25, 0.25, 0.0, 0.0, 0.0], rtol=1e-14, atol=1e-15)


def test_the_jacobian_at_a_switching_point_is_the_derivative_from_the_side_of_larger_means() -> None:
    number = np.array([1.0, 1.0, 1.0, 0.0, 0.0])  # the mean of the births of 3 and 5 is the pivot 4
    operator = CellAverage().prepare(OCTAVES).aggregation(meeting((0, 1), (0, 2)))
    exact, here = jacobian_of(operator, number), rates_of(operator, number)
    for k, larger in ((1, -1.0), (2, 1.0)):  # more of 2 brings births of 3, more of 4 births of 5
        step = np.zeros(5)
        step[k] = 0.125
        for side in (1.0, -1.0):
            slope = (rates_of(operator, number + side * step) - here) / (side * 0.125)
            assert np.allclose(slope, exact[:, k], rtol=0.0, atol=1e-13) == (side == larger)


def test_nothing_is_divided_by_births_that_vanish() -> None:
    grid = ag.SizeGrid.monomers(1.0, 12)
    kernel = ag.kernels.additive(1.0)
    operator, exact = operator_for(CellAverage(), kernel, grid), operator_for(ag.Monomer(), kernel, grid)
    assert not rates_of(operator, np.zeros(12)).any()
    assert not jacobian_of(operator, np.zeros(12)).any()
    # births are pivots: every mean stands at its switching point, and the discrete equation is met
    number = np.where(np.arange(12) < 6, np.linspace(1.0, 0.1, 12), 0.0)
    rates = rates_of(exact, number)
    np.testing.assert_allclose(rates_of(operator, number), rates, rtol=1e-13, atol=1e-13)
    jacobian = jacobian_of(exact, number)[:, :6]  # particles above 6 would make births past the top
    np.testing.assert_allclose(jacobian_of(operator, number)[:, :6], jacobian, rtol=1e-13, atol=1e-12)


@given(seed=st.integers(0, 2**32 - 1), per_doubling=st.integers(1, 5))
def test_an_empty_section_is_never_drawn_below_zero(seed: int, per_doubling: int) -> None:
    grid = ag.SizeGrid.geometric(smallest=1.0, largest=64.0, per_doubling=per_doubling)
    random = np.random.default_rng(seed)
    number = random.uniform(0.0, 1.0, grid.sections)
    number[random.random(grid.sections) < 0.4] = 0.0
    rates = rates_of(operator_for(CellAverage(), shear(), grid), number)
    assert (rates[:-2][number == 0.0] >= -1e-14 * np.abs(rates).max()).all()


def test_the_default_grid_has_four_sections_per_doubling() -> None:
    assert CellAverage().default_grid(EXPONENTIAL).ratio == pytest.approx(2.0**0.25)
    assert CellAverage().default_grid(EXPONENTIAL, finer=2.0).ratio == pytest.approx(2.0**0.125)


# ---- breakage


LAWS = {
    "uniform": ag.fragments.uniform_binary(),
    "two equal": ag.fragments.equal_binary(),
    "three equal": ag.fragments.ternary(),
    "erosion": ag.fragments.erosion(1.3),
    "power law": ag.fragments.power_law(exponent=-0.5),
}


def table(law: str, grid: ag.SizeGrid) -> object:
    rate = ag.rates.power_law(coefficient=0.3, exponent=0.7)
    smallest = 3.0 if law == "erosion" else None
    return ag.Breakage(rate=rate, fragments=LAWS[law], smallest=smallest).table(grid.volume)


def plain_fragments(grid: ag.SizeGrid, law: str, number: Array) -> Array:
    """Rates from the births and mean of each cell; fragments below the first pivot are there by volume."""
    x, n = grid.volume, grid.sections
    limits = cell_limits(x)
    rate, parent, volume, count = table(law, grid)
    born, total = np.zeros(n), np.zeros(n)
    for i, v, b in zip(parent, volume, count, strict=True):
        cell = int(np.sum(limits[1:-1] * (1.0 - 1e-12) <= v))
        events = rate[i] * number[i] * b * min(1.0, v / x[0])
        born[cell] += events
        total[cell] += events * max(v, x[0])
    out = -rate * number
    for k in np.flatnonzero(born):
        mean = total[k] / born[k]
        q = k + 1 if k == 0 or (mean > x[k] and k < n - 1) else k - 1
        out[k] += born[k] * (mean - x[q]) / (x[k] - x[q])
        out[q] += born[k] * (mean - x[k]) / (x[q] - x[k])
    return out


@pytest.mark.parametrize("law", LAWS)
def test_rates_of_breakage_equal_the_published_formula(law: str) -> None:
    random = np.random.default_rng(7)
    for grid in (THIRDS, OCTAVES, ag.SizeGrid.geometric(smallest=1.0, largest=90.0, per_doubling=2.3)):
        number = random.uniform(0.0, 1.0, grid.sections)
        breakage = table(law, grid)
        rates = rates_of(CellAverage().prepare(grid).breakage(*breakage), number)
        assert not rates[-2:].any()
        plain = plain_fragments(grid, law, number)
        # fragments of a table make up their parents to 1e-13
        scale = np.bincount(breakage.parent, breakage.count, grid.sections) @ (breakage.rate * number)
        assert np.abs(rates[:-2] - plain).max() <= 3e-13 * scale
        assert abs(rates[:-2] @ grid.volume) <= 1e-14 * (breakage.rate * number) @ grid.volume


@pytest.mark.parametrize("law", LAWS)
def test_fragments_of_each_parent_keep_number_and_volume(law: str) -> None:
    x, n = THIRDS.volume, THIRDS.sections
    breakage = table(law, THIRDS)
    operator = CellAverage().prepare(THIRDS).breakage(*breakage)
    assert breakage.rate.any()
    for i in np.flatnonzero(breakage.rate):
        own = breakage.parent == i
        # v / x_0 particles for a fragment below the first pivot
        pieces = breakage.count[own] @ np.minimum(breakage.volume[own] / x[0], 1.0)
        rates = rates_of(operator, np.eye(n)[i])[:-2]
        assert rates.sum() == pytest.approx(breakage.rate[i] * (pieces - 1.0), abs=1e-12 * breakage.rate[i])
        assert rates @ x == pytest.approx(0.0, abs=1e-12 * breakage.rate[i] * x[i])
        assert not rates[i + 1 :].any()  # nothing is born above its parent


@pytest.mark.parametrize("law", LAWS)
def test_the_jacobian_of_breakage_equals_differences(law: str) -> None:
    """Piecewise linear: the rates are the Jacobian times the numbers, and so are steps in which no mean switches."""
    number = np.random.default_rng(3).uniform(0.1, 1.0, THIRDS.sections)
    operator = CellAverage().prepare(THIRDS).breakage(*table(law, THIRDS))
    exact = jacobian_of(operator, number)
    n = THIRDS.sections
    scale = np.abs(exact).max()
    np.testing.assert_allclose(exact[:, :n] @ number, rates_of(operator, number), atol=1e-13 * n * scale)
    for k in range(n):
        step = np.eye(n)[k] * 1e-5
        slope = (rates_of(operator, number + step) - rates_of(operator, number - step)) / 2e-5
        assert np.abs(exact[:, k] - slope).max() <= 1e-6 * scale
