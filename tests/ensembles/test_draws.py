from __future__ import annotations

import numpy as np
import pytest

import aggsim as ag
from aggsim.ensembles.draws import draw_volumes

NARROW = ag.LogNormal(median_diameter=300e-9, gsd=1.05, volume_fraction=1e-5)
WIDE = ag.LogNormal(median_diameter=400e-9, gsd=2.0, number=1e15)
LAWS = {
    "narrow lognormal": NARROW,
    "wide lognormal": WIDE,
    "exponential": ag.Exponential(mean_volume=1.0, number=3.0),
    "gamma": ag.Gamma(mean_volume=1.0, shape=0.3, number=1.0),
    "two laws": NARROW + 0.1 * ag.LogNormal(median_diameter=5e-6, gsd=1.2, volume_fraction=1e-5),
}


@pytest.mark.parametrize("law", LAWS.values(), ids=LAWS.keys())
def test_one_particle_comes_from_each_share_of_the_number(law: ag.StartingDistribution) -> None:
    volume = draw_volumes(law, 500, np.random.default_rng(1))
    rank = law.number_below(volume) / law.total_number * 500
    np.testing.assert_array_equal(np.floor(rank), np.arange(500))
    # and from anywhere in it: uniform within 4 standard errors
    assert abs((rank % 1.0).mean() - 0.5) < 4.0 / np.sqrt(12.0 * 500)


def test_discrete_sizes_keep_their_shares() -> None:
    law = ag.Monodisperse(volume=2.0, number=1.0) + ag.Monodisperse(volume=1.0, number=3.0)
    volume = draw_volumes(law, 400, np.random.default_rng(1))
    assert (np.count_nonzero(volume == 1.0), np.count_nonzero(volume == 2.0)) == (300, 100)


def test_discrete_and_continuous_sizes_together() -> None:
    law = ag.Exponential(mean_volume=1.0, number=3.0) + ag.Monodisperse(volume=1.0, number=1.0)
    volume = draw_volumes(law, 4000, np.random.default_rng(1))
    atoms = volume == 1.0
    assert np.count_nonzero(atoms) == 1000
    rank = -np.expm1(-volume[~atoms]) * 3000
    np.testing.assert_array_equal(np.floor(rank), np.arange(3000))


def test_a_law_with_edges() -> None:
    box = ag.Box(smallest_diameter=1e-6, largest_diameter=2e-6, number=1e12)
    volume = draw_volumes(box, 100, np.random.default_rng(1))
    np.testing.assert_array_equal(np.floor(box.number_below(volume) / 1e10), np.arange(100))


def test_means_are_those_of_the_law() -> None:
    law = ag.LogNormal(median_diameter=400e-9, gsd=1.5, number=1e15)
    volume = np.array([draw_volumes(law, 1000, np.random.default_rng(k)).mean() for k in range(200)])
    exact = law.total_volume / law.total_number
    error = volume.std(ddof=1) / np.sqrt(200)
    assert abs(volume.mean() - exact) < 4.0 * error
    assert error < 0.002 * exact
