from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import constants

import aggsim.kernels as kernels
from aggsim.errors import InputError
from aggsim.inputs import Compact, Fractal, Medium, Particles
from aggsim.kernels import SchillerNaumann, Stokes, settling_velocity

WATER = Medium.water(293.15)
QUARTZ = Compact(Particles(diameter=1e-6, density=2650.0))
OIL = Compact(Particles(diameter=1e-6, density=850.0))


def volume(diameter: float) -> float:
    return math.pi / 6.0 * diameter**3


def test_stokes_speed() -> None:
    expected = (2650.0 - WATER.density) * constants.g * 25e-12 / (18.0 * WATER.viscosity)
    assert settling_velocity(QUARTZ, WATER, volume(5e-6)) == pytest.approx(expected, rel=1e-13)


def test_oil_rises_and_still_collides() -> None:
    v = np.array([volume(2e-6), volume(10e-6)])
    speed = settling_velocity(OIL, WATER, v)
    assert (speed < 0.0).all()
    expected = math.pi / 4.0 * (12e-6) ** 2 * abs(speed[1] - speed[0])
    assert kernels.settling(OIL, WATER)(v[0], v[1]) == pytest.approx(expected, rel=1e-13)


@pytest.mark.parametrize("drag", [Stokes(), SchillerNaumann()])
def test_without_weight_nothing_moves(drag: kernels.Drag) -> None:
    neutral = Compact(Particles(diameter=1e-6, density=WATER.density))
    assert settling_velocity(neutral, WATER, volume(1e-4), drag=drag) == 0.0
    assert kernels.settling(neutral, WATER, drag=drag)(volume(1e-6), volume(1e-4)) == 0.0


def test_equal_sizes_do_not_meet() -> None:
    v = np.geomspace(1e-21, 1e-9, 7)
    np.testing.assert_array_equal(np.diag(kernels.settling(QUARTZ, WATER).part_matrices(v)[0].matrix), 0.0)


@given(log_reynolds=st.floats(-12.0, 5.0))
def test_the_balance_of_schiller_naumann_is_solved(log_reynolds: float) -> None:
    reynolds = 10.0**log_reynolds
    law = SchillerNaumann()
    best = law.coefficient(reynolds) * reynolds**2
    assert law.terminal_reynolds(best) == pytest.approx(reynolds, rel=1e-12)


def test_speed_never_falls_as_weight_grows() -> None:
    best = np.concatenate([[0.0], np.geomspace(1e-12, 4.3e5, 300), np.linspace(4.3e5, 4.5e5, 400)])
    reynolds = SchillerNaumann().terminal_reynolds(best)
    assert reynolds[0] == 0.0
    assert (np.diff(reynolds) >= 0.0).all()
    between = (best > 438_300.0) & (best < 440_000.0)  # the two branches leave this gap
    np.testing.assert_allclose(reynolds[between], 1000.0, rtol=1e-12)
    assert np.diff(reynolds[-400:]).max() < 0.1  # no jump: 50 of 4.4e5 in Best number is 0.06 of 1000


def test_drag_laws_meet_at_creeping_flow() -> None:
    reynolds = np.array([1e-9, 1e-6])
    both = [law.coefficient(reynolds) for law in (Stokes(), SchillerNaumann())]
    np.testing.assert_allclose(both[1], both[0], rtol=2e-5)  # 0.15 Re**0.687 = 1.1e-5 at 1e-6


def test_fractal_speed_follows_the_hydrodynamic_diameter() -> None:
    particles = Particles(diameter=1e-6, density=2650.0)
    v = 100.0 * particles.volume
    tight, loose = (Fractal(particles, dimension=2.0, hydrodynamic_ratio=ratio) for ratio in (1.0, 0.8))
    ratio = settling_velocity(loose, WATER, v) / settling_velocity(tight, WATER, v)
    assert ratio == pytest.approx(1.0 / 0.8, rel=1e-13)


def test_slip_in_a_gas() -> None:
    air = Medium.air(293.15)
    still = Medium(temperature=293.15, viscosity=air.viscosity, density=air.density)
    v = volume(0.1e-6)
    ratio = settling_velocity(QUARTZ, air, v) / settling_velocity(QUARTZ, still, v)
    assert ratio == pytest.approx(kernels.slip_correction(0.1e-6, air), rel=1e-13)


def test_shapes_and_refusals() -> None:
    assert isinstance(settling_velocity(QUARTZ, WATER, 1e-18), float)
    assert settling_velocity(QUARTZ, WATER, [1e-18, 2e-18]).shape == (2,)
    with pytest.raises(InputError, match=r"volume\[1\]"):
        settling_velocity(QUARTZ, WATER, [1e-18, -1.0])
    with pytest.raises(InputError, match="drag"):
        settling_velocity(QUARTZ, WATER, 1e-18, drag=0.44)  # type: ignore[arg-type]
