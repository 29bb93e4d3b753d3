from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from aggsim import kernels
from aggsim.errors import InputError
from aggsim.inputs import Compact, Flow, Fractal, Medium, Particles

GRAINS = Particles(diameter=2e-6, density=2650.0, hamaker=1e-20)
WATER = Medium(temperature=293.15, viscosity=1e-3, density=998.0)
FLOCS = Fractal(GRAINS, dimension=2.0)


def test_the_law_for_equal_spheres() -> None:
    alpha = kernels.shear_efficiency(Compact(GRAINS), WATER, Flow(shear_rate=50.0))
    number = 1e-20 / (36.0 * math.pi * 1e-3 * 50.0 * (1e-6) ** 3)
    v = GRAINS.volume
    assert alpha.attraction_number(v, v) == pytest.approx(number, rel=1e-12)
    assert alpha(v, v) == pytest.approx(0.8 * number**0.18, rel=1e-12)


def test_it_uses_collision_diameters() -> None:
    alpha = kernels.shear_efficiency(FLOCS, WATER, Flow(shear_rate=50.0))
    v = GRAINS.volume
    # 16 grains at dimension 2 are 4 diameters wide
    assert alpha(16.0 * v, 16.0 * v) == pytest.approx(alpha(v, v) * 4.0 ** (-3.0 * 0.18), rel=1e-12)


def test_coefficients_can_be_ones_own() -> None:
    alpha = kernels.shear_efficiency(FLOCS, WATER, Flow(shear_rate=50.0), coefficient=0.3, exponent=0.0)
    assert alpha(GRAINS.volume, 5.0 * GRAINS.volume) == 0.3


def test_at_rest_everything_sticks() -> None:
    alpha = kernels.shear_efficiency(FLOCS, WATER, Flow(shear_rate=0.0))
    assert (alpha(GRAINS.volume * np.ones((3, 1)), GRAINS.volume * np.ones(2)) == np.ones((3, 2))).all()


@given(st.floats(1e-3, 1e6), st.floats(1e-2, 1e8), st.floats(1e-2, 1e8))
def test_it_is_a_share_and_symmetric(rate: float, one: float, other: float) -> None:
    alpha = kernels.shear_efficiency(FLOCS, WATER, Flow(shear_rate=rate))
    v, w = one * GRAINS.volume, other * GRAINS.volume
    assert 0.0 < alpha(v, w) <= 1.0
    assert alpha(v, w) == alpha(w, v)
    # more shear or larger aggregates: attraction has less time to act
    assert kernels.shear_efficiency(FLOCS, WATER, Flow(shear_rate=2.0 * rate))(v, w) <= alpha(v, w)
    assert alpha(2.0 * v, w) <= alpha(v, w)


def test_a_kernel_is_multiplied() -> None:
    flow = Flow(shear_rate=50.0)
    kernel = kernels.shear(FLOCS, flow)
    alpha = kernels.shear_efficiency(FLOCS, WATER, flow)
    v = GRAINS.volume * np.geomspace(1.0, 1e4, 7)
    slow = (kernel * alpha).part_matrices(v)[0].matrix
    np.testing.assert_allclose(slow, kernel(v[:, None], v) * alpha(v[:, None], v), rtol=1e-13)


def test_refusals() -> None:
    flow = Flow(shear_rate=50.0)
    with pytest.raises(InputError, match="hamaker"):
        kernels.shear_efficiency(Compact(Particles(diameter=1e-6, density=2650.0)), WATER, flow)
    with pytest.raises(InputError, match="structure"):
        kernels.shear_efficiency(GRAINS, WATER, flow)  # type: ignore[arg-type]
    with pytest.raises(InputError, match="medium"):
        kernels.shear_efficiency(FLOCS, flow, WATER)  # type: ignore[arg-type]
    with pytest.raises(InputError, match="exponent"):
        kernels.shear_efficiency(FLOCS, WATER, flow, exponent=-0.18)
