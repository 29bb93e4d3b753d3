"""Every law of fragments conserves volume and number of pieces, on any grid."""

from __future__ import annotations

import inspect
import math
import pickle
from itertools import pairwise
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from aggsim.breakage import Breakage, fragments, rates
from aggsim.errors import BreakageError


def hump(v: Any, u: Any) -> Any:
    return 12.0 * (v / u) * (1.0 - v / u) / u


LAWS: dict[str, list[Any]] = {
    "uniform_binary": [fragments.uniform_binary()],
    "equal_binary": [fragments.equal_binary()],
    "ternary": [fragments.ternary()],
    "erosion": [fragments.erosion(1e-21), fragments.erosion(1e-15)],
    "parabolic": [fragments.parabolic(shape=c) for c in (0.0, 1.0, 3.0)],
    "beta": [fragments.beta(shape=q) for q in (0.01, 0.5, 3.0, 7.3, 1000.0)],
    "power_law": [fragments.power_law(exponent=nu) for nu in (0.0, -0.5, -0.99)],
    "lognormal": [
        fragments.lognormal(median_share=m, gsd=s) for m, s in ((0.1, 1.5), (0.95, 1.01), (0.01, 20.0))
    ],
    "from_function": [fragments.from_function(hump, pieces=2)],
}
CASES = [law for laws in LAWS.values() for law in laws]
JUMPS = fragments.from_function(
    lambda v, u: np.where((v > 0.1 * u) & (v < 0.9 * u), 2.5 / u, 0.0), pieces=2.0
)
# uniform of small parents, a hump of large ones
BY_SIZE = fragments.from_function(
    lambda v, u: np.where(u > 1e-20, hump(v, u), 2.0 / u), lambda u: 2.0 + 0.0 * u
)
ALWAYS = rates.power_law(coefficient=1.0, exponent=0.0)


def grids(most: int = 25) -> st.SearchStrategy[np.ndarray]:
    """Pivots with neighbours that are 0.01 % to a factor of 100 apart."""
    steps = st.lists(st.floats(1e-4, math.log(100.0)), max_size=most)
    return steps.map(lambda s: 1e-21 * np.exp(np.concatenate([[0.0], np.cumsum(s)])))


def test_every_law_is_in_the_sweep() -> None:
    offered = inspect.getmembers(fragments, inspect.isfunction)
    assert {name for name, thing in offered if thing.__module__ == fragments.__name__} == set(LAWS)


@pytest.mark.parametrize("law", CASES, ids=repr)
@given(grid=grids())
def test_volume_and_number_are_conserved(law: Any, grid: np.ndarray) -> None:
    table = Breakage(rate=ALWAYS, fragments=law).table(grid)
    assert (np.diff(table.parent) >= 0).all()
    assert (table.volume > 0.0).all()
    assert (table.volume <= grid[table.parent]).all()
    assert (table.count >= 0.0).all()
    volume = np.bincount(table.parent, table.count * table.volume)
    np.testing.assert_allclose(volume, grid, rtol=1e-13)
    np.testing.assert_allclose(np.bincount(table.parent, table.count), law.pieces(grid), rtol=1e-13)


@pytest.mark.parametrize("law", CASES, ids=repr)
@given(grid=grids(most=12))
def test_integrals_do_not_depend_on_the_grid(law: Any, grid: np.ndarray) -> None:
    """The quadrature itself, before the last digits are put right, against a grid of the parent alone."""
    last = grid.size - 1
    _, volume, count = law.point_masses(grid, np.array([last]))
    _, alone, number = law.point_masses(grid[last:], np.array([0]))
    for power in (0.0, 0.5, 1.0, 2.5, 5.0):
        whole = (number * (alone / grid[last]) ** power).sum()
        # rtol: digits lost in normal or beta densities of narrow laws, and in 1 - v/u of an own formula
        assert (count * (volume / grid[last]) ** power).sum() == pytest.approx(whole, rel=1e-11)
    assert (count * volume).sum() == pytest.approx(grid[last], rel=1e-11)
    assert count.sum() == pytest.approx(law.pieces(grid[last]), rel=1e-11)


@pytest.mark.parametrize("law", CASES, ids=repr)
def test_parents_stand_alone(law: Any) -> None:
    grid = 1e-21 * 1.3 ** np.arange(20.0)
    parent, volume, count = law.point_masses(grid, np.array([3, 11]))
    for index in (3, 11):
        _, alone, number = law.point_masses(grid, np.array([index]))
        np.testing.assert_array_equal(volume[parent == index], alone)
        np.testing.assert_array_equal(count[parent == index], number)


@pytest.mark.parametrize("law", [*CASES, JUMPS, BY_SIZE], ids=repr)
def test_random_fragments_follow_the_table(law: Any) -> None:
    grid = 1e-21 * 1.37 ** np.arange(14.0)
    table = Breakage(rate=ALWAYS, fragments=law).table(grid)
    events = 10_000
    parents = np.array([4, 13])
    volume = law.sample(np.tile(grid[parents], events), np.random.default_rng(8))
    np.testing.assert_allclose(volume.sum(axis=1), np.tile(grid[parents], events), rtol=1e-14)
    assert (volume >= 0.0).all()
    for place, parent in enumerate(parents):
        mine = table.parent == parent
        mean = np.bincount(np.searchsorted(grid, table.volume[mine]), table.count[mine], minlength=grid.size)
        pieces = volume[place::2]
        # a piece below the range of floats is 0, in the first cell
        cells = pairwise([-1.0, *grid])
        drawn = np.array([((pieces > low) & (pieces <= high)).sum(axis=1) for low, high in cells]).T
        # the scatter of a sample that should hold fewer than 25 in all says little; 20 are 4 times the root of 25
        limit = np.where(events * mean > 25.0, 4.0 * drawn.std(axis=0) / math.sqrt(events), 20.0 / events)
        assert (np.abs(drawn.mean(axis=0) - mean) <= limit + 1e-12).all()


@pytest.mark.parametrize("law", CASES, ids=repr)
def test_chance_comes_from_the_generator_alone(law: Any) -> None:
    parent = 1e-21 * 1.37 ** np.arange(14.0)
    first, again = (law.sample(parent, np.random.default_rng(3)) for _ in range(2))
    np.testing.assert_array_equal(first, again)
    assert law.sample(np.zeros(0), np.random.default_rng(3)).shape == (0, first.shape[1])


@pytest.mark.parametrize("law", CASES, ids=repr)
def test_laws_pickle(law: Any) -> None:
    assert pickle.loads(pickle.dumps(law)) == law


@pytest.mark.parametrize("law", CASES, ids=repr)
def test_pieces_have_the_shape_of_the_parents(law: Any) -> None:
    assert np.shape(law.pieces(1e-18)) == ()
    assert law.pieces(np.full((2, 3), 1e-18)).shape == (2, 3)


@pytest.mark.parametrize(
    ("law", "number"),
    [
        (fragments.uniform_binary(), 2.0),
        (fragments.power_law(exponent=-0.5), 3.0),
        (fragments.power_law(exponent=-2.0 / 3.0), 4.0),
        (fragments.lognormal(median_share=0.3, gsd=2.0), 2.0),
        (fragments.from_function(hump, 2), 2.0),
    ],
)
def test_numbers_of_pieces(law: Any, number: float) -> None:
    assert law.pieces(1e-18) == pytest.approx(number, rel=1e-14)


def test_pieces_may_depend_on_the_parent() -> None:
    """A power law whose exponent makes two pieces of small and three of large parents."""

    def pieces(u: Any) -> Any:
        return np.where(u > 5.0, 3.0, 2.0)

    def density(v: Any, u: Any) -> Any:
        exponent = np.where(u > 5.0, -0.5, 0.0)
        return (exponent + 2.0) / u * (v / u) ** exponent

    law = fragments.from_function(density, pieces)
    table = Breakage(rate=ALWAYS, fragments=law).table([1.0, 4.0, 9.0])
    np.testing.assert_allclose(np.bincount(table.parent, table.count), [2.0, 2.0, 3.0], rtol=1e-13)


def test_laws_meet_where_they_should() -> None:
    grid = 1e-21 * 1.4 ** np.arange(15.0)
    tables = [
        Breakage(rate=ALWAYS, fragments=law).table(grid)
        for law in (
            fragments.uniform_binary(),
            fragments.parabolic(shape=2.0),
            fragments.beta(shape=1.0),
            fragments.power_law(exponent=0.0),
            fragments.from_function(lambda v, u: 2.0 / u + 0.0 * v, 2.0),
        )
    ]
    for table in tables[1:]:
        np.testing.assert_allclose(table.volume, tables[0].volume, rtol=1e-14)
        np.testing.assert_allclose(table.count, tables[0].count, rtol=1e-12)


@pytest.mark.parametrize(
    ("build", "words"),
    [
        (lambda: fragments.erosion(0.0), "piece_volume.*above 0"),
        (lambda: fragments.erosion(math.nan), "piece_volume"),
        (lambda: fragments.parabolic(shape=3.1), "shape=3.1.*at most 3"),
        (lambda: fragments.parabolic(shape=-0.1), "shape"),
        (lambda: fragments.beta(shape=0.0), "shape=0.*at least 0.01"),
        (lambda: fragments.beta(shape=1e4), "equal_binary"),
        (lambda: fragments.power_law(exponent=-1.0), "exponent=-1.*at least -0.99"),
        (lambda: fragments.power_law(exponent=1.0), "exponent=1.*at most 0"),
        (lambda: fragments.lognormal(median_share=1.0, gsd=1.5), "median_share"),
        (lambda: fragments.lognormal(median_share=0.1, gsd=1.0), "gsd=1.*equal_binary"),
        (lambda: fragments.from_function(2.0, 2.0), "density"),  # type: ignore[arg-type]
        (lambda: fragments.from_function(hump, 1.0), "pieces=1.*at least 2"),
        (lambda: fragments.from_function(hump, math.inf), "pieces"),
    ],
)
def test_values_outside_their_range_are_refused(build: Any, words: str) -> None:
    with pytest.raises(BreakageError, match=words):
        build()
