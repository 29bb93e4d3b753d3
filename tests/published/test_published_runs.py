"""Whole runs against figures of the trade: rapid coagulation, decay under shear, what light scattering sees."""

from __future__ import annotations

import math

import numpy as np
import pytest

import aggsim as ag
from aggsim.verification.published.breakage import PLUG_FLOW
from aggsim.verification.published.physics import DECAY
from aggsim.verification.published.unsolved import BROWNIAN_MOMENTS

WATER = ag.Medium.water(temperature=293.15)


def compact(diameter: float) -> ag.Compact:
    return ag.Compact(ag.Particles(diameter=diameter, density=1055.0))


def test_half_life_of_rapid_coagulation() -> None:
    """The formula takes the kernel of equal spheres for every pair. In a run the kernel of unequal ones adds a
    little as sizes spread: 1 % by the first half-life."""
    diameter, half_life = 400e-9, DECAY[293.15, 1.00160e-3][1]
    start = ag.Monodisperse(diameter=diameter, number=1e16)
    times = np.linspace(0.0, 40.0, 81)
    result = ag.simulate(ag.Batch(ag.kernels.brownian(compact(diameter), WATER)), start, times)
    assert 0.98 < result.number_half_life() / half_life < 1.0
    at_half = np.interp(half_life, times, result.total_number()) / 1e16
    (expected,) = BROWNIAN_MOMENTS[BROWNIAN_MOMENTS[:, 0] == 2.0, 1]
    assert at_half == pytest.approx(expected, rel=2e-4)  # interpolated between outputs


@pytest.mark.parametrize("diameter", [10e-9, 1e-6, 10e-6])
def test_rapid_rate_does_not_depend_on_the_size_of_equal_spheres(diameter: float) -> None:
    """Common practice, after Smoluchowski (1917)."""
    v = math.pi / 6 * diameter**3
    reference = float(ag.kernels.brownian(compact(1e-6), WATER)(1e-18, 1e-18))
    assert float(ag.kernels.brownian(compact(diameter), WATER)(v, v)) == pytest.approx(reference, rel=1e-12)


def test_decay_under_shear() -> None:
    """N/N0 = exp(-4 alpha G phi t / pi) for equal spheres at constant volume.

    Follows from Smoluchowski's (1917) kernel (4/3) G d**3 with phi = pi d**3 N / 6. It holds while sizes are
    equal; as they spread decay is slower, since ((d1 + d2) / 2)**3 is below the mean of d1**3 and d2**3.
    """
    efficiency, gradient, fraction, time = 0.1, 50.0, 5e-5, 1200.0
    law = math.exp(-4 * efficiency * gradient * fraction * time / math.pi)
    assert law == pytest.approx(PLUG_FLOW, rel=1e-7)
    kernel = efficiency * ag.kernels.shear(compact(2e-6), ag.Flow(shear_rate=gradient))
    start = ag.Monodisperse(diameter=2e-6, volume_fraction=fraction)
    result = ag.simulate(ag.Batch(kernel), start, [0.0, 1e-3 * time, time], rtol=1e-9)
    left = result.total_number() / result.total_number()[0]
    assert math.log(left[1]) == pytest.approx(1e-3 * math.log(law), rel=1e-3)
    assert law < left[2] < 1.02 * law


def test_turbidity_of_small_coalescing_spheres_follows_the_second_moment() -> None:
    """Rayleigh limit: turbidity / initial turbidity = M2 / M2(0) = 1 + beta N0 t under a constant kernel."""
    times = np.array([0.0, 3.0, 10.0])
    start = ag.Monodisperse(volume=1.0, number=1.0)
    result = ag.simulate(ag.Batch(ag.kernels.constant(1.0)), start, times)
    np.testing.assert_allclose(result.moment(2) / result.moment(2)[0], 1 + times, rtol=1e-10)


def test_polydispersity_index_of_a_lognormal() -> None:
    """Cumulant index of Rayleigh scatterers, <D**2> / <D>**2 - 1 with weights d**6 and D ~ 1/d.

    exp(ln**2 sg) - 1 = 0.247203 for sg = 1.6 (Hatch and Choate 1929, moments of the lognormal law).
    """
    law = ag.LogNormal(median_diameter=1e-6, gsd=1.6, number=1e12)
    m4, m5, m6 = (law.moment(k / 3) for k in (4, 5, 6))
    assert m4 * m6 / m5**2 - 1 == pytest.approx(0.247203, rel=2e-6)
