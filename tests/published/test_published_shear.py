"""Shear kernels and mixing figures against published formulas, worked out at high precision."""

from __future__ import annotations

import math

import pytest

import aggsim.kernels as kernels
from aggsim.inputs import Compact, Flow, Medium, Particles

GRAINS = Compact(Particles(diameter=1e-6, density=2650.0))
COLD = Medium(temperature=283.15, viscosity=1.30590e-3, density=999.7025)  # water at 10 C, IAPWS R12-08
ROOM = Medium(temperature=293.15, viscosity=1.00160e-3, density=998.2072)  # water at 20 C


def volume(diameter: float) -> float:
    return math.pi / 6.0 * diameter**3


@pytest.mark.parametrize(("other", "rate"), [(1e-6, 6.666667e-17), (5e-6, 1.800000e-15)])
def test_rectilinear_shear(other: float, rate: float) -> None:
    """G/6 (d1 + d2)**3 at 50 1/s: M. von Smoluchowski (1917), DOI 10.1515/zpch-1918-9209."""
    kernel = kernels.shear(GRAINS, Flow(shear_rate=50.0))
    assert kernel(volume(1e-6), volume(other)) == pytest.approx(rate, rel=1e-7)


def test_saffman_and_turner() -> None:
    """sqrt(8 pi/15) = 1.294417275 (printed 1.294): Saffman & Turner (1956), DOI 10.1017/S0022112056000020."""
    rate = kernels.turbulent_shear(GRAINS, Flow(shear_rate=50.0))(volume(1e-6), volume(5e-6))
    assert rate == pytest.approx(1.294417275 * (3e-6) ** 3 * 50.0, rel=1e-9)
    # with the printed constant of four digits
    assert rate * 1.294 / 1.294417275 == pytest.approx(1.746900e-15, rel=1e-6)


@pytest.mark.parametrize(
    ("diameter", "shear_rate", "ratio"),
    [(1e-6, 10.0, 1.237346), (0.1e-6, 50.0, 6.186730e-3), (10e-6, 50.0, 6.186730e3)],
)
def test_ratio_of_shear_to_brownian(diameter: float, shear_rate: float, ratio: float) -> None:
    """mu G d**3/(2 kT) for equal spheres at 20 C (algebra of the two laws of Smoluchowski 1917)."""
    v = volume(diameter)
    flow = Flow(shear_rate=shear_rate)
    computed = kernels.shear(GRAINS, flow)(v, v) / kernels.brownian(GRAINS, ROOM)(v, v)
    assert computed == pytest.approx(ratio, rel=1e-6)


@pytest.mark.parametrize(
    ("shear_rate", "micrometres"),
    [(1.0, 2.006795), (10.0, 0.931472), (50.0, 0.544728), (100.0, 0.432351), (1000.0, 0.200679)],
)
def test_crossover_diameter(shear_rate: float, micrometres: float) -> None:
    """(2 kT/(mu G))**(1/3) at 20 C, where shear overtakes Brownian motion (same algebra)."""
    v = volume(1e-6 * micrometres)
    ratio = kernels.shear(GRAINS, Flow(shear_rate=shear_rate))(v, v) / kernels.brownian(GRAINS, ROOM)(v, v)
    assert ratio == pytest.approx(1.0, abs=1e-5)  # three times the last of six printed digits


def test_mean_velocity_gradient() -> None:
    """P = mu V G**2: T. R. Camp, P. C. Stein (1943), J. Boston Soc. Civil Eng. 30, 219."""
    assert 500.0 * Flow(shear_rate=50.0).power_per_volume(COLD) == pytest.approx(1632.4, rel=1e-4)
    for medium, gradient in ((COLD, 39.1345), (ROOM, 44.6856)):
        flow = Flow.from_power(power=1000.0, volume=500.0, medium=medium)
        assert flow.shear_rate == pytest.approx(gradient, rel=1e-5)


def test_scales_of_turbulence() -> None:
    """G = 50 1/s in water at 20 C: dissipation, Kolmogorov length (nu**3/eps)**(1/4), power per volume."""
    flow = Flow(shear_rate=50.0)
    assert flow.dissipation(ROOM) == pytest.approx(2.508497e-3, rel=1e-5)
    assert flow.kolmogorov_length(ROOM) == pytest.approx(141.66e-6, rel=1e-4)
    assert flow.power_per_volume(ROOM) == pytest.approx(2.5040, rel=1e-4)
    again = Flow.turbulent(dissipation=2.508497e-3, medium=ROOM)
    assert again.shear_rate == pytest.approx(50.0, rel=1e-5)
