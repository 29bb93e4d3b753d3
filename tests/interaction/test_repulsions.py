"""Polymer layers, hydration and Born repulsion against integrals of their pressures."""

from __future__ import annotations

import math
from itertools import pairwise
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import constants
from scipy.integrate import quad

from aggsim.errors import InputError
from aggsim.inputs import Medium
from aggsim.interaction import Born, Brush, Hydration, born, brush_elastic, brush_osmotic, hydration

MEDIUM = Medium(temperature=298.15, viscosity=0.89e-3, density=997.0)
BRUSH = Brush(thickness=5e-9, volume_fraction=0.1, flory_parameter=0.4, molar_mass=2.0)


def derjaguin(per_area: Any, h: float, d1: float, d2: float, breaks: tuple[float, ...], end: float) -> float:
    """2 pi a times the integral of the energy per area [J/m2] from h to `end`."""
    knots = [h, *(b for b in breaks if h < b < end), end]
    total = sum(quad(per_area, lo, hi, epsabs=0.0, epsrel=1e-11)[0] for lo, hi in pairwise(knots))
    return 2.0 * math.pi * 0.5 * d1 * d2 / (d1 + d2) * total


@pytest.mark.parametrize("h", [0.3e-9, 2e-9, 4.9e-9, 5.1e-9, 9.9e-9])
def test_osmotic_part_is_the_integral_of_the_free_energy_of_mixing(h: float) -> None:
    """Two layers of uniform density mix (L < h < 2 L) or are pressed into the gap (h < L)."""
    strength = MEDIUM.thermal_energy * constants.N_A / 18.07e-6 * 0.1**2 * (0.5 - 0.4)

    def per_area(x: float) -> float:
        if x > 5e-9:
            return strength * 2.0 * (10e-9 - x)  # (2 phi)**2 - 2 phi**2 in the overlap
        return strength * ((2.0 * 5e-9 / x) ** 2 * x - 2.0 * 5e-9)

    parts = {"thickness": 5e-9, "volume_fraction": 0.1, "flory_parameter": 0.4}
    value = brush_osmotic(h, 2e-7, 3e-7, MEDIUM, solvent_molar_volume=18.07e-6, **parts)
    # quadrature to 1e-11
    assert value == pytest.approx(derjaguin(per_area, h, 2e-7, 3e-7, (5e-9,), 10e-9), rel=1e-9)


@pytest.mark.parametrize("h", [0.3e-9, 2e-9, 4.5e-9])
def test_elastic_part_is_the_integral_of_the_energy_of_the_chains(h: float) -> None:
    """Each chain loses kT ln[x ((3 - x)/2)**2] with x = h/L, the derivative of the printed bracket."""
    chains = 0.1 * 1100.0 * 5e-9 * constants.N_A / 2.0  # per area of one layer

    def per_area(y: float) -> float:
        x = y / 5e-9
        return -2.0 * chains * MEDIUM.thermal_energy * math.log(x * ((3.0 - x) / 2.0) ** 2)

    value = brush_elastic(
        h, 2e-7, 3e-7, MEDIUM, thickness=5e-9, volume_fraction=0.1, molar_mass=2.0, polymer_density=1100.0
    )
    # quadrature to 1e-11
    assert value == pytest.approx(derjaguin(per_area, h, 2e-7, 3e-7, (), 5e-9), rel=1e-9)


def test_born_is_the_integral_of_the_lennard_jones_repulsion() -> None:
    """Half-spaces repel with A s**6/(360 pi h**8) per area where they attract with A/(12 pi h**2)."""
    h = 0.3e-9
    scaled, _ = quad(lambda x: x**-8, 1.0, np.inf, epsabs=0.0)
    per_area = 1e-20 * 0.5e-9**6 / (360.0 * math.pi) * scaled * h**-7
    value = born(h, 2e-7, 3e-7, hamaker=1e-20, atom_diameter=0.5e-9)
    assert value == pytest.approx(2.0 * math.pi * 60e-9 * per_area, rel=1e-10)


def test_born_against_a_plate_is_the_published_form() -> None:
    """A s**6/7560 [(8 r + h)/(2 r + h)**7 + (6 r - h)/h**7]: Ruckenstein & Prieve (1976), 10.1002/aic.690220209."""
    r, h, s = 1e-6, 0.2e-9, 0.5e-9
    printed = 1e-20 * s**6 / 7560.0 * ((8 * r + h) / (2 * r + h) ** 7 + (6 * r - h) / h**7)
    # the plate is a sphere of 1 m; the form for h << r drops h/(6 r) = 3e-5
    assert born(h, 2 * r, 1.0, hamaker=1e-20, atom_diameter=s) == pytest.approx(printed, rel=1e-4)


def test_hydration_is_the_integral_of_an_exponential() -> None:
    value = hydration(1e-9, 2e-7, 3e-7, energy_per_area=0.01, decay_length=0.8e-9)
    expected = derjaguin(lambda x: 0.01 * math.exp(-x / 0.8e-9), 1e-9, 2e-7, 3e-7, (2e-9, 5e-9), 60e-9)
    assert value == pytest.approx(expected, rel=1e-9)


def test_layers_that_do_not_touch_do_not_act() -> None:
    assert np.all(BRUSH.energy(np.array([10e-9, 11e-9, 1.0]), 2e-7, 2e-7, MEDIUM) == 0.0)
    around = BRUSH.energy(5e-9 * np.array([1.0 - 1e-9, 1.0 + 1e-9]), 2e-7, 2e-7, MEDIUM)
    assert around[0] == pytest.approx(around[1], rel=1e-8)


def test_a_theta_solvent_leaves_the_chains_alone() -> None:
    theta = Brush(thickness=5e-9, volume_fraction=0.1, flory_parameter=0.5)
    assert np.all(theta.energy(np.geomspace(1e-10, 1e-7, 30), 2e-7, 2e-7, MEDIUM) == 0.0)
    poor = Brush(thickness=5e-9, volume_fraction=0.1, flory_parameter=0.6)
    assert poor.energy(4e-9, 2e-7, 2e-7, MEDIUM) < 0.0


@pytest.mark.parametrize("model", [BRUSH, Hydration(energy_per_area=0.01), Born(hamaker=1e-20)])
@given(h=st.floats(1e-11, 9e-9), d1=st.floats(1e-8, 1e-5), d2=st.floats(1e-8, 1e-5))
def test_repulsions_are_symmetric_positive_and_fall(model: Any, h: float, d1: float, d2: float) -> None:
    value = model.energy(h, d1, d2, MEDIUM)
    assert value > 0.0
    assert model.energy(h, d2, d1, MEDIUM) == pytest.approx(value, rel=1e-12)
    assert model.energy(1.01 * h, d1, d2, MEDIUM) < value
    assert model.energy(h, 2.0 * d1, 2.0 * d2, MEDIUM) == pytest.approx(2.0 * value, rel=1e-12)


def test_records_call_their_functions() -> None:
    h = np.geomspace(1e-10, 1e-8, 7)
    assert Hydration(energy_per_area=0.01, decay_length=2e-9).energy(h, 1e-7, 2e-7, MEDIUM) == pytest.approx(
        hydration(h, 1e-7, 2e-7, energy_per_area=0.01, decay_length=2e-9), rel=1e-15
    )
    assert Born(hamaker=2e-20, atom_diameter=4e-10).energy(h, 1e-7, 2e-7, MEDIUM) == pytest.approx(
        born(h, 1e-7, 2e-7, hamaker=2e-20, atom_diameter=4e-10), rel=1e-15
    )
    osmotic = Brush(thickness=5e-9, volume_fraction=0.1, flory_parameter=0.4)
    elastic = brush_elastic(
        h, 1e-7, 2e-7, MEDIUM, thickness=5e-9, volume_fraction=0.1, molar_mass=2.0, polymer_density=1100.0
    )
    both = osmotic.energy(h, 1e-7, 2e-7, MEDIUM) + elastic
    assert BRUSH.energy(h, 1e-7, 2e-7, MEDIUM) == pytest.approx(both, rel=1e-13)


@pytest.mark.parametrize(
    ("make", "name"),
    [
        (lambda: Brush(thickness=5.0, volume_fraction=0.1, flory_parameter=0.4), "thickness"),
        (lambda: Brush(thickness=5e-9, volume_fraction=1.0, flory_parameter=0.4), "volume_fraction"),
        (lambda: Brush(thickness=5e-9, volume_fraction=0.1, flory_parameter=9.0), "flory_parameter"),
        (
            lambda: Brush(thickness=5e-9, volume_fraction=0.1, flory_parameter=0.4, molar_mass=0.0),
            "molar_mass",
        ),
        (lambda: Hydration(energy_per_area=10.0), "energy_per_area"),
        (lambda: Hydration(energy_per_area=0.01, decay_length=1.0), "decay_length"),
        (lambda: Born(hamaker=1.0), "hamaker"),
        (lambda: Born(hamaker=1e-20, atom_diameter=5.0), "atom_diameter"),
        (lambda: Born(hamaker=1e-20).energy(0.0, 1e-7, 1e-7, MEDIUM), "h"),
        (lambda: BRUSH.energy(1e-9, -1e-7, 1e-7, MEDIUM), "d1"),
    ],
)
def test_bad_values_are_refused_by_name(make: Any, name: str) -> None:
    with pytest.raises(InputError, match=rf"^{name}="):
        make()
