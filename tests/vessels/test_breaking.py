from __future__ import annotations

import numpy as np
import pytest

import aggsim as ag
from aggsim.errors import InputError
from aggsim.vessels import Breaking, Site

GRID = ag.SizeGrid.geometric(smallest=1.0, largest=64.0, per_doubling=2)
SITE = Site(ag.FixedPivot(moments=4).prepare(GRID))


def law(coefficient: float = 1.0, smallest: float | None = None) -> ag.Breakage:
    rate = ag.rates.power_law(coefficient=coefficient, exponent=1.0)
    return ag.Breakage(rate=rate, fragments=ag.fragments.uniform_binary(), smallest=smallest)


def matrix_of(vessel: ag.Batch) -> np.ndarray:
    size = GRID.sections + 2
    out = np.zeros((size, size))
    for term in vessel.terms(SITE):
        term.operator.add_jacobian(np.zeros(size), 1.0, out)
    return out


def test_breakage_is_one_term_with_the_strength_of_its_law() -> None:
    (term,) = Breaking(law()).terms(SITE)
    assert term.strength is None
    assert not term.collisions  # breakage is no collision
    pulse = ag.kernels.Strength.steps([1.0], [1.0, 0.0])
    (term,) = Breaking(law() * pulse).terms(SITE)
    assert term.strength == pulse


def test_several_laws_add_up() -> None:
    both = ag.Batch(None, breakage=[law(1.0), law(0.5)])
    assert len(both.processes) == 2
    np.testing.assert_allclose(matrix_of(both), matrix_of(ag.Batch(None, breakage=law(1.5))), rtol=1e-13)


@pytest.mark.parametrize(
    ("breakage", "smallest"),
    [
        (None, None),
        (law(), 0.0),
        (law(smallest=3.0), 3.0),
        ([law(smallest=3.0), law(smallest=2.0)], 2.0),
        ([law(smallest=3.0), law()], 0.0),
    ],
    ids=["none", "without a limit", "with a limit", "two limits", "one limit of two"],
)
def test_a_vessel_knows_its_smallest_pieces(breakage: object, smallest: float | None) -> None:
    assert ag.Batch(ag.kernels.constant(1.0), breakage=breakage).smallest == smallest


@pytest.mark.parametrize(
    "breakage", [0.1, ag.fragments.uniform_binary(), ag.kernels.constant(1.0), [law(), 0.1], "binary"]
)
def test_what_is_no_breakage_law_is_refused(breakage: object) -> None:
    with pytest.raises(InputError, match=r"not a breakage law.*Try: Breakage\("):
        ag.Batch(ag.kernels.constant(1.0), breakage=breakage)


def test_breakage_that_is_switched_on_acts_from_then_on() -> None:
    """M0 = 1 + t for S = v and one particle of volume 1 that breaks in two, from the moment of the jump."""
    late = law() * ag.kernels.Strength.steps([3.0], [0.0, 2.0])
    grid = ag.SizeGrid.geometric(smallest=2.0**-36, largest=1.0, per_doubling=3)
    start = ag.Monodisperse(volume=1.0, number=1.0)
    result = ag.simulate(ag.Batch(None, breakage=late), start, [3.0, 4.0, 6.0], grid=grid, rtol=1e-9)
    np.testing.assert_allclose(result.total_number(), [1.0, 3.0, 7.0], rtol=1e-8)


def test_nothing_collides_without_a_kernel() -> None:
    start = ag.Monodisperse(volume=1.0, number=1.0)
    result = ag.simulate(ag.Batch(None, breakage=law()), start, [0.0, 1.0])
    assert len(result.contributions) == 0
    assert np.abs(result.balance.closure).max() <= 1e-12
