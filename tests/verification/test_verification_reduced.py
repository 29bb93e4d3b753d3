"""Kernels in reduced units."""

from __future__ import annotations

import numpy as np
import pytest

from aggsim.kernels import constant
from aggsim.verification import closed, reduced

V = np.geomspace(0.1, 50.0, 7)


@pytest.mark.parametrize(
    "kernel", [reduced.brownian(), reduced.brownian(1.0 / 1.8), reduced.shear()], ids=lambda k: k.names[0]
)
def test_equal_monomers_collide_at_rate_one(kernel) -> None:
    assert kernel(1.0, 1.0) == pytest.approx(1.0, rel=1e-15)
    rates = kernel(V[:, None], V[None, :])
    np.testing.assert_allclose(rates, rates.T, rtol=1e-14)


def test_equal_sizes_do_not_settle_on_each_other() -> None:
    rates = reduced.settling()(V[:, None], V[None, :])
    assert (np.diag(rates) == 0.0).all()
    assert (rates[~np.eye(V.size, dtype=bool)] > 0.0).all()


def test_every_size_is_resolved() -> None:
    result = reduced.every_size(constant(1.0), [1.0, 4.0], 200)
    for t, number in zip(result.times, result.number, strict=True):
        exact = closed.CONSTANT_MONO.number(result.grid.volume, t)
        np.testing.assert_allclose(number, exact, rtol=1e-8, atol=1e-14)
