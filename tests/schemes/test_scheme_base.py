"""The contract that every scheme keeps, swept over all of them."""

from __future__ import annotations

import dataclasses
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scheme_cases import (
    LINEAR_IN_THE_KERNEL,
    NUMBER_KEEPING,
    ON_GEOMETRIC_GRIDS,
    SCHEMES,
    grid_for,
    jacobian_of,
    operator_for,
    rates_of,
)

import aggsim as ag
from aggsim.errors import GridError
from aggsim.schemes.base import continued

Array = np.ndarray

each_scheme = pytest.mark.parametrize("scheme", SCHEMES, ids=repr)

KERNELS = {
    "constant": ag.kernels.constant(0.7),
    "sum": ag.kernels.additive(0.3),
    "product": ag.kernels.multiplicative(0.1),
    "brownian": ag.kernels.from_function(
        lambda v, w: (np.cbrt(v) + np.cbrt(w)) * (1 / np.cbrt(v) + 1 / np.cbrt(w))
    ),
    "settling": ag.kernels.from_function(
        lambda v, w: (np.cbrt(v) + np.cbrt(w)) ** 2 * abs(np.cbrt(v) ** 2 - np.cbrt(w) ** 2)
    ),
}
kernels = st.sampled_from(list(KERNELS)).map(KERNELS.__getitem__)
schemes = st.sampled_from(SCHEMES)
seeds = st.integers(0, 2**32 - 1)


def numbers(seed: int, n: int) -> Array:
    random = np.random.default_rng(seed)
    return random.uniform(0.0, 1.0, n) * 10.0 ** random.uniform(-9, 0, n)


def collisions(kernel: ag.kernels.Kernel, x: Array, number: Array) -> Array:
    """Collisions of ordered pairs, K_ij n_i n_j."""
    return kernel(x[:, None], x[None, :]) * number[:, None] * number[None, :]


def test_every_exported_scheme_is_swept() -> None:
    exported = {c for c in vars(ag).values() if isinstance(c, type) and issubclass(c, ag.schemes.Scheme)}
    assert exported == {type(scheme) for scheme in SCHEMES}


@each_scheme
def test_a_scheme_is_a_frozen_record_of_its_options(scheme: ag.schemes.Scheme) -> None:
    same = dataclasses.replace(scheme)
    assert same == scheme
    assert hash(same) == hash(scheme)
    assert eval(repr(scheme), dict(vars(ag))) == scheme
    with pytest.raises(dataclasses.FrozenInstanceError):
        scheme.moments = 3


@each_scheme
def test_a_grid_with_too_few_sections_is_refused_with_advice(scheme: ag.schemes.Scheme) -> None:
    least = scheme.moments if isinstance(scheme, ag.FixedPivot) else 2
    enough = ag.SizeGrid.geometric(smallest=1.0, largest=2.0 ** (least - 1), per_doubling=1)
    scheme.check(enough)
    assert enough.sections == least
    if least > 2:
        with pytest.raises(GridError, match=rf"{least - 1} sections.*at least {least}.*Try"):
            scheme.prepare(ag.SizeGrid.geometric(smallest=1.0, largest=2.0 ** (least - 2), per_doubling=1))


STARTS = {
    "monodisperse": ag.Monodisperse(diameter=400e-9, volume_fraction=1e-5),
    "lognormal": ag.LogNormal(median_diameter=400e-9, gsd=1.2, number=1e15),
    "exponential": ag.Exponential(mean_volume=1.0, number=3.0),
}
# the multiples of the smallest size of a broad start do not fit in memory
PROJECTED = [(s, name) for s in SCHEMES for name in STARTS if s != ag.Monomer() or name == "monodisperse"]


@pytest.mark.parametrize(("scheme", "name"), PROJECTED, ids=str)
def test_starting_numbers_on_the_default_grid_hold_number_and_volume(
    scheme: ag.schemes.Scheme, name: str
) -> None:
    start = STARTS[name]
    grid = scheme.default_grid(start)
    scheme.check(grid)
    number = scheme.project(start, grid)
    assert number.shape == (grid.sections,)
    assert (number >= 0.0).all()
    assert number.sum() / start.total_number == pytest.approx(1.0, abs=1e-13)
    assert number @ grid.volume / start.total_volume == pytest.approx(1.0, abs=1e-13)


@given(scheme=schemes, kernel=kernels, seed=seeds, per_doubling=st.integers(1, 4))
def test_volume_is_kept_with_what_passes_the_top(
    scheme: ag.schemes.Scheme, kernel: ag.kernels.Kernel, seed: int, per_doubling: int
) -> None:
    grid = grid_for(scheme, 6, per_doubling)
    x, number = grid.volume, numbers(seed, grid.sections)
    rates = rates_of(operator_for(scheme, kernel, grid), number)
    moved = float((collisions(kernel, x, number) * x).sum())
    assert abs(x @ rates[:-2] + rates[-1]) <= 1e-14 * moved


@given(scheme=st.sampled_from(NUMBER_KEEPING), kernel=kernels, seed=seeds, per_doubling=st.integers(1, 4))
def test_every_collision_takes_one_particle_with_what_passes_the_top(
    scheme: ag.schemes.Scheme, kernel: ag.kernels.Kernel, seed: int, per_doubling: int
) -> None:
    grid = grid_for(scheme, 6, per_doubling)
    number = numbers(seed, grid.sections)
    rates = rates_of(operator_for(scheme, kernel, grid), number)
    events = 0.5 * collisions(kernel, grid.volume, number).sum()
    assert rates[:-1].sum() / events == pytest.approx(-1.0, abs=1e-12)


@given(scheme=schemes, kernel=kernels, seed=seeds)
def test_the_jacobian_keeps_volume_too(
    scheme: ag.schemes.Scheme, kernel: ag.kernels.Kernel, seed: int
) -> None:
    """Implicit methods keep the volume at round-off only if each column of the Jacobian does."""
    grid = grid_for(scheme, 5)
    x = grid.volume
    jacobian = jacobian_of(operator_for(scheme, kernel, grid), numbers(seed, grid.sections))
    weights = np.concatenate([x, [0.0, 1.0]])
    assert (np.abs(weights @ jacobian) <= 1e-14 * (np.abs(jacobian).T @ weights) * grid.sections).all()


@given(scheme=st.sampled_from(LINEAR_IN_THE_KERNEL), seed=seeds, share=st.floats(0.0, 10.0))
def test_the_operator_of_a_sum_of_kernels_is_the_sum_of_the_operators(
    scheme: ag.schemes.Scheme, seed: int, share: float
) -> None:
    grid = grid_for(scheme)
    number = numbers(seed, grid.sections)
    first, second = KERNELS["brownian"], KERNELS["product"]
    matrices = [part.matrix for part in (first + share * second).part_matrices(grid.volume)]
    prepared = scheme.prepare(grid)
    together = rates_of(prepared.aggregation(matrices[0] + matrices[1]), number)
    apart = [rates_of(prepared.aggregation(matrix), number) for matrix in matrices]
    met = collisions(first + share * second, grid.volume, number)
    # births and losses cancel in a section, so the scale is what collides and not the net rate
    scale = np.full(grid.sections + 2, met.sum())
    scale[-1] = (met * grid.volume).sum()
    assert (np.abs(together - apart[0] - apart[1]) <= 1e-13 * scale).all()


@each_scheme
def test_nothing_is_born_where_nothing_is(scheme: ag.schemes.Scheme) -> None:
    grid = grid_for(scheme)
    operator = operator_for(scheme, KERNELS["sum"], grid)
    assert not rates_of(operator, np.zeros(grid.sections)).any()
    number = np.zeros(grid.sections)
    number[0] = 2.0
    rates = rates_of(operator, number)  # twice the volume of the first pivot is a pivot in every case here
    born = int(np.argmin(np.abs(grid.volume - 2.0 * grid.volume[0])))
    expected = np.zeros(grid.sections + 2)
    events = 0.5 * 0.3 * 2.0 * 2.0**2  # 1/2 K n n, K = 0.3 (1 + 1)
    expected[0], expected[born] = -2.0 * events, events
    np.testing.assert_allclose(rates, expected, rtol=1e-13, atol=1e-13)


@each_scheme
def test_what_passes_the_top_is_counted_by_number_and_volume(scheme: ag.schemes.Scheme) -> None:
    grid = grid_for(scheme)
    number = np.zeros(grid.sections)
    number[-1] = 3.0  # two of the last section make one of twice its volume, past the top for sure
    rates = rates_of(operator_for(scheme, KERNELS["constant"], grid), number)
    events = 0.5 * 0.7 * 3.0**2
    assert rates[-2] == pytest.approx(events, rel=1e-12)
    assert rates[-1] == pytest.approx(events * 2.0 * grid.volume[-1], rel=1e-12)
    assert rates[-3] == pytest.approx(-2.0 * events, rel=1e-12)


@pytest.mark.parametrize("scheme", ON_GEOMETRIC_GRIDS, ids=repr)
def test_a_small_particle_does_not_push_the_last_section_over_the_top(scheme: ag.schemes.Scheme) -> None:
    """It carries about its own volume past the top, not that of its partner."""
    grid = grid_for(scheme)
    x = grid.volume
    ((_, matrix, _),) = KERNELS["constant"].part_matrices(x)
    alone = np.zeros_like(matrix)
    alone[0, -1] = alone[-1, 0] = matrix[0, -1]
    number = np.zeros(grid.sections)
    number[[0, -1]] = 1.0
    rates = rates_of(scheme.prepare(grid).aggregation(alone), number)
    ratio = x[-1] / x[-2]
    linear = 0.7 * x[0] / (x[-1] * (ratio - 1.0))  # share of the first pivot past the top, by linear sharing
    assert 0.0 < rates[-2] < 2.0 * linear
    if scheme in (ag.FixedPivot(moments=2), ag.Sectional()):
        assert rates[-2] / linear == pytest.approx(1.0, abs=1e-12)


def test_the_continuation_covers_every_birth_with_room_for_the_stencil() -> None:
    for grid in (
        ag.SizeGrid.geometric(smallest=1.0, largest=100.0, per_doubling=1),
        ag.SizeGrid.geometric(smallest=1.0, largest=100.0, per_doubling=5),
        ag.SizeGrid.monomers(1.0, 40),
    ):
        for more in (1, 2, 3):
            pivots = continued(grid, more)
            np.testing.assert_array_equal(pivots[: grid.sections], grid.volume)
            assert np.sum(pivots > 2.0 * grid.volume[-1]) >= more
            assert (np.diff(pivots) > 0.0).all()
            if grid.is_geometric:
                np.testing.assert_allclose(pivots[1:] / pivots[:-1], grid.ratio, rtol=1e-12)


# ---- breakage

LINEAR = [ag.FixedPivot(moments=2), ag.FixedPivot(moments=4), ag.FixedPivot(moments=6), ag.Sectional()]
LAWS = {
    "uniform": ag.fragments.uniform_binary(),
    "halves": ag.fragments.equal_binary(),
    "thirds": ag.fragments.ternary(),
    "erosion": ag.fragments.erosion(1.3),
    "beta": ag.fragments.beta(shape=3.0),
    "many": ag.fragments.power_law(exponent=-0.5),
}
laws = st.sampled_from(list(LAWS))


def breaking(scheme: ag.schemes.Scheme, law: str, grid: ag.SizeGrid) -> tuple[Array, Any]:
    """Matrix (n, n) [1/s] of a law at the rate v^(1/3), and its table."""
    rate = ag.rates.power_law(coefficient=0.7, exponent=1.0 / 3.0)
    table = ag.Breakage(rate=rate, fragments=LAWS[law]).table(grid.volume)
    jacobian = jacobian_of(scheme.prepare(grid).breakage(*table), np.zeros(grid.sections))
    return jacobian[:-2, :-2], table


@given(scheme=st.sampled_from(LINEAR), law=laws, per_doubling=st.integers(1, 5))
def test_breakage_keeps_volume_and_makes_the_pieces_of_its_law(
    scheme: ag.schemes.Scheme, law: str, per_doubling: int
) -> None:
    """What is smaller than the first pivot counts there by volume, so there the number of pieces is smaller."""
    grid = ag.SizeGrid.geometric(smallest=1.0, largest=300.0, per_doubling=per_doubling)
    x = grid.volume
    matrix, table = breaking(scheme, law, grid)
    gross = np.abs(matrix).T @ x
    assert (np.abs(x @ matrix) <= 1e-14 * gross).all()
    assert not np.tril(matrix, -1).any()
    counted = table.count * np.minimum(table.volume / x[0], 1.0)
    pieces = np.bincount(table.parent, counted, x.size)
    expected = table.rate * (pieces - 1.0)
    expected[0] = 0.0  # all its fragments count as itself
    assert (np.abs(matrix.sum(axis=0) - expected) <= 1e-12 * np.abs(matrix).sum(axis=0)).all()


@given(moments=st.sampled_from([4, 6]), law=laws, per_doubling=st.integers(1, 5))
def test_breakage_keeps_as_many_moments_as_the_scheme(moments: int, law: str, per_doubling: int) -> None:
    """Of parents with enough pivots below them, and of the fragments that are on the grid."""
    grid = ag.SizeGrid.geometric(smallest=1.0, largest=300.0, per_doubling=per_doubling)
    x = grid.volume
    matrix, table = breaking(ag.FixedPivot(moments=moments), law, grid)
    small = table.volume <= x[0]
    for k in np.arange(moments) * (0.5 if moments == 6 else 1.0):
        made = np.where(small, table.volume / x[0] * x[0] ** k, table.volume**k)
        expected = table.rate * (np.bincount(table.parent, table.count * made, x.size) - x**k)
        gross = np.abs(matrix).T @ x**k
        error = np.abs(x**k @ matrix - expected)[moments - 1 :]
        assert (error <= 1e-12 * gross[moments - 1 :]).all()


@pytest.mark.parametrize("scheme", LINEAR, ids=repr)
def test_halves_on_a_doubling_grid_are_whole_particles(scheme: ag.schemes.Scheme) -> None:
    grid = ag.SizeGrid.geometric(smallest=1.0, largest=256.0, per_doubling=1)
    matrix, table = breaking(scheme, "halves", grid)
    expected = np.diag(-table.rate) + np.diag(2.0 * table.rate[1:], 1)
    expected[0, 0] = 0.0  # the smallest cannot get smaller
    np.testing.assert_allclose(matrix, expected, rtol=1e-12, atol=1e-13)


@pytest.mark.parametrize("scheme", LINEAR, ids=repr)
def test_breakage_without_events_changes_nothing(scheme: ag.schemes.Scheme) -> None:
    grid = ag.SizeGrid.geometric(smallest=1.0, largest=64.0, per_doubling=2)
    law = ag.Breakage(
        rate=ag.rates.power_law(coefficient=1.0, exponent=0.0),
        fragments=ag.fragments.uniform_binary(),
        smallest=100.0,
    )
    operator = scheme.prepare(grid).breakage(*law.table(grid.volume))
    assert not rates_of(operator, np.ones(grid.sections)).any()
    assert not jacobian_of(operator, np.ones(grid.sections)).any()
