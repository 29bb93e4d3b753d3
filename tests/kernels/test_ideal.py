from __future__ import annotations

import numpy as np
import pytest

import aggsim.kernels as kernels
from aggsim.errors import KernelError


def test_the_three_laws() -> None:
    v, w = np.array([1.0, 2.0, 5.0]), np.array([3.0, 0.5, 5.0])
    np.testing.assert_array_equal(kernels.constant(2.0)(v, w), [2.0, 2.0, 2.0])
    np.testing.assert_array_equal(kernels.additive(2.0)(v, w), [8.0, 5.0, 20.0])
    np.testing.assert_array_equal(kernels.multiplicative(2.0)(v, w), [6.0, 2.0, 50.0])


def test_constant_takes_the_shape_of_the_pairs() -> None:
    assert kernels.constant(1.0)(np.ones((3, 1)), np.ones(4)).shape == (3, 4)


@pytest.mark.parametrize("law", [kernels.constant, kernels.additive, kernels.multiplicative])
@pytest.mark.parametrize("rate", [-1.0, np.nan, "fast"])
def test_the_rate_is_checked(law: object, rate: object) -> None:
    with pytest.raises(KernelError, match="rate"):
        law(rate)  # type: ignore[operator]
    assert law(0.0)(1.0, 1.0) == 0.0  # type: ignore[operator]
