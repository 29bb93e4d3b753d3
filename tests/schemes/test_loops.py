"""The compiled loops against plain twins, exact fractions, and finite differences of a quadratic form."""

from __future__ import annotations

from decimal import Decimal, localcontext
from fractions import Fraction

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scheme_cases import discrete_equation, fragment_sharing, jacobian_of, rates_of, weak_form

import aggsim as ag

Array = np.ndarray

seeds = st.integers(0, 2**32 - 1)
steps = st.lists(st.floats(1.05, 4.0), min_size=6, max_size=14)  # ratios of neighbouring pivots


def symmetric(random: np.random.Generator, n: int) -> Array:
    half = random.lognormal(0.0, 1.0, (n, n))
    return half + half.T


def root(value: Fraction) -> Fraction:
    """Square root to 60 digits."""
    with localcontext() as context:
        context.prec = 60
        return Fraction((Decimal(value.numerator) / Decimal(value.denominator)).sqrt())


def exact_change(x: Array, i: int, j: int, first: int, count: int, half: bool) -> list[Fraction]:
    """Net change of the targets by a birth x_i + x_j and the loss of i, in exact arithmetic."""
    pivots = [Fraction(float(v)) for v in x[first : first + count]]
    born = Fraction(float(x[i])) + Fraction(float(x[j]))
    if half:
        pivots, born = [root(v) for v in pivots], root(born)
    out = []
    for p in range(count):
        weight = Fraction(1)
        for q in range(count):
            if q != p:
                weight *= (born - pivots[q]) / (pivots[p] - pivots[q])
        out.append(weight - (first + p == i))
    return out


@pytest.mark.parametrize("order", [2, 4, 6])
@pytest.mark.parametrize(
    "grid",
    [
        ag.SizeGrid.geometric(smallest=1.0, largest=1e4, per_doubling=1),
        ag.SizeGrid.geometric(smallest=1e-21, largest=1e-19, per_doubling=6),
        ag.SizeGrid.monomers_then_geometric(1.0, 100.0, per_doubling=3),
    ],
    ids=["1 per doubling", "6 per doubling", "monomers then 3 per doubling"],
)
def test_births_are_those_of_exact_arithmetic(grid: ag.SizeGrid, order: int) -> None:
    prepared = ag.FixedPivot(moments=order).prepare(grid)
    (first, count, weight), x = prepared.births, prepared.pivots
    n = grid.sections
    for i in range(n):
        for j in range(i + 1):
            t = i * (i + 1) // 2 + j
            if count[t] == 1:  # the birth is a pivot, to round-off
                assert weight[t, 0] == 1.0
                assert x[first[t]] == pytest.approx(x[i] + x[j], rel=2e-13, abs=0.0)
                continue
            nodes = int(count[t])
            assert nodes == order or x[i] + x[j] >= x[n - order // 2]  # fewer may do at the top
            exact = exact_change(x, i, j, int(first[t]), nodes, order == 6 and nodes > 2)
            # i itself changes by the sum of the others, so that its change keeps its digits where x_j << x_i
            size = sum(abs(e) for p, e in enumerate(exact) if first[t] + p != i)
            for p in range(nodes):
                assert abs(weight[t, p] - exact[p]) <= 1e-13 * size


@given(ratios=steps, order=st.sampled_from([2, 4, 6]))
def test_births_keep_their_moments_on_any_grid(ratios: list[float], order: int) -> None:
    grid = ag.SizeGrid.from_pivots(np.cumprod(ratios))
    prepared = ag.FixedPivot(moments=order).prepare(grid)
    (first, count, weight), x = prepared.births, prepared.pivots
    n = grid.sections
    for i in range(n):
        for j in range(i + 1):
            t = i * (i + 1) // 2 + j
            targets = np.arange(first[t], first[t] + count[t])
            shares = weight[t, : count[t]] + (targets == i) * (count[t] > 1)
            born = x[i] + x[j]
            kept = order if count[t] == 1 else int(count[t])
            assert kept == order or born >= x[n - order // 2]
            step = 0.5 if order == 6 and kept > 2 else 1.0  # 6 moments: of orders 0, 1/2, 1, ... in v
            for k in step * np.arange(kept):
                terms = shares * (x[targets] / born) ** k
                # what is added up can exceed its sum on grids whose spacing jumps
                assert terms.sum() == pytest.approx(1.0, abs=1e-12 * max(1.0, np.abs(terms).sum()))


@given(seed=seeds, order=st.sampled_from([2, 4, 6]), per_doubling=st.sampled_from([1, 2, 3]))
def test_segment_rates_equal_the_weak_form(seed: int, order: int, per_doubling: int) -> None:
    """Particles up to a size whose births stay clear of the top, where the scheme may use fewer pivots."""
    random = np.random.default_rng(seed)
    filled = 14
    grid = ag.SizeGrid.geometric(
        smallest=1.0, largest=2.0 ** ((filled + 3) / per_doubling + 1), per_doubling=per_doubling
    )
    matrix = symmetric(random, grid.sections)
    number = random.normal(0.0, 1.0, grid.sections) * 10.0 ** random.uniform(-6, 0, grid.sections)
    number[filled:] = 0.0
    number[random.integers(filled)] = 0.0
    operator = ag.FixedPivot(moments=order).prepare(grid).aggregation(matrix)
    plain = weak_form(grid.volume, matrix, number, order)
    assert (plain.rates[-2:] == 0.0).all()
    difference = np.abs(rates_of(operator, number) - plain.rates)
    assert (difference <= 1e-13 * plain.gross).all()


def test_segment_rates_equal_the_weak_form_up_to_the_top_for_two_moments() -> None:
    random = np.random.default_rng(5)
    for per_doubling in (1, 2, 3):
        grid = ag.SizeGrid.geometric(smallest=1.0, largest=64.0, per_doubling=per_doubling)
        matrix = symmetric(random, grid.sections)
        number = random.normal(0.0, 1.0, grid.sections)
        operator = ag.FixedPivot(moments=2).prepare(grid).aggregation(matrix)
        plain = weak_form(grid.volume, matrix, number, 2)
        difference = np.abs(rates_of(operator, number) - plain.rates)
        assert (difference <= 1e-13 * plain.gross).all()


@given(seed=seeds, n=st.integers(2, 24))
def test_monomer_rates_equal_the_discrete_equation(seed: int, n: int) -> None:
    random = np.random.default_rng(seed)
    matrix = symmetric(random, n)
    number = random.normal(0.0, 1.0, n) * 10.0 ** random.uniform(-6, 0, n)
    number[random.integers(n)] = 0.0
    operator = ag.Monomer().prepare(ag.SizeGrid.monomers(1.0, n)).aggregation(matrix)
    plain = discrete_equation(matrix, number)
    difference = np.abs(rates_of(operator, number) - plain.rates)
    assert (difference <= 1e-13 * plain.gross).all()


def quadratic_operators(random: np.random.Generator) -> list[tuple[object, int]]:
    geometric = ag.SizeGrid.geometric(smallest=1.0, largest=64.0, per_doubling=2)
    mixed = ag.SizeGrid.monomers_then_geometric(1.0, 64.0, per_doubling=3)
    cases = [(ag.FixedPivot(moments=m), grid) for m in (2, 4, 6) for grid in (geometric, mixed)]
    cases += [(ag.Sectional(), geometric), (ag.Monomer(), ag.SizeGrid.monomers(1.0, 17))]
    return [
        (scheme.prepare(grid).aggregation(symmetric(random, grid.sections)), grid.sections)
        for scheme, grid in cases
    ]


@given(seed=seeds)
def test_jacobian_equals_central_differences(seed: int) -> None:
    """The rates are a quadratic form: central differences are exact for a step of any size."""
    random = np.random.default_rng(seed)
    for operator, n in quadratic_operators(random):
        number = random.uniform(0.0, 1.0, n)
        exact = jacobian_of(operator, number)
        scale = np.abs(exact).max()
        for k in range(n):
            step = np.zeros(n)
            step[k] = 1.0
            slope = 0.5 * (rates_of(operator, number + step) - rates_of(operator, number - step))
            assert np.abs(exact[:, k] - slope).max() <= 1e-13 * n * scale
        # Euler: a quadratic form has half its Jacobian times the numbers
        half = 0.5 * exact[:, :n] @ number
        assert np.abs(rates_of(operator, number) - half).max() <= 1e-14 * n * scale
        assert not exact[:, n:].any()  # what has passed the top changes nothing


def test_loops_add_a_multiple_to_what_is_there() -> None:
    random = np.random.default_rng(1)
    for operator, n in quadratic_operators(random):
        state = np.append(random.uniform(0.0, 1.0, n), [5.0, 7.0])
        once, before = rates_of(operator, state[:n]), random.normal(size=n + 2)
        out = before.copy()
        total = operator.add_rates(state, 0.25, out)
        np.testing.assert_allclose(out, before + 0.25 * once, rtol=1e-13, atol=1e-13)
        assert total == pytest.approx(out.sum(), abs=1e-12)
        jacobian, matrix = jacobian_of(operator, state[:n]), random.normal(size=(n + 2, n + 2))
        out = matrix.copy()
        operator.add_jacobian(state, 0.25, out)
        np.testing.assert_allclose(out, matrix + 0.25 * jacobian, rtol=1e-13, atol=1e-13)


@pytest.mark.parametrize("bad", [np.nan, np.inf])
def test_a_number_that_is_not_finite_shows_in_the_sum_that_is_returned(bad: float) -> None:
    random = np.random.default_rng(2)
    for operator, n in quadratic_operators(random):
        for k in range(n):
            state = np.append(random.uniform(0.1, 1.0, n), [0.0, 0.0])
            state[k] = bad
            assert not np.isfinite(operator.add_rates(state, 1.0, np.zeros(n + 2)))


# ---- breakage


def fragments(random: np.random.Generator, x: Array) -> tuple[Array, Array, Array, Array]:
    """A table of fragments: some parents do not break, some fragments are below the grid, some are pivots."""
    rate = random.lognormal(0.0, 1.0, x.size) * (random.uniform(size=x.size) > 0.2)
    parent = np.repeat(np.flatnonzero(rate), 9)
    volume = x[parent] * random.uniform(0.0, 1.0, parent.size) ** random.choice([1.0, 4.0], parent.size)
    on_pivot = random.uniform(size=parent.size) < 0.2
    volume[on_pivot] = x[random.integers(0, parent[on_pivot] + 1)]
    count = random.uniform(0.0, 1.0, parent.size)
    total = np.bincount(parent, count * volume, x.size)
    return rate, parent, volume, count * (x / np.maximum(total, 1e-300))[parent]


@given(seed=seeds, ratios=steps, order=st.sampled_from([2, 4, 6]))
def test_fragments_are_shared_as_a_plain_twin_shares_them(seed: int, ratios: list[float], order: int) -> None:
    random = np.random.default_rng(seed)
    grid = ag.SizeGrid.from_pivots(np.cumprod(ratios))
    table = fragments(random, grid.volume)
    operator = ag.FixedPivot(moments=order).prepare(grid).breakage(*table)
    number = random.normal(0.0, 1.0, grid.sections)
    number[random.integers(grid.sections) :] *= random.integers(2)  # now and then nothing above a size
    matrix, gross = fragment_sharing(grid.volume, *table, order)
    rates = rates_of(operator, number)
    assert (np.abs(rates[:-2] - matrix @ number) <= 1e-13 * (gross @ np.abs(number))).all()
    assert not rates[-2:].any()  # nothing is born above its parent
    # linear: the Jacobian is the matrix, exactly
    jacobian = jacobian_of(operator, number)
    assert (np.abs(jacobian[:-2, :-2] - matrix) <= 1e-13 * gross).all()
    assert not jacobian[-2:].any()
    assert not jacobian[:, -2:].any()
    columns = np.stack([rates_of(operator, unit) for unit in np.eye(grid.sections)], axis=1)
    np.testing.assert_array_equal(columns, jacobian[:, :-2])


def test_breakage_is_added_to_what_is_there() -> None:
    random = np.random.default_rng(4)
    grid = ag.SizeGrid.geometric(smallest=1.0, largest=64.0, per_doubling=2)
    operator = ag.FixedPivot(moments=4).prepare(grid).breakage(*fragments(random, grid.volume))
    n = grid.sections
    state = np.append(random.uniform(0.0, 1.0, n), [5.0, 7.0, 9.0])  # and one stream
    before = random.normal(size=n + 3)
    out = before.copy()
    total = operator.add_rates(state, 0.25, out)
    once = rates_of(operator, state[:n])
    np.testing.assert_allclose(out[:n], before[:n] + 0.25 * once[:n], rtol=1e-13, atol=1e-13)
    np.testing.assert_array_equal(out[n:], before[n:])
    assert np.isfinite(total)
    matrix = random.normal(size=(n + 3, n + 3))
    out = matrix.copy()
    operator.add_jacobian(state, 0.25, out)
    np.testing.assert_allclose(
        out[:n, :n], matrix[:n, :n] + 0.25 * jacobian_of(operator, state[:n])[:n, :n], rtol=1e-13, atol=1e-13
    )
    np.testing.assert_array_equal(out[n:], matrix[n:])
    for bad in (np.nan, np.inf):
        for k in range(1, n):  # the first section does not break
            broken = state.copy()
            broken[k] = bad
            if operator.matrix[k, k] != 0.0:
                assert not np.isfinite(operator.add_rates(broken, 1.0, np.zeros(n + 3)))
