"""The adjustable sectional method against linear interpolation and against its published first form."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scheme_cases import operator_for, rates_of

import aggsim as ag
from aggsim.errors import GridError
from aggsim.schemes.sectional import _births

Array = np.ndarray


@pytest.mark.parametrize("q", [1, 2, 3, 4, 5, 8, 12, 20])
def test_births_are_shared_as_by_linear_interpolation(q: int) -> None:
    """Volumes are pivots 2**(k/q); x_i + x_j lies in [x_p, x_(p+1)) and is shared so that its volume is kept."""
    n = 8 * q + 2
    first, count, weight = _births(n, q)
    i, j = np.tril_indices(n)
    x = 2.0 ** (np.arange(2 * n + q) / q)
    born = x[i] + x[j]
    lower = np.searchsorted(x, born * (1.0 + 1e-13), side="right") - 1
    upper_share = np.clip((born - x[lower]) / (x[lower + 1] - x[lower]), 0.0, 1.0)
    spread = count == 2
    # a birth on a pivot may name it as the lower target with all of the particle, or as the upper one
    shares = np.zeros((i.size, x.size))
    np.add.at(shares, (np.arange(i.size), first), weight[:, 0] + (spread & (first == i)))
    np.add.at(shares, (np.arange(i.size)[spread], first[spread] + 1), weight[spread, 1])
    expected = np.zeros_like(shares)
    np.add.at(expected, (np.arange(i.size), lower), 1.0 - upper_share)
    np.add.at(expected, (np.arange(i.size), lower + 1), upper_share)
    # both sides cancel in x_i + x_j - x_p at most by the ratio of a pivot to a section width, q / ln 2
    assert np.abs(shares - expected).max() <= 1e-14 * q / np.log(2.0) * 4.0


@pytest.mark.parametrize("q", [1, 3, 6])
def test_a_far_smaller_partner_changes_the_larger_with_full_relative_accuracy(q: int) -> None:
    n = 40 * q
    first, _, weight = _births(n, q)
    i = n - 1
    j = np.arange(10 * q)
    t = i * (i + 1) // 2 + j
    exact = 2.0 ** ((j - i) / q) / (2.0 ** (1.0 / q) - 1.0)
    assert (first[t] == i).all()
    np.testing.assert_allclose(-weight[t, 0], exact, rtol=1e-13)
    np.testing.assert_allclose(weight[t, 1], exact, rtol=1e-13)


@given(seed=st.integers(0, 2**32 - 1))
def test_one_section_per_doubling_is_the_method_of_hounslow(seed: int) -> None:
    """M. J. Hounslow, R. L. Ryall and V. R. Marshall, AIChE J. 34 (1988) 1821, doi:10.1002/aic.690341108:

    dN_i/dt = sum_{j<=i-2} 2^(j-i+1) b N_(i-1) N_j + b/2 N_(i-1)^2 - sum_{j<=i-1} 2^(j-i) b N_i N_j
              - sum_{j>=i} b N_i N_j
    """
    n = 12
    number = np.random.default_rng(seed).uniform(0.0, 1.0, n)
    b = ag.kernels.from_function(lambda v, w: v + np.sqrt(v * w) + w)
    grid = ag.SizeGrid.geometric(smallest=1.0, largest=2.0 ** (n - 1), per_doubling=1)
    k = b(grid.volume[:, None], grid.volume[None, :])
    expected = np.zeros(n)
    for i in range(n):
        if i >= 1:
            expected[i] += 0.5 * k[i - 1, i - 1] * number[i - 1] ** 2
            for j in range(i - 1):
                expected[i] += 2.0 ** (j - i + 1) * k[i - 1, j] * number[i - 1] * number[j]
        for j in range(i):
            expected[i] -= 2.0 ** (j - i) * k[i, j] * number[i] * number[j]
        for j in range(i, n):
            expected[i] -= k[i, j] * number[i] * number[j]
    rates = rates_of(operator_for(ag.Sectional(), b, grid), number)[:n]
    assert np.abs(rates - expected).max() <= 1e-13 * np.abs(expected).max()


@pytest.mark.parametrize(
    "grid",
    [
        ag.SizeGrid.geometric(smallest=1.0, largest=100.0, per_doubling=2.5),
        ag.SizeGrid.geometric(smallest=1.0, largest=100.0, per_doubling=0.5),
        ag.SizeGrid.monomers_then_geometric(1.0, 100.0, per_doubling=3),
        ag.SizeGrid.monomers(1.0, 30),
    ],
    ids=["2.5 per doubling", "half per doubling", "monomers then geometric", "monomers"],
)
def test_grids_without_a_whole_number_per_doubling_are_refused(grid: ag.SizeGrid) -> None:
    with pytest.raises(GridError, match=r"whole number of sections per doubling.*Try"):
        ag.Sectional().prepare(grid)


def test_the_default_grid_is_geometric_for_a_single_size_too() -> None:
    grid = ag.Sectional().default_grid(ag.Monodisperse(diameter=1e-6, number=1e12))
    ag.Sectional().check(grid)
    assert grid.is_geometric
    assert grid.diameter[0] / 1e-6 == pytest.approx(1.0, abs=1e-12)
