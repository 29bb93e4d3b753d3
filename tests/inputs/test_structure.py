from __future__ import annotations

import math
import pickle

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from aggsim.errors import InputError
from aggsim.inputs import Compact, Fractal, Particles, Structure

QUARTZ = Particles(diameter=1e-6, density=2650.0)
COUNT = np.geomspace(1e-3, 1e9, 61)


def test_compact_is_the_sphere() -> None:
    d = np.array([1e-8, 1e-6, 1e-3])
    compact = Compact(QUARTZ)
    np.testing.assert_allclose(compact.collision_diameter(math.pi / 6.0 * d**3), d, rtol=1e-14)
    np.testing.assert_array_equal(compact.effective_density(d, 1000.0), 2650.0)


def test_fractal_of_dimension_three_is_compact_to_the_last_digit() -> None:
    v = QUARTZ.volume * COUNT
    compact, fractal = Compact(QUARTZ), Fractal(QUARTZ, dimension=3.0)
    np.testing.assert_array_equal(fractal.collision_diameter(v), compact.collision_diameter(v))
    np.testing.assert_array_equal(fractal.hydrodynamic_diameter(v), compact.hydrodynamic_diameter(v))
    np.testing.assert_array_equal(fractal.effective_density(v, 998.0), compact.effective_density(v, 998.0))


@pytest.mark.parametrize("dimension", [1.5, 2.1, 3.0])
def test_number_of_particles_is_a_power_of_size(dimension: float) -> None:
    fractal = Fractal(QUARTZ, dimension=dimension)
    d = fractal.collision_diameter(QUARTZ.volume * np.array([1.0, 10.0, 1e6]))
    np.testing.assert_allclose((d / 1e-6) ** dimension, [1.0, 10.0, 1e6], rtol=1e-12)


def test_prefactor_divides_the_number() -> None:
    # (100/1.3)**(1/1.8) = 11.163728
    fractal = Fractal(QUARTZ, dimension=1.8, prefactor=1.3)
    assert fractal.collision_diameter(100.0 * QUARTZ.volume) == pytest.approx(11.163728e-6, rel=1e-7)


@pytest.mark.parametrize("prefactor", [0.5, 1.0, 2.0])
@pytest.mark.parametrize("ratio", [0.5, 1.0, 1.2])
def test_solid_sphere_up_to_one_primary_particle(prefactor: float, ratio: float) -> None:
    fractal = Fractal(QUARTZ, dimension=1.8, prefactor=prefactor, hydrodynamic_ratio=ratio)
    v = QUARTZ.volume * np.array([1e-6, 0.5, 1.0 - 1e-12, 1.0, 1.0 + 1e-12])
    sphere = Compact(QUARTZ).collision_diameter(v)
    np.testing.assert_array_equal(fractal.collision_diameter(v), sphere)
    np.testing.assert_array_equal(fractal.hydrodynamic_diameter(v), sphere)
    np.testing.assert_array_equal(fractal.effective_density(v, 998.0), 2650.0)


@given(
    dimension=st.floats(1.2, 3.0),
    prefactor=st.floats(0.1, 10.0),
    ratio=st.floats(0.1, 3.0),
)
def test_never_denser_than_the_solid_and_growing(dimension: float, prefactor: float, ratio: float) -> None:
    fractal = Fractal(QUARTZ, dimension=dimension, prefactor=prefactor, hydrodynamic_ratio=ratio)
    v = QUARTZ.volume * COUNT
    sphere = Compact(QUARTZ).collision_diameter(v)
    for d in (fractal.collision_diameter(v), fractal.hydrodynamic_diameter(v)):
        assert (d >= sphere).all()
        assert (np.diff(d) > 0.0).all()
    density = fractal.effective_density(v, 998.0)
    assert (density <= 2650.0).all()
    assert (density >= 998.0).all()


def test_hydrodynamic_diameter_is_the_ratio_where_it_exceeds_the_sphere() -> None:
    fractal = Fractal(QUARTZ, dimension=1.8, hydrodynamic_ratio=0.8)
    v = 1000.0 * QUARTZ.volume
    expected = 0.8 * fractal.collision_diameter(v)
    assert fractal.hydrodynamic_diameter(v) == pytest.approx(expected, rel=1e-15)


def test_volume_is_conserved_by_the_effective_density() -> None:
    # mass in medium: (rho_eff - rho) pi d**3/6 = (rho_p - rho) v
    fractal = Fractal(QUARTZ, dimension=2.2, prefactor=0.7)
    v = QUARTZ.volume * COUNT
    outer = math.pi / 6.0 * fractal.collision_diameter(v) ** 3
    weight = (fractal.effective_density(v, 998.0) - 998.0) * outer
    np.testing.assert_allclose(weight, (2650.0 - 998.0) * v, rtol=1e-7)  # 1 - share cancels up to 1e-7


@pytest.mark.parametrize(
    "options",
    [
        {"dimension": 1.0},
        {"dimension": 3.1},
        {"dimension": 2.0, "prefactor": 0.0},
        {"dimension": 2.0, "hydrodynamic_ratio": 5.0},
    ],
)
def test_refusals(options: dict[str, float]) -> None:
    with pytest.raises(InputError, match=list(options)[-1]):
        Fractal(QUARTZ, **options)


@pytest.mark.parametrize("build", [Compact, lambda p: Fractal(p, dimension=2.0)])
def test_needs_particles(build: object) -> None:
    with pytest.raises(InputError, match="Particles"):
        build(1e-6)  # type: ignore[operator]


def test_both_are_structures_and_pickle() -> None:
    for structure in (Compact(QUARTZ), Fractal(QUARTZ, dimension=2.0)):
        assert isinstance(structure, Structure)
        assert pickle.loads(pickle.dumps(structure)) == structure


def test_number_in_number_out() -> None:
    for structure in (Compact(QUARTZ), Fractal(QUARTZ, dimension=2.0)):
        assert isinstance(structure.collision_diameter(1e-18), float)
        assert isinstance(structure.hydrodynamic_diameter(1e-18), float)
        assert isinstance(structure.effective_density(1e-18, 998.0), float)
