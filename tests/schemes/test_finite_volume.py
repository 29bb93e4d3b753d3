"""The finite volume scheme: where volume flows, what stays positive, and fragments."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from reference_runs import shear
from scheme_cases import jacobian_of, operator_for, rates_of

import aggsim as ag
from aggsim.schemes import FiniteVolume

Array = np.ndarray

THIRDS = ag.SizeGrid.geometric(smallest=1.0, largest=64.0, per_doubling=3)


@pytest.mark.parametrize(
    "grid",
    [
        ag.SizeGrid.geometric(smallest=1.0, largest=2.0**10, per_doubling=0.5),
        THIRDS,
        ag.SizeGrid.monomers_then_geometric(1.0, 2.0**6, per_doubling=3),
    ],
    ids=["0.5 per doubling", "3 per doubling", "monomers then 3 per doubling"],
)
def test_each_pair_moves_its_volume_and_nothing_else(grid: ag.SizeGrid) -> None:
    """What leaves i and j arrives at or above the larger one; its number is right to the width of a cell."""
    x, n = grid.volume, grid.sections
    prepared = FiniteVolume().prepare(grid)
    ratio = (x[1:] / x[:-1]).max()
    for i in range(n):
        for j in range(i + 1):
            matrix, number = np.zeros((n, n)), np.zeros(n)
            matrix[i, j] = matrix[j, i] = number[i] = number[j] = 1.0
            rates = rates_of(prepared.aggregation(matrix), number)
            events = 0.5 if i == j else 1.0
            assert abs(rates[:-2] @ x + rates[-1]) <= 1e-12 * events * (x[i] + x[j])
            born = rates.copy()
            born[i] += events
            born[j] += events
            assert not born[:i].any()
            assert (born[i:] >= -1e-15).all()
            assert born[:-1].sum() == pytest.approx(events, rel=ratio - 1.0)


def test_volume_is_spread_over_the_cell_of_the_partner() -> None:
    """Pairs of 1 and 4 at one section per doubling. The cell of 4 ends at 16/3, from which 13/3 is one monomer away:
    the monomers that meet one of the upper ln((16/3) / (13/3)) / ln 2 of the particles of the cell bring their volume
    to the section above. The cell of 1, from 2/3 to 4/3, lifts no particle of 4 over 16/3: it has 4/3 to go."""
    grid = ag.SizeGrid.geometric(smallest=1.0, largest=16.0, per_doubling=1)
    matrix, number = np.zeros((5, 5)), np.zeros(5)
    matrix[0, 2] = matrix[2, 0] = number[0] = number[2] = 1.0
    rates = rates_of(FiniteVolume().prepare(grid).aggregation(matrix), number)
    above = np.log(16.0 / 13.0) / np.log(2.0)
    expected = [-1.0, 0.0, (1.0 - above) / 4.0, above / 8.0, 0.0, 0.0, 0.0]
    np.testing.assert_allclose(rates, expected, rtol=1e-13, atol=1e-15)


@given(seed=st.integers(0, 2**32 - 1))
def test_multiples_of_a_monomer_follow_the_discrete_equation(seed: int) -> None:
    grid = ag.SizeGrid.monomers(1.0, 24)
    number = np.random.default_rng(seed).uniform(0.0, 1.0, 24)
    number[12:] = 0.0  # births stay on the grid
    rates = rates_of(operator_for(FiniteVolume(), shear(), grid), number)
    exact = rates_of(operator_for(ag.Monomer(), shear(), grid), number)
    assert np.abs(rates - exact).max() <= 1e-13 * np.abs(exact).max()


def test_what_passes_the_top_has_the_size_of_the_cells_there() -> None:
    """Two of the last section make one of twice its volume, which is a pivot past the top."""
    number = np.zeros(THIRDS.sections)
    number[-1] = 3.0
    rates = rates_of(operator_for(FiniteVolume(), ag.kernels.constant(1.0), THIRDS), number)
    np.testing.assert_allclose(rates[-3:], [-9.0, 4.5, 4.5 * 128.0], rtol=1e-13)


@given(seed=st.integers(0, 2**32 - 1), per_doubling=st.integers(1, 5))
def test_a_section_loses_by_its_own_collisions_only(seed: int, per_doubling: int) -> None:
    """So that numbers stay positive."""
    grid = ag.SizeGrid.geometric(smallest=1.0, largest=64.0, per_doubling=per_doubling)
    random = np.random.default_rng(seed)
    number = random.uniform(0.0, 1.0, grid.sections)
    number[random.random(grid.sections) < 0.4] = 0.0
    rates = rates_of(operator_for(FiniteVolume(), shear(), grid), number)
    assert (rates[:-2][number == 0.0] >= 0.0).all()


# ---- breakage


LAWS = {
    "uniform": ag.fragments.uniform_binary(),
    "two equal": ag.fragments.equal_binary(),
    "three equal": ag.fragments.ternary(),
    "power law": ag.fragments.power_law(exponent=-0.5),
}


@pytest.mark.parametrize("law", LAWS)
def test_fragments_of_each_parent_keep_volume_and_their_mean_by_volume(law: str) -> None:
    """Sharing volume linearly keeps sum v^2 of the fragments too, but for those below the first pivot."""
    x, n = THIRDS.volume, THIRDS.sections
    rate = ag.rates.power_law(coefficient=0.3, exponent=0.7)
    breakage = ag.Breakage(rate=rate, fragments=LAWS[law]).table(x)
    operator = FiniteVolume().prepare(THIRDS).breakage(*breakage)
    for i in range(n):
        rates = rates_of(operator, np.eye(n)[i])
        assert not rates[i + 1 :].any()  # nothing is born above its parent, or past the top
        rates = rates[: i + 1]
        assert (rates[:i] >= 0.0).all()
        assert abs(rates @ x[: i + 1]) <= 1e-14 * breakage.rate[i] * x[i]
        own = breakage.parent == i
        v = breakage.volume[own]
        second = breakage.count[own] @ (v * np.maximum(v, x[0])) - x[i] ** 2
        assert rates @ x[: i + 1] ** 2 == pytest.approx(
            breakage.rate[i] * second, abs=1e-12 * breakage.rate[i] * x[i] ** 2
        )


def test_fragments_that_are_pivots_go_there() -> None:
    x, n = THIRDS.volume, THIRDS.sections
    rate = ag.rates.power_law(coefficient=2.0, exponent=0.0)
    table = ag.Breakage(rate=rate, fragments=ag.fragments.equal_binary()).table(x)
    rates = rates_of(FiniteVolume().prepare(THIRDS).breakage(*table), np.eye(n)[8])
    expected = np.zeros(n + 2)
    expected[[5, 8]] = 4.0, -2.0
    np.testing.assert_allclose(rates, expected, rtol=1e-12, atol=1e-12)


def test_the_jacobian_of_breakage_is_its_matrix() -> None:
    x, n = THIRDS.volume, THIRDS.sections
    rate = ag.rates.power_law(coefficient=0.3, exponent=0.7)
    table = ag.Breakage(rate=rate, fragments=ag.fragments.uniform_binary()).table(x)
    operator = FiniteVolume().prepare(THIRDS).breakage(*table)
    columns = np.stack([rates_of(operator, row) for row in np.eye(n)], axis=1)
    np.testing.assert_allclose(jacobian_of(operator, np.ones(n))[:, :n], columns, rtol=1e-14, atol=1e-16)
