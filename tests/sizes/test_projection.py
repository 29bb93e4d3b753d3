from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

import aggsim as ag
from aggsim.errors import GridError
from aggsim.sizes import project

LAWS = {
    "exponential": ag.Exponential(mean_volume=1.0, number=1.0),
    "gamma": ag.Gamma(mean_volume=1.0, shape=4.0, number=1.0),
    "lognormal": ag.LogNormal(median_diameter=1e-6, gsd=1.4, number=1e14),
    "narrow": ag.LogNormal(median_diameter=1e-6, gsd=1.03, number=1e14),
    "box": ag.Box(smallest_diameter=0.5e-6, largest_diameter=2e-6, number=1e14),
    "two peaks": ag.LogNormal(median_diameter=0.5e-6, gsd=1.2, number=1e14)
    + ag.LogNormal(median_diameter=5e-6, gsd=1.2, number=1e11),
    "peak and size": ag.LogNormal(median_diameter=0.5e-6, gsd=1.2, number=1e14)
    + ag.Monodisperse(diameter=3e-6, number=1e12),
}


def covering(law: ag.StartingDistribution, per_doubling: float) -> ag.SizeGrid:
    smallest, largest = law.limits(1e-10)
    smallest = max(smallest, law.limits(1e-3)[0] * 1e-2)
    return ag.SizeGrid.geometric(smallest=smallest, largest=largest * 8, per_doubling=per_doubling)


@pytest.mark.parametrize("moments", [2, 4, 6])
@pytest.mark.parametrize("name", LAWS)
def test_number_and_volume_are_exact_and_nothing_is_negative(name: str, moments: int) -> None:
    law = LAWS[name]
    grid = covering(law, 3)
    number = project(law, grid, moments)
    assert (number >= 0).all()
    assert number.sum() == pytest.approx(law.total_number, rel=1e-13)
    assert number @ grid.volume == pytest.approx(law.total_volume, rel=1e-13)


@pytest.mark.parametrize("moments", [4, 6])
@pytest.mark.parametrize("name", ["exponential", "gamma", "lognormal", "box"])
def test_higher_moments_are_those_of_the_law(name: str, moments: int) -> None:
    law = LAWS[name]
    grid = covering(law, 3)
    number = project(law, grid, moments)
    for k in range(2, moments):
        # what lies below the first pivot, and in the tail above a share of 1e-10 of the volume
        tolerance = 1e-5 if name == "exponential" or k > 3 else 1e-6
        assert number @ grid.volume**k == pytest.approx(law.moment(k), rel=tolerance)


def test_smooth_laws_give_the_density_at_the_pivots() -> None:
    law = LAWS["gamma"]
    errors = []
    for per_doubling in (3, 6):
        grid = covering(law, per_doubling)
        density = project(law, grid, 4) / grid.width
        exact = law.density(grid.volume)
        errors.append(np.abs(density - exact).max() / exact.max())
    assert errors[1] < 3e-4
    assert errors[0] / errors[1] > 2**3.5  # fourth order


def test_a_size_on_a_pivot_stays_there_and_one_between_is_shared_by_two() -> None:
    grid = ag.SizeGrid.from_pivots([1.0, 2.0, 4.0, 8.0])
    on = project(ag.Monodisperse(volume=4.0, number=3.0), grid, 4)
    np.testing.assert_array_equal(on, [0, 0, 3, 0])
    between = project(ag.Monodisperse(volume=3.0, number=1.0), grid, 4)
    np.testing.assert_allclose(between, [0, 0.5, 0.5, 0], atol=1e-15)


def test_the_few_particles_below_the_first_pivot_are_kept() -> None:
    law = ag.Exponential(mean_volume=1.0, number=1.0)
    grid = ag.SizeGrid.geometric(smallest=5e-3, largest=100.0, per_doubling=4)
    number = project(law, grid, 6)
    assert number.sum() == pytest.approx(1.0, rel=1e-13)
    assert number @ grid.volume == pytest.approx(1.0, rel=1e-13)
    assert (number >= 0).all()


@pytest.mark.parametrize(("smallest", "largest"), [(0.1, 100.0), (1e-3, 5.0)])
def test_a_grid_that_misses_the_start_is_refused(smallest: float, largest: float) -> None:
    grid = ag.SizeGrid.geometric(smallest=smallest, largest=largest)
    with pytest.raises(GridError, match="misses"):
        project(ag.Exponential(mean_volume=1.0, number=1.0), grid)


@given(st.floats(1.02, 3.0), st.floats(1.5, 8.0), st.sampled_from([2, 4, 6]), st.floats(-9, 3))
def test_conservation_over_random_laws_and_grids(
    gsd: float, per_doubling: float, moments: int, size: float
) -> None:
    law = ag.LogNormal(median_diameter=1e-6 * 10 ** (size / 3), gsd=gsd, number=1e12)
    grid = covering(law, per_doubling)
    number = project(law, grid, moments)
    assert (number >= 0).all()
    assert number.sum() == pytest.approx(law.total_number, rel=1e-12)
    assert number @ grid.volume == pytest.approx(law.total_volume, rel=1e-12)
