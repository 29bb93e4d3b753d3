"""The formulas behind `rates`, one against the other where they meet."""

from __future__ import annotations

import numpy as np
import pytest

from aggsim.breakage._rate_laws import Custom, FlocStrength, LargestStableSize, PowerLaw, Turbulent
from aggsim.inputs import Compact, Particles

DROPS = Compact(Particles(diameter=1e-6, density=1055.0))
VOLUMES = DROPS.particles.volume * np.geomspace(2.0, 1e12, 30)


def test_the_largest_stable_size_with_steepness_3_is_linear_in_volume() -> None:
    """(d/d_max)**3 is the ratio of volumes."""
    law = LargestStableSize(DROPS, largest_diameter=1.0, rate=3.0, steepness=3.0)
    linear = PowerLaw(coefficient=3.0 * 6.0 / np.pi, exponent=1.0)
    np.testing.assert_allclose(law(VOLUMES), linear(VOLUMES), rtol=1e-13)


def test_floc_strength_without_size_exponent_is_a_power_law() -> None:
    """(mu G d**2/F)**1.5 goes as d**3."""
    law = FlocStrength(DROPS, 100.0, 1e10, 1e-3, 0.0, 1.5)
    cubic = PowerLaw(coefficient=0.1 * 1e15 * 6.0 / np.pi, exponent=1.0)
    np.testing.assert_allclose(law(VOLUMES), cubic(VOLUMES), rtol=1e-13)


def test_large_flocs_break_at_the_frequency_of_the_bursts() -> None:
    law = Turbulent(DROPS, shear_rate=100.0, dissipation=0.01, resistance=1e-12)
    assert law(VOLUMES)[-1] == pytest.approx(100.0 * (4.0 / (15.0 * np.pi)) ** 0.5, rel=1e-7)


def test_an_own_formula_is_passed_through() -> None:
    np.testing.assert_array_equal(Custom("mine", np.square)(VOLUMES), VOLUMES**2)
