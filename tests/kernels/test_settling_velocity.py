from __future__ import annotations

import pickle

import numpy as np
import pytest

from aggsim.errors import InputError
from aggsim.inputs import Fractal, Medium, Particles
from aggsim.kernels import SchillerNaumann, SettlingVelocity, Stokes, settling_velocity

WATER = Medium.water(293.15)
FLOCS = Fractal(Particles(diameter=1e-6, density=2650.0), dimension=2.1)
VOLUMES = np.geomspace(1e-19, 1e-9, 11)


@pytest.mark.parametrize("drag", [None, SchillerNaumann()])
def test_it_is_the_settling_velocity(drag: SchillerNaumann | None) -> None:
    velocity = SettlingVelocity(FLOCS, WATER, drag=drag)
    expected = settling_velocity(FLOCS, WATER, VOLUMES, drag=drag)
    np.testing.assert_array_equal(velocity(VOLUMES), expected)
    assert velocity(VOLUMES[3]) == expected[3]
    np.testing.assert_array_equal(pickle.loads(pickle.dumps(velocity))(VOLUMES), expected)


def test_without_a_drag_law_it_is_stokes() -> None:
    assert SettlingVelocity(FLOCS, WATER) == SettlingVelocity(FLOCS, WATER, drag=Stokes())


def test_bad_input_is_refused() -> None:
    with pytest.raises(InputError, match="structure"):
        SettlingVelocity(WATER, FLOCS)  # type: ignore[arg-type]
    with pytest.raises(InputError, match="medium"):
        SettlingVelocity(FLOCS, 293.15)  # type: ignore[arg-type]
    with pytest.raises(InputError, match="drag"):
        SettlingVelocity(FLOCS, WATER, drag=SchillerNaumann)  # type: ignore[arg-type]
    with pytest.raises(InputError, match="volume"):
        SettlingVelocity(FLOCS, WATER)(np.array([1e-18, -1e-18]))
