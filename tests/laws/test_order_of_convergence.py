"""The observed order of every scheme in moments and quantiles, on smooth kernels and on one with a kink.

Problems, schemes, refinements and what is asked for stand in the verification record. `pytest -s` prints the table.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import pytest
from reference_runs import settling

import aggsim as ag
from aggsim.verification import closed, orders

Array = np.ndarray

SECOND, FOURTH, SIXTH = ag.FixedPivot(moments=2), ag.FixedPivot(moments=4), ag.FixedPivot(moments=6)


@pytest.mark.parametrize("problem", orders.PROBLEMS, ids=lambda p: p.name)
def test_orders(problem: orders.Problem) -> None:
    rows = [row for scheme in problem.schemes for row in problem.rows(scheme)]
    for row in rows:
        errors = " ".join(f"{e:9.2e}" for e in row.errors)
        print(f"{row.problem}, {row.quantity:14s} {row.scheme!r:22s} order {row.order:5.2f}  errors {errors}")
        # linear sharing has an error of h^2, no more and no less
        if row.scheme in (orders.LINEAR, orders.SECTIONAL):
            assert 1.7 <= row.order <= 2.3
    assert [check for check in orders.checks(rows) if not check.passed] == []


@pytest.mark.parametrize(("kernel", "time"), [("constant", 20.0), ("sum", 1.0)])
@pytest.mark.parametrize("scheme", [FOURTH, SIXTH], ids=repr)
def test_closed_second_moments_are_exact(kernel: str, time: float, scheme: ag.schemes.Scheme) -> None:
    """From 4 moments on; what is left is the tail that is lost while sections are taken into use."""
    exact = (closed.CONSTANT_EXP if kernel == "constant" else closed.SUM_EXP).moments(time)[2]
    problem = next(p for p in orders.PROBLEMS if p.name == f"{kernel} kernel")
    for per_doubling in orders.REFINEMENTS[scheme]:
        assert problem.run(scheme, per_doubling).moment(2)[0] == pytest.approx(exact, rel=1e-7)


def order(errors: Array, refinements: Sequence[float]) -> float:
    slope, _ = np.polyfit(np.log(refinements), np.log(np.abs(errors)), 1)
    return float(-slope)


def test_a_kink_in_the_kernel_brings_every_scheme_down_to_second_order() -> None:
    """Differential settling is zero at equal sizes like |v - w|: pairs within one section see a kernel that no
    polynomial through pivots follows, an error of h^2 whatever the number of moments. Reference: Richardson's
    extrapolation of 12 and 24 sections per doubling at that order."""
    start, time = ag.Gamma(mean_volume=1.0, shape=2.0, number=1.0), 0.3

    def measures(scheme: ag.schemes.Scheme, q: int) -> Array:
        grid = ag.SizeGrid.geometric(smallest=1e-6, largest=4000.0, per_doubling=q)
        result = ag.simulate(ag.Batch(settling()), start, time, grid=grid, scheme=scheme, rtol=1e-11)
        return np.array([result.moment(0)[0], result.moment(2)[0]])

    coarse, fine = measures(SIXTH, 12), measures(SIXTH, 24)
    exact = fine + (fine - coarse) / 3.0
    refinements = (3, 4, 6, 8)
    size = {}
    for scheme in (SECOND, FOURTH, SIXTH):
        errors = np.array([measures(scheme, q) for q in refinements]) / exact - 1.0
        for k, title in enumerate(("M0", "M2")):
            p = order(errors[:, k], refinements)
            print(f"settling, {title} {scheme!r} order {p:5.2f}")
            assert 1.5 <= p <= 3.0
        size[scheme] = np.abs(errors[0])
    # the order falls, the error still does not exceed that of linear sharing, and M2 gains by far
    assert size[FOURTH][0] < size[SECOND][0]
    assert size[FOURTH][1] < 0.1 * size[SECOND][1]
