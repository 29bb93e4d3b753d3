from __future__ import annotations

import math

import numpy as np
import pytest
from scipy import constants

import aggsim.kernels as kernels
from aggsim.inputs import Compact, Fractal, Medium, Particles

WATER = Medium.water(293.15)
AIR = Medium.air(298.15)
GRAINS = Particles(diameter=10e-9, density=1000.0)


def volume(diameter: float) -> float:
    return math.pi / 6.0 * diameter**3


def test_equal_pairs_have_one_rate_whatever_their_size() -> None:
    expected = 8.0 * constants.k * 293.15 / (3.0 * WATER.viscosity)
    v = volume(1e-6) * np.geomspace(1e-6, 1e6, 13)
    for structure in (Compact(GRAINS), Fractal(GRAINS, dimension=1.8)):
        np.testing.assert_allclose(kernels.brownian(structure, WATER)(v, v), expected, rtol=1e-13)


def test_compact_is_fractal_of_dimension_three() -> None:
    v = GRAINS.volume * np.geomspace(0.1, 1e6, 20)
    compact = kernels.brownian(Compact(GRAINS), WATER).part_matrices(v)[0].matrix
    fractal = kernels.brownian(Fractal(GRAINS, dimension=3.0), WATER).part_matrices(v)[0].matrix
    np.testing.assert_array_equal(compact, fractal)


def test_loose_flocs_reach_further() -> None:
    # (d_i + d_j)(1/d_i + 1/d_j) with d ~ N**(1/D): the smaller D, the larger the ratio of diameters
    one, many = GRAINS.volume, 1000.0 * GRAINS.volume
    ratio = 1000.0 ** (1.0 / 1.8)
    rate = kernels.brownian(Fractal(GRAINS, dimension=1.8), WATER)(one, many)
    factor = 2.0 * WATER.thermal_energy / (3.0 * WATER.viscosity)
    assert rate == pytest.approx(factor * (1.0 + ratio) * (1.0 + 1.0 / ratio), rel=1e-13)
    assert rate > kernels.brownian(Compact(GRAINS), WATER)(one, many)


def test_smaller_drag_speeds_collisions_up() -> None:
    flocs = Fractal(GRAINS, dimension=1.8, hydrodynamic_ratio=0.8)
    v = 1e4 * GRAINS.volume
    expected = 8.0 * WATER.thermal_energy / (3.0 * WATER.viscosity) / 0.8
    assert kernels.brownian(flocs, WATER)(v, v) == pytest.approx(expected, rel=1e-13)


def test_gas_tends_to_the_continuum_for_large_particles() -> None:
    d, e = 1e-3, 2e-3
    rate = kernels.brownian_in_gas(Compact(GRAINS), AIR)(volume(d), volume(e))
    limit = kernels.brownian(Compact(GRAINS), AIR)(volume(d), volume(e))
    assert rate == pytest.approx(limit, rel=3e-4)  # slip leaves 1.257*2*66 nm/1 mm = 1.7e-4


def test_gas_tends_to_free_molecules_for_small_particles() -> None:
    # pi/4 (d_i + d_j)**2 sqrt(8 kT/(pi m_i) + 8 kT/(pi m_j)), Kn about 1e5 at 1 Pa
    thin = Medium.air(298.15, pressure=1.0)
    d, e = 10e-9, 30e-9
    masses = [1000.0 * volume(size) for size in (d, e)]
    speed = math.sqrt(sum(8.0 * constants.k * 298.15 / (math.pi * mass) for mass in masses))
    limit = math.pi / 4.0 * (d + e) ** 2 * speed
    rate = kernels.brownian_in_gas(Compact(GRAINS), thin)(volume(d), volume(e))
    assert rate == pytest.approx(limit, rel=1e-3)
    assert rate < limit


@pytest.mark.parametrize("sizes", [(2e-9, 2e-9), (1e-8, 1e-8), (1e-7, 1e-7), (1e-6, 1e-6), (1e-8, 1e-6)])
def test_gas_agrees_with_the_flux_matching_of_fuchs(sizes: tuple[float, float]) -> None:
    # N. A. Fuchs (1964), The Mechanics of Aerosols, Pergamon, sect. 49: another theory of the transition,
    # with the same two limits; between them the two differ by up to 4 %
    speeds, diffusivities, gaps = [], [], []
    for d in sizes:
        speed = math.sqrt(8.0 * AIR.thermal_energy / (math.pi * 1000.0 * volume(d)))
        mobility = kernels.slip_correction(d, AIR) / (3.0 * math.pi * AIR.viscosity * d)
        path = 8.0 * AIR.thermal_energy * mobility / (math.pi * speed)
        gaps.append(((d + path) ** 3 - (d**2 + path**2) ** 1.5) / (3.0 * d * path) - d)
        speeds.append(speed)
        diffusivities.append(AIR.thermal_energy * mobility)
    reach, both = sum(sizes), sum(diffusivities)
    fuchs = (
        2.0
        * math.pi
        * both
        * reach
        / (reach / (reach + 2.0 * math.hypot(*gaps)) + 8.0 * both / (math.hypot(*speeds) * reach))
    )
    rate = kernels.brownian_in_gas(Compact(GRAINS), AIR)(volume(sizes[0]), volume(sizes[1]))
    assert rate == pytest.approx(fuchs, rel=0.04)
