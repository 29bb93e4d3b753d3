from __future__ import annotations

import numpy as np
import pytest

from aggsim.inputs import Medium
from aggsim.kernels import slip_correction


def test_no_slip_in_a_liquid() -> None:
    np.testing.assert_array_equal(slip_correction(np.array([1e-9, 1e-6]), Medium.water()), [1.0, 1.0])


def test_limits() -> None:
    air = Medium.air(293.15)
    assert air.mean_free_path is not None
    # large spheres: 1 + 2.514 lambda/d; small ones: (1.257 + 0.4) 2 lambda/d
    assert slip_correction(1e-3, air) - 1.0 == pytest.approx(2.514e3 * air.mean_free_path, rel=1e-10)
    assert slip_correction(1e-12, air) == pytest.approx(3.314e12 * air.mean_free_path, rel=1e-4)
