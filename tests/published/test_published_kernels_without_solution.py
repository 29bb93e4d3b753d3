"""Kernels without a closed solution: tables of a direct solution of the discrete equation, monodisperse start.

The tables and their source stand in the verification record, which compares them at one resolution.
"""

from __future__ import annotations

import numpy as np
import pytest
from reference_runs import MONODISPERSE

import aggsim as ag
from aggsim.verification.published import unsolved
from aggsim.verification.published.unsolved import BROWNIAN, KMERS, MOMENT_ORDERS

# largest relative errors over all times from t = 0.5 on: M0, M2, M3, M(1/3), geometric standard deviation;
# of order (ln 2 / per_doubling)^6, largest early, when neighbouring sizes differ most
GRID_LIMITED = {3: [2e-5, 5e-6, 1.5e-5, 2e-5, 5e-5], 8: [1e-7, 2e-8, 6e-8, 1e-7, 2.5e-7]}


@pytest.mark.parametrize("per_doubling", list(GRID_LIMITED))
def test_brownian_kernel_on_sections(per_doubling: int) -> None:
    grid = ag.SizeGrid.monomers_then_geometric(1.0, 2e4, per_doubling=per_doubling)
    scheme = ag.FixedPivot(moments=6)
    vessel = ag.Batch(BROWNIAN.kernel())
    result = ag.simulate(vessel, MONODISPERSE, BROWNIAN.times, grid=grid, scheme=scheme, rtol=1e-10)
    tolerance = np.array(GRID_LIMITED[per_doubling]) + unsolved.STATED
    got = [result.moment(k) for k in MOMENT_ORDERS] + [result.geometric_standard_deviation(0)]
    for value, expected, limit in zip(got, BROWNIAN.moments.T[1:], tolerance, strict=True):
        np.testing.assert_allclose(value, expected, rtol=limit)
    # sizes that are pivots, as long as the stencil of a birth beside the first gap does not reach them
    if per_doubling == 8:  # 1 to 12 are pivots
        np.testing.assert_allclose(result.number[:, KMERS[:4] - 1], BROWNIAN.numbers[:, 1:5], rtol=2e-7)
