from __future__ import annotations

import numpy as np

import aggsim as ag
from aggsim.schemes import FixedPivot
from aggsim.vessels import Aggregation, Site

GRID = ag.SizeGrid.geometric(smallest=1.0, largest=100.0, per_doubling=2)


def test_parts_that_share_a_factor_in_time_share_an_operator() -> None:
    pulse = ag.kernels.Strength.steps([1.0], [1.0, 2.0])
    kernel = ag.kernels.constant(1.0) * pulse + ag.kernels.additive(1.0) * pulse + ag.kernels.constant(0.5)
    terms = Aggregation(kernel).terms(Site(FixedPivot(2).prepare(GRID)))
    assert [term.strength is None for term in terms] == [False, True]
    assert [list(term.collisions) for term in terms] == [["constant", "additive"], ["constant 2"]]


def test_terms_of_a_sum_are_the_sum_of_the_terms() -> None:
    a, b = ag.kernels.constant(1.0), ag.kernels.additive(0.3)
    number = np.concatenate([np.linspace(2.0, 0.1, len(GRID)), [0.0, 0.0]])
    prepared = FixedPivot(4).prepare(GRID)

    def rates(kernel: ag.kernels.Kernel) -> np.ndarray:
        out = np.zeros(len(GRID) + 2)
        for term in Aggregation(kernel).terms(Site(prepared)):
            term.operator.add_rates(number, 1.0, out)
        return out

    total = rates(a + b)
    np.testing.assert_allclose(total, rates(a) + rates(b), rtol=1e-12, atol=1e-12 * np.abs(total).max())
