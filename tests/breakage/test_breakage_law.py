from __future__ import annotations

import math
import pickle
from dataclasses import FrozenInstanceError
from typing import Any

import numpy as np
import pytest

from aggsim.breakage import Breakage, fragments, rates
from aggsim.errors import BreakageError
from aggsim.kernels import Strength

GRID = 1e-18 * 1.3 ** np.arange(12.0)
HALVES = fragments.equal_binary()
LINEAR = rates.power_law(coefficient=2e18, exponent=1.0)
LAW = Breakage(rate=LINEAR, fragments=HALVES)
PULSE = Strength.steps([10.0], [1.0, 0.2])


def breaking(rate: Any = LINEAR, law: Any = HALVES, **options: Any) -> Breakage:
    return Breakage(rate=rate, fragments=law, **options)


def test_table() -> None:
    table = LAW.table(GRID)
    np.testing.assert_allclose(table.rate, 2.0 * 1.3 ** np.arange(12.0), rtol=1e-14)
    np.testing.assert_array_equal(table.parent, np.arange(12))
    np.testing.assert_array_equal(table.volume, GRID / 2.0)
    np.testing.assert_array_equal(table.count, 2.0)
    rate, parent, volume, count = table  # unpacks in this order
    assert rate is table.rate
    assert parent.dtype == np.int64
    assert volume is table.volume
    assert count is table.count


def test_the_smallest_and_what_is_smaller_do_not_break() -> None:
    table = breaking(smallest=GRID[4] * (1.0 - 1e-10)).table(GRID)
    np.testing.assert_array_equal(table.rate[:5], 0.0)
    assert (table.rate[5:] > 0.0).all()
    np.testing.assert_array_equal(table.parent, np.arange(5, 12))
    assert breaking(smallest=0.0).table(GRID).parent.size == 12


def test_rates_of_particles_in_any_order() -> None:
    law = breaking(smallest=GRID[4])
    np.testing.assert_array_equal(law.rates(GRID), law.table(GRID).rate)
    np.testing.assert_array_equal(law.rates(GRID[::-1]), law.rates(GRID)[::-1])
    np.testing.assert_array_equal(
        law.rates([GRID[4] * (1.0 + 1e-12), GRID[4] * (1.0 + 1e-8)]) > 0.0, [False, True]
    )
    with pytest.raises(BreakageError, match=r"volume\[1\]=0 m3"):
        law.rates([1e-18, 0.0])


def test_rates_are_not_asked_for_what_does_not_break() -> None:
    law = breaking(rate=lambda v: np.log(v / GRID[2]), smallest=GRID[2])
    assert law.table(GRID).rate[3] == pytest.approx(math.log(1.3), rel=1e-12)


def test_a_rate_of_zero_has_no_fragments() -> None:
    table = breaking(rate=lambda v: np.where(v > GRID[8], 1.0, 0.0), law=fragments.uniform_binary()).table(
        GRID
    )
    assert set(table.parent) == {9, 10, 11}
    for nothing in (breaking(rate=lambda v: 0.0), breaking(smallest=1.0)):
        table = nothing.table(GRID)
        np.testing.assert_array_equal(table.rate, np.zeros(12))
        assert table.parent.size == table.volume.size == table.count.size == 0


def test_scaling() -> None:
    plain = LAW.table(GRID).rate
    for scaled in (0.5 * LAW, LAW * 0.5, np.float64(0.5) * LAW, LAW * np.float64(0.5), 2.0 * (0.25 * LAW)):
        np.testing.assert_allclose(scaled.table(GRID).rate, 0.5 * plain, rtol=1e-15)
        assert scaled.fragments == HALVES
        assert scaled == 0.5 * LAW
    assert (0.0 * LAW).table(GRID).parent.size == 0


def test_strength_in_time() -> None:
    for law in (LAW * PULSE, PULSE * LAW):
        assert law.strength == PULSE
        np.testing.assert_array_equal(law.table(GRID).rate, LAW.table(GRID).rate)
    twice = LAW * PULSE * Strength.steps([5.0], [3.0, 4.0])
    assert twice.strength.jumps == (5.0, 10.0)
    assert twice.strength(12.0) == pytest.approx(0.8, rel=1e-15)
    assert breaking(strength=PULSE) == LAW * PULSE


@pytest.mark.parametrize("factor", [-1.0, math.nan, math.inf, "half", None, True, abs, LAW])
def test_bad_factors_are_refused(factor: Any) -> None:
    with pytest.raises(BreakageError, match="factor"):
        LAW * factor


def test_the_law_is_a_frozen_value_that_pickles() -> None:
    law = 0.5 * breaking(smallest=1e-19, name="stirrer") * PULSE
    assert pickle.loads(pickle.dumps(law)) == law
    with pytest.raises(FrozenInstanceError):
        law.name = "other"  # type: ignore[misc]


@pytest.mark.parametrize(
    ("options", "words"),
    [
        ({"rate": 0.02}, r"rate=0\.02.*power_law"),
        ({"law": fragments.uniform_binary}, "brackets"),
        ({"law": type(HALVES)}, "brackets"),
        ({"law": lambda v, u: 2.0 / u}, "from_function"),
        ({"smallest": -1.0}, "smallest=-1 m3"),
        ({"smallest": math.nan}, "smallest"),
        ({"strength": 0.5}, "strength"),
        ({"strength": math.sin}, "strength"),
        ({"name": ""}, "name"),
    ],
)
def test_construction_is_checked(options: dict[str, Any], words: str) -> None:
    with pytest.raises(BreakageError, match=words):
        breaking(**options)


@pytest.mark.parametrize(
    ("rate", "words"),
    [
        (
            lambda v: -v,
            r"'breakage': rate of a particle of 1e-18 m3 \(diameter 1\.24.*e-06 m\)=-1e-18 1/s.*at least 0",
        ),
        (lambda v: np.nan * v, "nan"),
        (lambda v: 1.0 / (v - v), "inf"),
        (lambda v: 1.0 if v > 2e-18 else 0.0, r"numpy\.where"),
        (lambda v: np.ones(3), "could not be evaluated"),
        (rates.power_law, "could not be evaluated"),
    ],
)
def test_what_is_no_rate_is_refused(rate: Any, words: str) -> None:
    with pytest.raises(BreakageError, match=words):
        breaking(rate=rate).table(GRID)


@pytest.mark.parametrize(
    ("density", "pieces", "words"),
    [
        # 10 % more volume than the parent, and 10 % less
        (
            lambda v, u: 2.2 / u + 0.0 * v,
            2.2,
            r"particle of 1e-18 m3 .*=1\.1e-18 m3, 1e-19 m3 created,.*1e-18 m3",
        ),
        (lambda v, u: 1.8 / u + 0.0 * v, 2.0, r"=9e-19 m3, 1e-19 m3 lost"),
        # a share of the parent, not divided by it
        (lambda v, u: 2.0 + 0.0 * v, 2.0, "lost.*divide by the parent"),
        (lambda v, u: 2.0 / u + 0.0 * v, 3.0, "number of fragments of a particle of 1e-18 m3.*=2 .*pieces=3"),
        (lambda v, u: 2.0 / u + 0.0 * v, lambda u: 1.0 + 0.0 * u, "pieces of.*=1 .*at least 2"),
        (lambda v, u: 2.0 / u + 0.0 * v, lambda u: np.nan * u, "pieces of.*=nan"),
        # pi as 3.1416
        (lambda v, u: 2.0 / u * np.pi / 3.1416 + 0.0 * v, 2.0, "lost"),
    ],
)
def test_fragments_that_do_not_make_up_the_parent_are_refused(density: Any, pieces: Any, words: str) -> None:
    law = breaking(law=fragments.from_function(density, pieces))
    with pytest.raises(BreakageError, match=words):
        law.table(GRID)


def test_a_density_that_cannot_be_resolved_is_refused() -> None:
    law = breaking(law=fragments.from_function(lambda v, u: 1.02 / u * (v / u) ** -0.98, 51.0))
    with pytest.raises(BreakageError, match="number of fragments"):
        law.table(GRID)


class Own:
    """A law of one's own that leaves what it is told to."""

    def __init__(self, parent: Any, share: Any, count: Any) -> None:
        self.masses = np.array(parent), np.array(share), np.array(count)

    def pieces(self, parent: Any) -> Any:
        return 2.0

    def point_masses(self, volume: Any, parents: Any) -> Any:
        parent, share, count = self.masses
        return parent, share * volume[parent], count


def test_an_own_law_of_fragments() -> None:
    table = breaking(law=Own([0, 0, 1, 1], [0.2, 0.8, 0.3, 0.7], np.ones(4))).table(GRID[:2])
    np.testing.assert_allclose(table.volume, GRID[[0, 0, 1, 1]] * [0.2, 0.8, 0.3, 0.7], rtol=1e-15)
    np.testing.assert_allclose(table.count, 1.0, rtol=1e-15)


@pytest.mark.parametrize(
    ("law", "words"),
    [
        (Own([1, 1, 0, 0], np.full(4, 0.5), np.ones(4)), "ascending"),
        (Own([0, 0, 1, 1], [0.5, 0.5, -0.5, 1.5], np.ones(4)), "volumes above 0 and at most the parent"),
        (Own([0, 0, 1], [0.5, 0.5, 0.5], [1.0, 1.0, math.nan]), "numbers finite"),
        (Own([0, 0, 0, 1], [0.25, 0.25, 0.5, 0.5], [3.0, -1.0, 1.0, 2.0]), "at least 0"),
        (Own([0, 0], [0.5, 0.5], [1.0, 1.0]), "=0 m3, 1.3e-18 m3 lost"),  # nothing from the second
    ],
)
def test_bad_masses_of_an_own_law_are_refused(law: Any, words: str) -> None:
    with pytest.raises(BreakageError, match=words):
        breaking(law=law).table(GRID[:2])


def test_masses_of_what_does_not_break_are_refused() -> None:
    law = Own([0, 0, 1, 1], np.full(4, 0.5), np.ones(4))
    with pytest.raises(BreakageError, match="indices among"):
        breaking(law=law, smallest=GRID[0]).table(GRID[:2])


def test_number_and_volume_are_put_right_in_the_last_digits() -> None:
    law = Own([0, 0], [0.25, 0.75], [1.0 + 3e-9, 1.0 - 2e-9])
    table = breaking(law=law).table(GRID[:1])
    assert table.count.sum() == pytest.approx(2.0, rel=1e-15)
    assert (table.count * table.volume).sum() == pytest.approx(GRID[0], rel=1e-15)


@pytest.mark.parametrize("volume", [[1.0, 1.0], [2.0, 1.0], [0.0, 1.0], [1.0, math.nan], [[1.0]], []])
def test_pivots_are_checked(volume: Any) -> None:
    with pytest.raises(BreakageError, match="volume"):
        LAW.table(volume)
