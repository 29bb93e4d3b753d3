from __future__ import annotations

import math

import numpy as np
import pytest

import aggsim.kernels as kernels
from aggsim.inputs import Compact, Flow, Fractal, Particles

LATEX = Particles(diameter=1e-6, density=1055.0)
FLOCS = Fractal(LATEX, dimension=2.0)


def test_the_law_of_straight_paths() -> None:
    v = LATEX.volume * np.array([1.0, 16.0])  # diameters 1 and 4 um at dimension 2
    rate = kernels.shear(FLOCS, Flow(shear_rate=30.0))(v[0], v[1])
    assert rate == pytest.approx(30.0 / 6.0 * (5e-6) ** 3, rel=1e-13)


def test_turbulence_differs_by_a_constant() -> None:
    v = LATEX.volume * np.geomspace(1.0, 1e6, 9)
    flow = Flow(shear_rate=30.0)
    for structure in (FLOCS, Compact(LATEX)):
        ratio = kernels.turbulent_shear(structure, flow)(v, v[0]) / kernels.shear(structure, flow)(v, v[0])
        np.testing.assert_allclose(ratio, math.sqrt(8.0 * math.pi / 15.0) / (4.0 / 3.0), rtol=1e-13)


def test_no_flow_no_collisions() -> None:
    assert kernels.shear(FLOCS, Flow(shear_rate=0.0))(1e-18, 1e-18) == 0.0
