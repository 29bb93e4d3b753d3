"""Settling speeds, drag and differential settling against published laws and measurements."""

from __future__ import annotations

import math

import pytest

import aggsim.kernels as kernels
from aggsim.inputs import Compact, Fractal, Medium, Particles
from aggsim.kernels import SchillerNaumann, settling_velocity

WATER = Medium(temperature=293.15, viscosity=1.00160e-3, density=998.2072)  # 20 C
QUARTZ = Particles(diameter=1e-6, density=2650.0)


def volume(diameter: float) -> float:
    return math.pi / 6.0 * diameter**3


@pytest.mark.parametrize(
    ("micrometres", "stokes", "beyond", "reynolds"),
    # Stokes (1851); Schiller & Naumann (1933), Z. Ver. Dtsch. Ing. 77, 318; solved at high precision
    [
        (1.0, 8.984821e-7, 8.984727e-7, 8.9543e-7),
        (10.0, 8.984821e-5, 8.973987e-5, 8.9436e-4),
        (50.0, 2.246205e-3, 2.175302e-3, 0.10840),
        (100.0, 8.984821e-3, 7.965279e-3, 0.79383),
        (200.0, 3.593928e-2, 2.479315e-2, 4.9418),
        (500.0, 2.246205e-1, 7.848333e-2, 39.109),
        (1000.0, 8.984821e-1, 1.552076e-1, 154.68),
        (2000.0, 3.593928, 2.836992e-1, 565.48),
    ],
)
def test_quartz_in_water(micrometres: float, stokes: float, beyond: float, reynolds: float) -> None:
    d = 1e-6 * micrometres
    structure = Compact(QUARTZ)
    assert settling_velocity(structure, WATER, volume(d)) == pytest.approx(stokes, rel=1e-6)
    speed = settling_velocity(structure, WATER, volume(d), drag=SchillerNaumann())
    assert speed == pytest.approx(beyond, rel=1e-6)
    assert speed * d / WATER.kinematic_viscosity == pytest.approx(
        reynolds, rel=5e-5
    )  # half of the fifth digit


@pytest.mark.parametrize(
    ("reynolds", "coefficient"),
    [(0.1, 247.401206), (1.0, 27.6), (10.0, 4.151066), (100.0, 1.091731), (800.0, 0.474258)],
)
def test_drag_of_schiller_and_naumann(reynolds: float, coefficient: float) -> None:
    """24/Re (1 + 0.15 Re**0.687): Schiller & Naumann (1933), worked out at high precision."""
    assert SchillerNaumann().coefficient(reynolds) == pytest.approx(coefficient, rel=1.1e-6)


@pytest.mark.parametrize(
    ("reynolds", "measured"),
    [
        (0.1585, 169.8),
        (0.4786, 58.88),
        (3.02, 10.86),
        (7.015, 5.623),
        (15.49, 3.388),
        (57.54, 1.479),
        (144.5, 0.9204),
        (264.9, 0.7194),
        (512.9, 0.5623),
    ],
)
def test_measured_drag_of_smooth_spheres(reynolds: float, measured: float) -> None:
    """Points at http://www.ma.iup.edu/projects/CalcDEMma/drag/drag07.html, read from a graph: 10 %."""
    assert SchillerNaumann().coefficient(reynolds) == pytest.approx(measured, rel=0.10)


def test_differential_settling() -> None:
    """pi g (rho_p - rho)/(72 mu) (d1 + d2)**3 |d1 - d2| for 2 and 10 um (Findeisen 1939 with Stokes 1851)."""
    rate = kernels.settling(Compact(QUARTZ), WATER)(volume(2e-6), volume(10e-6))
    assert rate == pytest.approx(9.755129e-15, rel=1e-6)


@pytest.mark.parametrize(
    ("micrometres", "excess", "speed"),
    [(10.0, 165.179280, 8.984821e-6), (100.0, 16.517928, 8.984821e-5), (500.0, 3.303586, 4.492410e-4)],
)
def test_fractal_flocs(micrometres: float, excess: float, speed: float) -> None:
    """Excess density (rho_p - rho)(d/d0)**(D - 3) and Stokes speed of flocs with D = 2 of 1 um quartz."""
    flocs = Fractal(QUARTZ, dimension=2.0)
    solid = QUARTZ.volume * micrometres**2
    assert flocs.effective_density(solid, WATER.density) - WATER.density == pytest.approx(excess, rel=1e-6)
    assert settling_velocity(flocs, WATER, solid) == pytest.approx(speed, rel=1e-6)
