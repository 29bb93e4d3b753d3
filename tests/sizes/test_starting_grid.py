from __future__ import annotations

import numpy as np
import pytest

import aggsim as ag
from aggsim.sizes import project, starting_grid

V0 = np.pi / 6 * (400e-9) ** 3


def test_one_size_gets_multiples_of_itself_first() -> None:
    grid = starting_grid(ag.Monodisperse(diameter=400e-9, volume_fraction=1e-5))
    np.testing.assert_allclose(grid.volume[:4] / V0, [1, 2, 3, 4], rtol=1e-12)
    assert grid.ratio == pytest.approx(2 ** (1 / 3))


def test_geometric_on_request() -> None:
    grid = starting_grid(ag.Monodisperse(volume=1.0, number=1.0), per_doubling=2, geometric=True)
    assert grid.is_geometric
    assert grid.volume[0] == 1.0


def test_other_sizes_become_pivots() -> None:
    mixture = ag.Monodisperse(volume=1.0, number=1.0) + ag.Monodisperse(volume=6.1, number=0.1)
    grid = starting_grid(mixture)
    assert np.abs(grid.volume / 6.1 - 1).min() < 1e-12
    assert (np.diff(grid.volume) > 0).all()
    mixed = ag.LogNormal(median_diameter=1e-6, gsd=1.5, number=1.0) + ag.Monodisperse(
        diameter=2e-6, number=0.1
    )
    assert np.abs(starting_grid(mixed).diameter / 2e-6 - 1).min() < 1e-12


def test_narrow_starts_get_a_finer_grid() -> None:
    wide = starting_grid(ag.LogNormal(median_diameter=1e-6, gsd=1.6, number=1.0))
    narrow = starting_grid(ag.LogNormal(median_diameter=1e-6, gsd=1.05, number=1.0))
    assert narrow.volume[1] / narrow.volume[0] < wide.volume[1] / wide.volume[0]


@pytest.mark.parametrize(
    "law",
    [
        ag.Exponential(mean_volume=1.0, number=1.0),
        ag.LogNormal(median_diameter=1e-6, gsd=2.5, number=1.0),
        ag.Box(smallest_diameter=1e-6, largest_diameter=4e-6, number=1.0),
    ],
)
def test_the_grid_holds_the_start(law: ag.StartingDistribution) -> None:
    grid = starting_grid(law)
    assert project(law, grid, 6).sum() == pytest.approx(law.total_number, rel=1e-12)
