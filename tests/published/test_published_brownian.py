"""Brownian rate constants against published figures."""

from __future__ import annotations

import pytest
from scipy import constants

import aggsim.kernels as kernels
from aggsim.inputs import Compact, Medium, Particles

LATEX = Compact(Particles(diameter=400e-9, density=1055.0))


def equal_pair(medium: Medium) -> float:
    return float(kernels.brownian(LATEX, medium)(LATEX.particles.volume, LATEX.particles.volume))


@pytest.mark.parametrize(
    ("celsius", "rate"),
    [
        (5.0, 6.74543e-18),
        (10.0, 7.98286e-18),
        (15.0, 9.32596e-18),
        (20.0, 1.07758e-17),
        (25.0, 1.23335e-17),
        (30.0, 14.0001e-18),
        (40.0, 17.6633e-18),
        (50.0, 21.7697e-18),
        (60.0, 26.3192e-18),
    ],
)
def test_rate_of_equal_spheres_in_water(celsius: float, rate: float) -> None:
    """8 kT/(3 mu): M. von Smoluchowski (1917), DOI 10.1515/zpch-1918-9209, viscosity IAPWS R12-08."""
    # the table was made from viscosities of five or six digits
    assert equal_pair(Medium.water(celsius + 273.15)) == pytest.approx(rate, rel=1e-5)


@pytest.mark.parametrize(
    ("temperature", "viscosity", "decay", "half_life"),
    [(293.15, 1.00160e-3, 5.38790e-18, 18.5602), (298.15, 0.89002e-3, 6.16674e-18, 16.2160)],
)
def test_decay_constant_and_half_life(
    temperature: float, viscosity: float, decay: float, half_life: float
) -> None:
    """dN/dt = -k N**2 with k = 4 kT/(3 mu), half the kernel; half-life of 1e16 1/m3 (same source)."""
    kernel = equal_pair(Medium(temperature=temperature, viscosity=viscosity, density=998.0))
    assert 0.5 * kernel == pytest.approx(decay, rel=1e-5)
    assert 1.0 / (0.5 * kernel * 1e16) == pytest.approx(half_life, rel=1e-5)


def test_diffusion_limited_reaction_of_molecules() -> None:
    """8 RT/(3 mu) = 7.4274e9 L/(mol s) in water at 25 C, the limit of Smoluchowski (1917) per mole."""
    per_mole = equal_pair(Medium.water(298.15)) * constants.N_A * 1000.0
    assert per_mole == pytest.approx(7.4274e9, rel=1e-4)


@pytest.mark.parametrize(
    ("micrometres", "factor"),
    # J. H. Seinfeld, S. N. Pandis (2016), Atmospheric Chemistry and Physics, 3rd ed., eq. 9.34, worked
    # out by hand for a mean free path of 65.1 nm
    [(0.01, 22.15), (0.1, 2.860), (1.0, 1.1637)],
)
def test_slip_correction(micrometres: float, factor: float) -> None:
    air = Medium(temperature=298.0, viscosity=1.8e-5, density=1.18, mean_free_path=65.1e-9)
    assert kernels.slip_correction(1e-6 * micrometres, air) == pytest.approx(factor, rel=3e-4)
