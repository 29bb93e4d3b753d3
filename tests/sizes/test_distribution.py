"""What all starting distributions share: ways to state an amount, and nodes for integration."""

from __future__ import annotations

import math

import numpy as np
import pytest

from aggsim.errors import InputError
from aggsim.sizes import Box, Exponential, Gamma, LogNormal, Measured, Monodisperse
from aggsim.sizes.distribution import nodes


@pytest.mark.parametrize(
    "law",
    [
        lambda **amount: Monodisperse(diameter=400e-9, **amount),
        lambda **amount: LogNormal(median_diameter=400e-9, gsd=1.4, median_of=3, **amount),
        lambda **amount: Exponential(mean_diameter=400e-9, **amount),
        lambda **amount: Gamma(mean_diameter=400e-9, shape=3.0, **amount),
        lambda **amount: Box(smallest_diameter=1e-7, largest_diameter=4e-7, **amount),
        lambda **amount: Measured.from_classes(
            [1e-7, 2e-7, 3e-7, 5e-7], [0.3, 0.5, 0.2], kind="number", **amount
        ),
    ],
)
def test_every_law_takes_every_way_to_state_the_amount(law):
    assert law(volume_fraction=2e-4).total_volume == pytest.approx(2e-4, rel=1e-14)
    assert law(number=3e12).total_number == pytest.approx(3e12, rel=1e-14)
    # 50 mg/L of polystyrene
    assert law(mass_concentration=0.05, density=1055.0).total_volume == pytest.approx(
        0.05 / 1055.0, rel=1e-14
    )
    with pytest.raises(InputError, match=r"nothing.*exactly one of number"):
        law()
    with pytest.raises(InputError, match=r"number=1\.0 and volume_fraction=0\.1"):
        law(number=1.0, volume_fraction=0.1)
    with pytest.raises(InputError, match="density=None"):
        law(mass_concentration=0.05)
    with pytest.raises(InputError, match="together with mass_concentration"):
        law(volume_fraction=0.01, density=1055.0)
    with pytest.raises(InputError, match=r"1055\.0 for 1\.055 g/cm3"):
        law(mass_concentration=0.05, density=1.055)
    with pytest.raises(InputError, match="1 mg/L is 1e-3"):
        law(mass_concentration=5000.0, density=1055.0)
    for phi in (0.0, -1e-3, 0.75, 50.0, math.nan):
        with pytest.raises(InputError, match="volume_fraction"):
            law(volume_fraction=phi)
    with pytest.raises(InputError, match="1 per mL is 1e6 per m3"):
        law(number=1e23)
    with pytest.raises(InputError, match="number"):
        law(number=0.0)


def test_sizes_given_as_plain_volumes_are_not_judged():
    assert Exponential(mean_volume=1.0, number=1.0).total_volume == 1.0
    assert Monodisperse(volume=1.0, number=1e6).total_volume == 1e6
    assert Gamma(mean_volume=1.0, shape=2.0, number=1e3).total_number == pytest.approx(1e3, rel=1e-15)


@pytest.mark.parametrize("log_width", [0.1, 0.7, 5.0])
def test_nodes_lie_in_their_cells_and_integrate_powers_exactly(log_width):
    edges = np.array([1e-21, 1.5e-21, 4e-20, 4.1e-20])
    v, dv = nodes(edges, log_width)
    assert (np.diff(v) > 0).all()
    cell = np.searchsorted(edges, v) - 1
    for k in (-1.5, 0.0, 2.0, 5.0):
        got = np.bincount(cell, v**k * dv, minlength=3)
        np.testing.assert_allclose(got, np.diff(edges ** (k + 1)) / (k + 1), rtol=1e-13)


def test_nodes_are_as_many_as_the_law_needs():
    # cells of half a width: ln 4 at 0.4 needs 7 of them, 12 nodes each
    assert nodes(np.array([1.0, 4.0]), 0.4)[0].size == 7 * 12
    assert nodes(np.array([1.0, 4.0]), 8.0)[0].size == 3 * 12
