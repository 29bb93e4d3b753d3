from __future__ import annotations

import numpy as np
import pytest

import aggsim as ag
from aggsim.ensembles.bounds import Bounds
from aggsim.ensembles.mechanisms import Interval, Mechanism, collision_mechanisms

WATER = ag.Medium.water(temperature=298.15)
LATEX = ag.Particles(diameter=400e-9, density=1055.0)
FLOCS = ag.Fractal(LATEX, dimension=2.1)
MIXING = ag.Flow(shear_rate=50.0)
KERNELS = {
    "constant": ag.kernels.constant(1e-17),
    "product": ag.kernels.multiplicative(1e20),
    "Brownian": ag.kernels.brownian(FLOCS, WATER),
    "shear": ag.kernels.shear(FLOCS, MIXING),
    "settling": ag.kernels.settling(FLOCS, WATER),
}


def classes(volume: np.ndarray, bounds: Bounds) -> np.ndarray:
    return np.floor(2.0 * np.log2(volume / bounds.smallest)).astype(int) - bounds.lowest


@pytest.mark.parametrize("kernel", KERNELS.values(), ids=KERNELS.keys())
def test_no_rate_is_above_its_bound_and_few_are_far_below(kernel: ag.kernels.Kernel) -> None:
    bounds = Bounds(collision_mechanisms(kernel), [], LATEX.volume)
    bounds.cover(0, 20)
    bounds.use(Interval(0.0, 1.0))
    one, two = LATEX.volume * np.exp(np.random.default_rng(1).uniform(0.0, 6.0, (2, 20_000)))
    rate = kernel(one, two)
    bound = bounds.limits.pairs[classes(one, bounds), classes(two, bounds)]
    assert (rate <= bound).all()
    assert (rate / bound).mean() > 0.5


def test_bounds_grow_with_the_particles_and_keep_what_they_learned() -> None:
    bounds = Bounds(collision_mechanisms(ag.kernels.additive(1.0)), [Mechanism(lambda v: v)], 1.0)
    bounds.cover(0, 3)
    bounds.use(Interval(0.0, 1.0))
    bounds.exceed(1.5, 2.5, 0, 100.0)
    bounds.exceed(1.5, 1.5, 0, 50.0)
    bounds.exceed(1.5, 0.0, -1, 30.0)
    bounds.exceed(1.5, 0.0, -1, 20.0)  # already inside
    assert bounds.exceeded == 4
    for low, high in ((0, 3), (-5, 40)):
        bounds.cover(low, high)
        assert bounds.lowest <= low
        assert bounds.lowest + bounds.size > high
        a, b = classes(np.array([1.5, 2.5]), bounds)
        assert bounds.limits.pairs[a, b] == bounds.limits.pairs[b, a] == pytest.approx(110.0)
        assert bounds.limits.pairs[a, a] == pytest.approx(55.0)
        assert bounds.limits.single[0, a] == pytest.approx(33.0)
        assert bounds.limits.lowest == bounds.lowest


def test_strengths_scale_the_bounds_of_an_interval() -> None:
    step = ag.kernels.Strength.steps([2.0], [1.0, 3.0])
    bounds = Bounds(collision_mechanisms(ag.kernels.constant(1.0) * step), [], 1.0)
    bounds.cover(0, 1)
    for interval, expected in ((Interval(0.0, 2.0), 1.1), (Interval(2.0, 3.0), 3.3)):
        bounds.use(interval)
        np.testing.assert_allclose(bounds.limits.pairs, expected)


def test_a_kernel_that_is_not_symmetric_is_refused() -> None:
    kernel = ag.kernels.from_function(lambda v, w: v + 0.0 * w)
    with pytest.raises(ag.errors.KernelError, match="one way"):
        Bounds(collision_mechanisms(kernel), [], 1.0).cover(0, 2)
