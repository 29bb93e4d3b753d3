"""Mixing and settling of flocs against published formulas."""

from __future__ import annotations

import math

import numpy as np
import pytest

import aggsim.kernels as kernels
from aggsim.inputs import Compact, Flow, Fractal, Medium, Particles
from aggsim.kernels import SchillerNaumann, SettlingVelocity
from aggsim.studies.design_rules import (
    CONVENTIONAL_FLOCCULATION,
    FLOCCULATION,
    HIGH_ENERGY_FLOCCULATION,
    RAPID_MIX,
)
from aggsim.studies.mixers import MotorPower
from aggsim.studies.mixing import MixingPlan, MixingStage, mixing_plan
from aggsim.verification.published import physics
from aggsim.verification.published.breakage import FOUR_TANKS, PLUG_FLOW
from aggsim.verification.published.physics import COLD, ROOM


def plan_of(power: float, volume: float, time: float, medium: Medium = COLD) -> MixingPlan:
    stage = MixingStage("basin", volume, MotorPower(power_drawn=power, efficiency=1.0))
    return mixing_plan([stage], flow_rate=volume / time, media={"water": medium})


def test_mean_power_and_gradient() -> None:
    """P = mu V G**2: T. R. Camp, P. C. Stein (1943), J. Boston Soc. Civil Eng. 30, 219."""
    motor = MotorPower(power_drawn=1.0, efficiency=0.8)
    drawn = motor.power_drawn_for(shear_rate=50.0, volume=500.0, medium=COLD)
    assert 0.8 * drawn == pytest.approx(physics.POWER, rel=1e-4)
    for medium, gradient in physics.GRADIENTS:
        assert plan_of(1000.0, 500.0, 1800.0, medium).shear_rate[0, 0] == pytest.approx(gradient, rel=1e-5)


def test_scales_of_turbulence_in_a_basin() -> None:
    """G = 50 1/s at 20 C: power per volume, and Kolmogorov length (nu**3/eps)**(1/4) of Kolmogorov (1941)."""
    _, length, per_volume = physics.SCALES
    found = plan_of(per_volume * 500.0, 500.0, 1800.0, ROOM)
    assert found.shear_rate[0, 0] == pytest.approx(50.0, rel=1e-4)
    assert found.kolmogorov_length[0, 0] == pytest.approx(length, rel=1e-4)


def test_shear_rate_from_dissipation() -> None:
    flow = Flow.turbulent(dissipation=physics.SCALES[0], medium=ROOM)
    assert flow.shear_rate == pytest.approx(50.0, rel=1e-5)


def test_first_order_loss_of_single_particles() -> None:
    """exp(-4 alpha G phi t/pi) in a batch, (1 + 4 alpha G phi tau/(4 pi))**-4 in four tanks in series.

    alpha = 0.1, G = 50 1/s, phi = 5e-5, 1200 s in all: from the law of M. von Smoluchowski (1917),
    DOI 10.1515/zpch-1918-9209, at constant volume fraction; worked out at high precision.
    """
    power = COLD.viscosity * 50.0**2 * 100.0
    tanks = [MixingStage(f"tank {k}", 100.0, MotorPower(power_drawn=power, efficiency=1.0)) for k in range(4)]
    found = mixing_plan(tanks, flow_rate=100.0 / 300.0, media={"water": COLD})
    grains = Particles(diameter=1e-6, density=2650.0)
    number = 5e-5 / grains.volume
    kernel = 0.1 * kernels.shear(Compact(grains), tanks[0].flow(COLD))
    rate = 0.5 * float(kernel(grains.volume, grains.volume)) * number  # of dN/dt = -1/2 K N**2
    assert rate == pytest.approx(4.0 / math.pi * 0.1 * 50.0 * 5e-5, rel=1e-12)
    passed = rate / found.shear_rate[0, 0] * found.camp_number[:, 0]
    assert math.exp(-passed.sum()) == pytest.approx(PLUG_FLOW, rel=1e-7)
    assert np.prod(1.0 / (1.0 + passed)) == pytest.approx(FOUR_TANKS, rel=1e-7)


def test_printed_rules() -> None:
    """Rapid mix: Ten State Standards 4.1.2, Wisconsin NR 811.47(7). Others: Water Treatment Plant Design, Table 6.6."""
    assert (RAPID_MIX.shear_rate, RAPID_MIX.detention_time) == ((750.0, None), (None, 30.0))
    rule = HIGH_ENERGY_FLOCCULATION
    assert rule.shear_rate == (20.0, 75.0)
    assert rule.detention_time == (900.0, 1500.0)
    assert rule.camp_number == (40000.0, 75000.0)
    rule = CONVENTIONAL_FLOCCULATION
    assert rule.shear_rate == (10.0, 60.0)
    assert rule.detention_time == (1000.0, 1500.0)
    assert rule.camp_number == (30000.0, 60000.0)
    # the span of both kinds, and the 30 minutes of Utah Administrative Code R309-525-12
    assert FLOCCULATION.shear_rate == (10.0, 75.0)
    assert FLOCCULATION.detention_time == (1800.0, None)
    assert FLOCCULATION.camp_number[0] == 30000.0


@pytest.mark.parametrize("micrometres", physics.QUARTZ_SPEEDS)
def test_settling_speed_as_a_function_of_volume(micrometres: float) -> None:
    stokes, beyond, _ = physics.QUARTZ_SPEEDS[micrometres]
    volume = physics.volume(1e-6 * micrometres)
    assert SettlingVelocity(physics.QUARTZ, ROOM)(volume) == pytest.approx(stokes, rel=1e-6)
    velocity = SettlingVelocity(physics.QUARTZ, ROOM, drag=SchillerNaumann())
    assert velocity(volume) == pytest.approx(beyond, rel=1e-6)


@pytest.mark.parametrize("micrometres", physics.FLOCS)
def test_settling_speed_of_fractal_flocs(micrometres: float) -> None:
    """D = 2, 1 um quartz."""
    velocity = SettlingVelocity(Fractal(physics.GRAIN, dimension=2.0), ROOM)
    speed = velocity(physics.GRAIN.volume * micrometres**2)
    assert speed == pytest.approx(physics.FLOCS[micrometres][1], rel=1e-6)
