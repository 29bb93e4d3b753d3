"""The discrete equation on every multiple of one particle volume."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scheme_cases import operator_for, rates_of

import aggsim as ag
from aggsim.errors import GridError, KernelError
from aggsim.schemes.low_rank import FactoredKernel


@given(seed=st.integers(0, 2**32 - 1))
def test_births_of_a_constant_kernel_are_a_convolution(seed: int) -> None:
    number = np.random.default_rng(seed).uniform(0.0, 1.0, 30)
    rates = rates_of(
        operator_for(ag.Monomer(), ag.kernels.constant(1.0), ag.SizeGrid.monomers(2.0, 30)), number
    )
    births = np.concatenate([[0.0], 0.5 * np.convolve(number, number)])  # of 1, 2, ..., 60
    losses = number * number.sum()
    scale = float(losses.max())
    assert np.abs(rates[:30] - (births[:30] - losses)).max() <= 1e-13 * scale
    assert rates[30] == pytest.approx(births[30:].sum(), rel=1e-13)
    assert rates[31] == pytest.approx(births[30:] @ (2.0 * np.arange(31, 61)), rel=1e-13)


@given(seed=st.integers(0, 2**32 - 1))
def test_every_moment_grows_as_the_equation_says(seed: int) -> None:
    grid = ag.SizeGrid.monomers(1.0, 40)
    x = grid.volume
    number = np.random.default_rng(seed).uniform(0.0, 1.0, 40)
    number[20:] = 0.0
    kernel = ag.kernels.from_function(
        lambda v, w: (np.cbrt(v) + np.cbrt(w)) * (1 / np.cbrt(v) + 1 / np.cbrt(w))
    )
    rates = rates_of(operator_for(ag.Monomer(), kernel, grid), number)
    events = 0.5 * kernel(x[:, None], x[None, :]) * number[:, None] * number[None, :]
    for k in (-1.0, 0.0, 1.0 / 3.0, 2.0, 7.0):
        change = (events * ((x[:, None] + x[None, :]) ** k - x[:, None] ** k - x[None, :] ** k)).sum()
        gross = np.abs(rates[:-2]) @ x**k
        assert rates[:-2] @ x**k == pytest.approx(change, abs=1e-13 * gross)


@pytest.mark.parametrize(
    "grid",
    [
        ag.SizeGrid.geometric(smallest=1.0, largest=64.0, per_doubling=3),
        ag.SizeGrid.monomers_then_geometric(1.0, 64.0, per_doubling=3),
        ag.SizeGrid.from_pivots([2.0, 3.0, 4.0, 5.0]),
    ],
    ids=["geometric", "monomers then geometric", "without the monomer"],
)
def test_other_grids_are_refused(grid: ag.SizeGrid) -> None:
    with pytest.raises(GridError, match=r"multiples 1, 2, 3.*Try.*monomers"):
        ag.Monomer().prepare(grid)


def parts_of(kernel: ag.kernels.Kernel, sizes: int) -> list[tuple[str, object, object]]:
    return list(ag.Monomer().prepare(ag.SizeGrid.monomers(1e-20, sizes)).parts(kernel))


def test_few_sizes_are_summed_directly_and_many_convolved() -> None:
    kernel = ag.kernels.constant(2.0) + ag.kernels.additive(3.0) * ag.kernels.Strength.steps(
        [5.0], [1.0, 0.0]
    )
    for sizes, kind in ((1000, np.ndarray), (1001, FactoredKernel)):
        parts = parts_of(kernel, sizes)
        assert [(name, strength is None) for name, _, strength in parts] == [
            ("constant", True),
            ("additive", False),
        ]
        assert all(type(rates) is kind for _, rates, _ in parts)


def test_both_ways_give_the_same_rates() -> None:
    kernel = ag.kernels.constant(2.0) + ag.kernels.additive(3e20)
    grid = ag.SizeGrid.monomers(1e-20, 1500)
    prepared = ag.Monomer().prepare(grid)
    number = np.random.default_rng(1).uniform(0.0, 1e15, 1500)
    (_, first, _), (_, second, _) = prepared.parts(kernel)
    matrices = sum(matrix for _, matrix, _ in kernel.part_matrices(grid.volume))
    fast, direct = (rates_of(prepared.aggregation(rates), number) for rates in (first + second, matrices))
    assert (np.abs(fast - direct)[:-1] <= 1e-13 * np.abs(direct[:-1]).max()).all()
    assert fast[-1] == pytest.approx(direct[-1], rel=1e-13)


def kinked(v: np.ndarray, w: np.ndarray) -> np.ndarray:
    return 1.0 + np.abs(np.cbrt(v / 1e-20) - np.cbrt(w / 1e-20))


def test_a_kernel_with_a_kink_is_summed_directly_while_its_matrix_fits() -> None:
    kernel = ag.kernels.from_function(kinked, name="kinked") + ag.kernels.constant(1.0)
    assert all(type(rates) is np.ndarray for _, rates, _ in parts_of(kernel, 1200))
    with pytest.raises(
        KernelError, match=r"kernel part 'kinked' is no sum of 40 products.*Try: fewer.*FixedPivot"
    ):
        parts_of(kernel, 8001)


def test_the_default_grid_has_room_above_the_start() -> None:
    grid = ag.Monomer().default_grid(ag.Monodisperse(volume=3.0, number=1.0))
    np.testing.assert_allclose(grid.volume, 3.0 * np.arange(1.0, 65.0), rtol=1e-14)
    dimers = ag.Monodisperse(volume=1.0, number=1.0) + ag.Monodisperse(volume=20.0, number=1.0)
    assert ag.Monomer().default_grid(dimers).volume[-1] == pytest.approx(160.0)


def test_a_start_that_spans_too_many_multiples_is_refused() -> None:
    wide = ag.Monodisperse(volume=1.0, number=1.0) + ag.Monodisperse(volume=2e4, number=1.0)
    with pytest.raises(GridError, match=r"100000.*Try"):
        ag.Monomer().default_grid(wide)
